"""One contract over every shipped robot and engine: each measure finite, of the right shape, in range, repeatable.

And for each robot its best gait with its own ring: forward, and clearly above the scatter.
"""

from __future__ import annotations

import math
from pathlib import Path

import numpy as np
import pytest

from gaitlab.gait.records import Walk
from gaitlab.gait.walk import walk
from gaitlab.ring.solve import ring_run
from gaitlab.robot.reader import read_robot
from gaitlab.robot.records import Robot
from gaitlab.wiring.space import WiringSpace
from gaitlab.wiring.wiring import wiring_from_text
from tests.gait.walks import BEST, ROBOTS, ideal_walk

FILES = sorted(ROBOTS.glob("*.toml"))
ENGINES = ("pybullet", "mujoco")


def best_wiring(robot: Robot) -> str:
    return BEST.get(robot.name) or next(iter(WiringSpace.of(robot))).text()


@pytest.mark.parametrize("engine", ENGINES)
@pytest.mark.parametrize("path", FILES, ids=lambda path: path.stem)
def test_contract(path: Path, engine: str) -> None:
    robot = read_robot(path).robot
    first, trace = ideal_walk(robot, best_wiring(robot), period_s=0.5, periods=2, engine=engine, trace_hz=20)
    assert first.outcome == "walked"
    assert trace is not None
    check_ranges(robot, first)
    assert [name for name, _ in first.duty_factor] == list(trace.feet)
    assert trace.inlets == robot.inlets()
    for array in (trace.position_m, trace.quaternion, trace.foot_m, trace.vacuum_Pa):
        assert np.isfinite(array).all() and len(array) == len(trace.time_s)
    again, _ = ideal_walk(robot, best_wiring(robot), period_s=0.5, periods=2, engine=engine)
    assert repr(again) == repr(first)


def check_ranges(robot: Robot, walked: Walk) -> None:
    for name in (
        "travel_m",
        "drift_m",
        "turn_rad",
        "slip",
        "body_length_m",
        "pitch_rad",
        "height_mean_m",
        "stability_margin_m",
    ):
        assert math.isfinite(getattr(walked, name)), name
    assert abs(walked.travel_m) < 0.5 * walked.body_length_m
    assert walked.slip >= 0.0
    assert 0.0 < walked.height_min_m <= walked.height_mean_m < walked.body_length_m
    assert abs(walked.stability_margin_m) < walked.body_length_m
    assert walked.step_s == pytest.approx(robot.numerics.step_s, rel=0.05)
    assert all(0.0 <= duty <= 1.0 for _, duty in walked.duty_factor)
    assert all(0.0 <= phase <= 1.0 for _, stances in walked.stance for stance in stances for phase in stance)
    assert walked.wave.direction in ("direct", "retrograde", "standing", "none")
    assert 0.0 <= walked.wave.coherence <= 1.0 + 1e-9


@pytest.mark.slow
@pytest.mark.parametrize("path", FILES, ids=lambda path: path.stem)
def test_the_best_gait_walks_forward_clearly_above_its_scatter(path: Path) -> None:
    robot = read_robot(path).robot
    wiring = wiring_from_text(best_wiring(robot), robot.inlets(), robot.ring.stages)
    walked, _ = walk(robot, wiring, ring_run(robot, wiring))
    assert walked.outcome == "walked"
    assert walked.travel_m > 2e-3
    assert walked.travel_m > 10 * walked.travel_scatter_m
    assert walked.travel_m < 0.25 * walked.body_length_m, "published many-legged walkers make about 0.2 body lengths"
    assert 0.0 < walked.air_kg_per_m < 1.0
