"""Coarse walks against Bullet's: the order of wirings, the outcomes, and what they must share with any walk."""

from __future__ import annotations

import math
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from scipy.stats import spearmanr

from gaitlab.gait.coarse_walk import ENGINE, coarse_walks
from gaitlab.gait.walk import walk
from gaitlab.ring.solve import ring_run
from gaitlab.ring.waves import RingRun
from gaitlab.robot.reader import read_robot
from gaitlab.robot.records import Robot
from gaitlab.wiring.space import WiringSpace
from gaitlab.wiring.wiring import wiring_from_text
from tests.gait.test_robots import best_wiring
from tests.gait.walks import ROBOTS, ROW5, mirrored, on_slope

FILES = sorted(ROBOTS.glob("*.toml"))


def ring_of(robot: Robot, wiring: str) -> RingRun:
    return ring_run(robot, wiring_from_text(wiring, robot.inlets(), robot.ring.stages))


@pytest.mark.parametrize("path", FILES, ids=lambda path: path.stem)
def test_every_robot_walks_coarsely_with_its_best_gait(path: Path) -> None:
    """Forward, and within a half to twice of Bullet's second period."""
    robot = read_robot(path).robot
    ring = ring_of(robot, best_wiring(robot))
    (found,) = coarse_walks(robot, [ring])
    assert (found.outcome, found.engine) == ("walked", ENGINE)
    assert len(found.travels_m) == 2 and found.travels_m[-1] == found.travel_m
    assert found.body_length_m > 0 and found.height_min_m <= found.height_mean_m
    assert found.simulated_s == pytest.approx(robot.numerics.settle_s + 2 * ring.period_s)
    full, _ = walk(robot, wiring_from_text(best_wiring(robot), robot.inlets(), robot.ring.stages), ring, periods=2)
    assert 0.5 < found.travel_m / full.travels_m[-1] < 2.0
    assert found.air_kg_per_m * found.travel_m == pytest.approx(full.air_kg_per_m * full.travel_m)


@pytest.mark.slow
def test_coarse_walks_rank_wirings_as_bullet_does() -> None:
    """All 24 wirings of tray_row5: rank correlation of the second periods above 0.9, the best the same."""
    wirings = list(WiringSpace.of(ROW5))
    rings = [ring_run(ROW5, wiring) for wiring in wirings]
    coarse = [found.travel_m for found in coarse_walks(ROW5, rings)]
    full = [walk(ROW5, w, r, periods=2)[0].travels_m[-1] for w, r in zip(wirings, rings, strict=True)]
    assert spearmanr(coarse, full).statistic > 0.9
    assert np.argmax(coarse) == np.argmax(full)


def test_what_is_walked_together_changes_nothing() -> None:
    wirings = list(WiringSpace.of(ROW5))[:5]
    rings = [ring_run(ROW5, wiring) for wiring in wirings]
    together = [found.travel_m for found in coarse_walks(ROW5, rings)]
    alone = [coarse_walks(ROW5, [ring])[0].travel_m for ring in rings]
    np.testing.assert_allclose(together, alone, atol=2e-5)


def test_a_mirror_image_walks_as_far_and_drifts_the_other_way() -> None:
    robot = read_robot(ROBOTS / "hex6_ring3.toml").robot
    wiring = "l1=1 r1=2 l2=2 r2=3 l3=3 r3=1"
    (one,), (other,) = (coarse_walks(r, [ring_of(r, wiring)]) for r in (robot, mirrored(robot)))
    assert other.travel_m == pytest.approx(one.travel_m, abs=2e-5)
    assert other.drift_m == pytest.approx(-one.drift_m, abs=2e-5)
    assert other.turn_rad == pytest.approx(-one.turn_rad, abs=1e-3)
    assert abs(one.turn_rad) > 1e-3


def test_uphill_is_slower() -> None:
    ring = ring_of(ROW5, best_wiring(ROW5))
    up, flat, down = (coarse_walks(on_slope(ROW5, math.radians(a)), [ring])[0].travel_m for a in (5, 0, -5))
    assert up < flat < down


def test_a_ring_that_does_not_run_hands_on_its_outcome_among_those_that_do() -> None:
    running = ring_of(ROW5, best_wiring(ROW5))
    still = replace(running, outcome="latched", remedy="open the valves", period_s=math.nan)
    first, second, third = coarse_walks(ROW5, [running, still, running])
    assert (second.outcome, second.remedy) == ("latched", "open the valves")
    assert first.outcome == third.outcome == "walked"
    assert coarse_walks(ROW5, [still])[0].outcome == "latched"


def test_a_body_that_rubs_on_the_floor_is_told() -> None:
    """A trunk so thick that it stands 0.2 mm above the floor: it sinks to it as soon as the legs bend."""
    (trunk,) = ROW5.body.blocks
    thick = replace(trunk, size_m=(trunk.size_m[0], trunk.size_m[1], 2 * (0.042 - 2e-4)))
    low = replace(ROW5, body=replace(ROW5.body, blocks=(thick,)))
    (found,) = coarse_walks(low, [ring_of(ROW5, best_wiring(ROW5))])
    assert found.outcome == "dragging" and math.isnan(found.travel_m) and found.remedy
