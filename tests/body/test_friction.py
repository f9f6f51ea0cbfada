"""Coulomb friction on an incline, plain and with bristles, against tan μ and g (sin α − μ cos α)."""

from __future__ import annotations

import math

import numpy as np
import pytest

from gaitlab.body.engine import advance
from gaitlab.robot.parts import Foot
from tests.body.rigs import G, ball_foot, crawler, held, opened, place_of, sled

ENGINES = ("pybullet", "mujoco")
# MuJoCo's convex contacts make a fast slider chatter about the right mean, so its accelerations are held to 6 %.
WITHIN = {"pybullet": 0.01, "mujoco": 0.06}


def slid(foot: Foot, slope_rad: float, engine: str, seconds: float) -> float:
    """Way [m] that a sled goes along x on a slope within `seconds`, once it has come to rest on its feet."""
    world = opened(sled(friction=foot, slope_rad=slope_rad), engine)
    held(world, 0.0, 0.1)
    before = world.centre_of_mass()[0]
    held(world, 0.0, seconds)
    return float(world.centre_of_mass()[0] - before)


@pytest.mark.parametrize("engine", ENGINES)
def test_a_foot_holds_just_below_tan_mu_and_slides_just_above(engine: str) -> None:
    below, above = math.atan(0.5 * 0.99), math.atan(0.5 * 1.01)
    assert abs(slid(ball_foot(0.5), below, engine, 0.5)) < 2e-4
    assert slid(ball_foot(0.5), above, engine, 0.5) < -4e-3


@pytest.mark.parametrize("engine", ENGINES)
@pytest.mark.parametrize("rise", [0.36, -0.36])
def test_acceleration_down_an_incline(engine: str, rise: float) -> None:
    """a = g (sin α − μ cos α), Coulomb."""
    found = acceleration(ball_foot(0.3), math.atan(rise), engine)
    assert found == pytest.approx(sliding_acceleration(rise, 0.3), rel=WITHIN[engine])


def sliding_acceleration(rise: float, friction: float) -> float:
    """a = −sign(α) g (sin |α| − μ cos α) on a slope of tan α = `rise`."""
    slope = math.atan(abs(rise))
    return -math.copysign(G * (math.sin(slope) - friction * math.cos(slope)), rise)


@pytest.mark.parametrize("engine", ENGINES)
def test_bristles_hold_and_slide_by_direction(engine: str) -> None:
    """On +α the sled would slide back (high friction), on −α forward (low): each limit within 1 %."""
    foot = ball_foot(0.3, back=0.7, side=0.5)
    assert abs(slid(foot, math.atan(0.7 * 0.99), engine, 0.5)) < 3e-4
    assert slid(foot, math.atan(0.7 * 1.01), engine, 0.5) < -4e-3
    assert abs(slid(foot, -math.atan(0.3 * 0.99), engine, 0.5)) < 3e-4
    assert slid(foot, -math.atan(0.3 * 1.01), engine, 0.5) > 4e-3


@pytest.mark.parametrize("engine", ENGINES)
@pytest.mark.parametrize(("rise", "friction"), [(0.8, 0.7), (-0.36, 0.3)])
def test_bristles_slide_by_direction(engine: str, rise: float, friction: float) -> None:
    found = acceleration(ball_foot(0.3, back=0.7, side=0.5), math.atan(rise), engine)
    assert found == pytest.approx(sliding_acceleration(rise, friction), rel=WITHIN[engine])


def acceleration(foot: Foot, slope_rad: float, engine: str) -> float:
    """Mean acceleration [m/s²] along x over 0.4 s of sliding."""
    world = opened(sled(friction=foot, slope_rad=slope_rad), engine, step_s=5e-4)
    held(world, 0.0, 0.1)
    before = world.base_velocity()[0][0]
    held(world, 0.0, 0.4)
    return float(world.base_velocity()[0][0] - before) / 0.4


@pytest.mark.parametrize("engine", ENGINES)
@pytest.mark.parametrize("segments", [1, 2])
def test_two_anchor_crawler_makes_its_analytic_stride(engine: str, segments: int) -> None:
    """One block holds while the other slides: stride = free stroke − 2 F/k, F the sliding friction of one block.

    Contracted, the rear drags F behind it and stops F/k short; let go, the front pushes F ahead and stops F/k short.
    """
    ahead, stiffness, stroke = 0.15, 300.0, 0.01
    world = opened(crawler(ahead=ahead, back=0.9, segments=segments), engine)
    sliding = ahead * 0.5 * world.model.mass_kg * G
    rate, period = world.settings.step_s, 1.0
    vacuum = 25e3 * (1.0 - np.cos(2.0 * np.pi * np.arange(0.0, period, rate) / period))
    held(world, 0.0, 0.5)
    places = []
    for _ in range(4):
        assert advance(world, vacuum[:, None]) == ""
        places.append(place_of(world, "front")[0])
    assert np.diff(places)[1:] == pytest.approx(stroke - 2.0 * sliding / stiffness, rel=0.02)
