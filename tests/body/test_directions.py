"""The trade knows rows of legs that walk with one of their two smooth waves only; one shipped robot is such a one."""

from __future__ import annotations

import pytest

from gaitlab.gait.walk import walk
from gaitlab.ring.sequence import alternate_order
from gaitlab.ring.solve import ring_run
from gaitlab.robot.reader import read_robot
from gaitlab.wiring.wiring import Wiring
from tests.body.rigs import ROBOTS


@pytest.mark.slow
@pytest.mark.parametrize("engine", ["pybullet", "mujoco"])
def test_the_reverse_of_the_walking_smooth_wave_nearly_stands_still(engine: str) -> None:
    """Both waves with the robot's own ring: the better one goes 5 mm a period, the other under a tenth of that."""
    robot = read_robot(ROBOTS / "tray_curl5.toml").robot
    order = alternate_order(robot.ring.stages)
    travels = []
    for outputs in (order, tuple(reversed(order))):
        wiring = Wiring(tuple(zip(robot.inlets(), outputs, strict=True)))
        walked, _ = walk(robot, wiring, ring_run(robot, wiring), engine=engine)
        assert walked.outcome == "walked"
        travels.append(walked.travel_m)
    assert max(travels) > 4e-3
    assert abs(min(travels, key=abs)) < 0.1 * max(travels)
