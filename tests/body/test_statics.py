"""Bellows in the engines against beam theory, and weight on the feet against m g."""

from __future__ import annotations

import numpy as np
import pytest

from gaitlab.body.bellows import bellows_law
from gaitlab.robot.records import Robot
from tests.body.rigs import ROW5, G, bending, cantilever, contracting, crawler, heading_of, held, opened, place_of

ENGINES = ("pybullet", "mujoco")


@pytest.mark.parametrize("engine", ENGINES)
def test_tip_deflection_under_load_is_that_of_a_cantilever(engine: str) -> None:
    """w = F L³/(3 EI) + w L⁴/(8 EI), the textbook cantilever with an end load and its own weight, at a small angle."""
    stiffness, length, tip = 0.02, 0.032, 0.004
    world = opened(cantilever(bending(stiffness=stiffness, segments=8), tip_kg=tip), engine, step_s=5e-4)
    held(world, 0.0, 1.5)
    sag = place_of(world, "base")[2] - place_of(world, "tip")[2]
    own_weight = 1e-3 * G * length**2 / (8.0 * stiffness)
    assert sag == pytest.approx(tip * G * length**2 / (3.0 * stiffness) + own_weight, rel=0.01)


@pytest.mark.parametrize("segments", [1, 2, 4])
def test_segments_at_centres_bend_as_the_discrete_closed_form(segments: int) -> None:
    """Sum over the joints: w = F L²/k (1/3 − 1/(12 K²)), which tends to the beam's third."""
    stiffness, length, tip = 0.02, 0.032, 0.004
    sags = []
    for load in (tip, 2.0 * tip):
        world = opened(cantilever(bending(stiffness=stiffness, segments=segments), tip_kg=load), step_s=5e-4)
        held(world, 0.0, 1.5)
        sags.append(place_of(world, "base")[2] - place_of(world, "tip")[2])
    expected = tip * G * length**2 / stiffness * (1.0 / 3.0 - 1.0 / (12.0 * segments**2))
    assert sags[1] - sags[0] == pytest.approx(expected, rel=0.01)


@pytest.mark.parametrize("engine", ENGINES)
@pytest.mark.parametrize("vacuum_Pa", [10e3, 40e3])
def test_bend_under_vacuum_is_the_free_bend(engine: str, vacuum_Pa: float) -> None:
    """The far end turns by moment over stiffness; bending sideways, gravity has no part in it."""
    bellows = bending(free_rad=0.8)
    world = opened(cantilever(bellows, tip_kg=2e-3, toward="left"), engine, step_s=5e-4)
    held(world, vacuum_Pa, 2.0)
    turned = heading_of(world, "base") - heading_of(world, "tip")
    assert turned == pytest.approx(0.8 * vacuum_Pa / 50e3, rel=0.01)
    assert turned == pytest.approx(float(bellows_law(bellows).free_deflection(vacuum_Pa)), rel=0.01)


@pytest.mark.parametrize("engine", ENGINES)
def test_a_bellows_past_its_solid_limit_stops_where_its_law_says(engine: str) -> None:
    bellows, vacuum_Pa = bending(free_rad=1.95, segments=3), 57e3
    world = opened(cantilever(bellows, tip_kg=2e-3, toward="right"), engine, step_s=2.5e-4)
    held(world, vacuum_Pa, 1.5)
    law = bellows_law(bellows)
    assert law.gain * vacuum_Pa / law.stiffness > 1.1 * law.solid, "the vacuum must drive it past the limit"
    turned = heading_of(world, "tip") - heading_of(world, "base")
    assert turned == pytest.approx(float(law.free_deflection(vacuum_Pa)), rel=0.01)


@pytest.mark.parametrize("segments", [1, 2, 3])
def test_a_contracting_bellows_shortens_by_its_free_stroke(segments: int) -> None:
    """Stroke = force over stiffness, whatever the number of segments."""
    world = opened(cantilever(contracting(segments=segments), tip_kg=5e-3), step_s=5e-4)
    before = place_of(world, "tip")[0] - place_of(world, "base")[0]
    held(world, 25e3, 2.0)
    after = place_of(world, "tip")[0] - place_of(world, "base")[0]
    assert after - before == pytest.approx(0.005, rel=0.01)


@pytest.mark.parametrize("engine", ENGINES)
@pytest.mark.parametrize("robot", [ROW5, crawler(ahead=0.1, back=0.9)], ids=["row", "crawler"])
def test_weight_on_the_feet_is_m_g(engine: str, robot: Robot) -> None:
    world = opened(robot, engine)
    held(world, 0.0, 2.0)
    assert world.feet().normal_N.sum() == pytest.approx(world.model.mass_kg * G, rel=1e-3)


def test_leg_sinks_by_its_share_of_the_weight_over_its_axial_stiffness() -> None:
    """Five equal legs in parallel under the trunk: sag = (m_above g)/(5 k)."""
    world = opened(ROW5)
    start = world.model.start_height_m
    held(world, 0.0, 2.0)
    above = world.model.links[0].mass_kg
    sag = -np.mean(world.joint_state()[::5, 0])
    assert sag == pytest.approx(above * G / (5 * 400.0), rel=0.01)
    assert start - world.base_pose()[0][2] == pytest.approx(sag, abs=2e-5), "feet sink by Bullet's contact slop"
