"""Direction-dependent friction: Coulomb's part and the part across add up to the published law."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from gaitlab.body.bristle import CREEP_M_S, Bristles, sideways_masses
from gaitlab.body.dynamics import mass_matrix
from gaitlab.body.model import body_model
from gaitlab.body.records import BodyModel
from gaitlab.robot.parts import Foot
from tests.body.rigs import ball_foot, sled

AHEAD, BACK, SIDE = 0.1, 0.2, 0.7
STEP_S = 1e-3


def runners(friction: tuple[float, float, float] = (AHEAD, BACK, SIDE)) -> BodyModel:
    ahead, back, side = friction
    foot: Foot = replace(ball_foot(ahead), friction_backward=back, friction_sideways=side)
    return body_model(sled(friction=foot))


def law_of(
    sole: np.ndarray, forward: np.ndarray, *, steps: int = 200, load_N: float = 0.5
) -> tuple[np.ndarray, np.ndarray]:
    """Coefficients and forces across of feet that go on sliding like this under an even load."""
    bristles = Bristles(runners(), step_s=STEP_S, inertia_factor=60.0)
    count = len(bristles.feet)
    force = np.tile([0.0, 0.0, load_N], (count, 1))
    for _ in range(steps):
        along, across = bristles.combed(np.tile(forward, (count, 1)), np.tile(sole, (count, 1)), force)
    return along, across


@pytest.mark.parametrize("heading", [0.0, 0.8, -2.5])
@pytest.mark.parametrize("angle_deg", [0, 20, 70, 90, 135, 180, 260])
def test_both_parts_add_up_to_the_law_of_hu_2009(angle_deg: float, heading: float) -> None:
    # Hu, Nirody, Scott & Shelley (2009), PNAS 106, 10081: F/N = −(μ_x û_x, μ_y û_y) in the foot's axes.
    angle = math.radians(angle_deg)
    way = np.array([math.cos(angle), math.sin(angle)])
    turn = np.array([[math.cos(heading), -math.sin(heading)], [math.sin(heading), math.cos(heading)]])
    along, across = law_of(turn @ (0.05 * way), turn @ np.array([1.0, 0.0]))
    coulomb = -along[0] * 0.5 * (turn @ way)
    expected = -0.5 * np.array([(AHEAD if way[0] >= -1e-12 else BACK) * way[0], SIDE * way[1]])
    np.testing.assert_allclose(turn.T @ (coulomb + across[0]), expected, atol=2e-3)


def test_a_resting_foot_takes_the_way_it_is_pushed_and_no_force_across() -> None:
    bristles = Bristles(runners(), step_s=STEP_S, inertia_factor=60.0)
    count, still = len(bristles.feet), np.zeros((len(bristles.feet), 2))
    forward = np.tile([1.0, 0.0], (count, 1))
    for holding, expected in ((-0.05, AHEAD), (0.05, BACK)):  # the floor holds against the way it is pushed
        along, across = bristles.combed(forward, still, np.tile([holding, 0.0, 0.5], (count, 1)))
        np.testing.assert_allclose(along, expected)
        np.testing.assert_array_equal(across, 0.0)


def test_below_the_creeping_speed_the_force_across_falls_in_proportion() -> None:
    forward = np.array([1.0, 0.0])
    full, half = (law_of(np.array([0.0, share * CREEP_M_S]), forward)[1][0, 1] for share in (1.0, 0.5))
    assert half == pytest.approx(full / 2, rel=1e-9)


def test_the_force_across_never_reverses_a_foot_in_one_step() -> None:
    model = runners((0.1, 0.2, 5.0))
    bristles = Bristles(model, step_s=0.02, inertia_factor=1.0)
    count, speed = len(bristles.feet), 0.005
    for _ in range(50):
        _, across = bristles.combed(
            np.tile([1.0, 0.0], (count, 1)), np.tile([0.0, speed], (count, 1)), np.tile([0.0, 0.0, 50.0], (count, 1))
        )
    momentum = sideways_masses(model, 1.0)[bristles.feet] * speed
    assert np.all(np.abs(across[:, 1]) * 0.02 <= 0.5 * momentum * (1 + 1e-9))


def test_sideways_mass_of_a_foot_is_between_nothing_and_all() -> None:
    model = runners()
    masses = sideways_masses(model, 1.0)
    whole = mass_matrix(model, 1.0)[1, 1]
    assert np.all((masses > 0.0) & (masses < whole))


def test_the_floor_s_factor_counts_in_all_directions() -> None:
    model = replace(runners(), ground_friction=0.5)
    bristles = Bristles(model, step_s=STEP_S, inertia_factor=60.0)
    count = len(bristles.feet)
    for _ in range(200):
        along, across = bristles.combed(
            np.tile([1.0, 0.0], (count, 1)), np.tile([0.0, 0.05], (count, 1)), np.tile([0.0, 0.0, 0.5], (count, 1))
        )
    np.testing.assert_allclose(along, 0.5 * AHEAD)
    np.testing.assert_allclose(across[:, 1], -0.5 * 0.5 * (SIDE - AHEAD), rtol=1e-6)
