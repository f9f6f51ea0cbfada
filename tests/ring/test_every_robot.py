"""One contract for every robot that ships: its ring runs, in range, and the same every time."""

from __future__ import annotations

import numpy as np
import pytest

from gaitlab.cli.ring_facts import wiring_or_even
from gaitlab.ring.solve import ring_run
from gaitlab.robot.reader import read_robot
from tests.ring.robots import ROBOTS


@pytest.mark.parametrize("name", sorted(path.name for path in ROBOTS.glob("*.toml")))
def test_ring_of_a_robot_that_ships(name: str) -> None:
    """Oscillates at its fundamental with margins; shapes, ranges and rails; solved again, the same bytes."""
    robot = read_robot(ROBOTS / name).robot
    wiring = wiring_or_even(robot, None)
    run, stages = ring_run(robot, wiring), robot.ring.stages
    assert (run.outcome, run.harmonic) == ("oscillates", 1)
    assert all(value > 0.0 for _, value in run.details)
    assert run.output_vacuum_Pa.shape == (stages, 512) and run.waves.vacuum_Pa.shape == (len(robot.inlets()), 512)
    for values in (run.phase, run.duty, run.rise_s, run.fall_s, run.output_vacuum_Pa, run.waves.vacuum_Pa):
        assert np.all(np.isfinite(values)) and np.all(values >= 0.0)
    assert np.all(run.phase < 1.0) and np.all(run.duty < 1.0) and run.start_up_s > 0.0
    assert run.output_vacuum_Pa.max() < robot.ambient.pressure_Pa
    again = ring_run(robot, wiring)
    assert again.period_s == run.period_s and again.waves.vacuum_Pa.tobytes() == run.waves.vacuum_Pa.tobytes()


@pytest.mark.parametrize("name", sorted(path.name for path in ROBOTS.glob("*.toml")))
def test_waves_are_smooth_enough_to_interpolate(name: str) -> None:
    """No step between neighbouring samples, the wrap included, is beyond a tenth of the swing."""
    robot = read_robot(ROBOTS / name).robot
    waves = ring_run(robot, wiring_or_even(robot, None)).waves.vacuum_Pa
    moving = waves[np.ptp(waves, axis=1) > 1.0]
    steps = np.abs(moving - np.roll(moving, 1, axis=1))
    assert np.all(steps.max(axis=1) < 0.1 * np.ptp(moving, axis=1))
