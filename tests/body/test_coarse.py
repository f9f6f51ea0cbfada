"""The coarse body against closed forms (falling, resting, sliding, bending) and its derivatives against differences."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from gaitlab.body.bellows import bellows_law
from gaitlab.body.coarse import SINK_M, CoarseBodies
from gaitlab.body.coarse_frames import FREE, Skeleton, turned
from gaitlab.body.model import body_model
from gaitlab.body.records import BodyModel
from gaitlab.robot.parts import Foot
from gaitlab.robot.reader import read_robot
from tests.body.rigs import ROBOTS, ROW5, G, ball_foot, bending, cantilever, contracting, sled

STEP_S = 0.01


def stepped(bodies: CoarseBodies, vacuum_Pa: float, seconds: float, *, step_s: float = STEP_S) -> CoarseBodies:
    copies, inlets = len(bodies.place_m), len(bodies.model.inlets)
    for _ in range(round(seconds / step_s)):
        bodies.step(np.full((copies, inlets), vacuum_Pa), np.full(copies, step_s))
    assert not bodies.unsolved.any()
    return bodies


def scattered(model: BodyModel, copies: int) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Places, turns and joints all over."""
    rng = np.random.default_rng(3)
    turn = turned(np.tile(np.eye(3), (copies, 1, 1)), rng.normal(size=(copies, 3)))
    return rng.normal(size=(copies, 3)), turn, 0.3 * rng.normal(size=(copies, len(model.joints)))


@pytest.mark.parametrize("name", ["tray_row5", "quad_spine", "worm5"])
def test_jacobian_and_what_turning_does_to_forces_are_derivatives(name: str) -> None:
    """Central differences of the points' places, and of Jᵀf for forces that stay as they are."""
    model = body_model(read_robot(ROBOTS / f"{name}.toml").robot)
    rng = np.random.default_rng(1)
    link = rng.integers(0, len(model.links), 40)
    skeleton = Skeleton(model, link, rng.normal(size=(40, 3)))
    place, turn, joint = scattered(model, 2)
    force = rng.normal(size=(2, 40, 3))

    def moved(motion: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        frames = skeleton.frames(
            place + motion[:3], turned(turn, np.tile(motion[3:FREE], (2, 1))), joint + motion[FREE:]
        )
        points = skeleton.points(frames)
        jacobian = skeleton.jacobian(frames, points)
        return points, np.einsum("bpin,bpi->bn", jacobian, force)

    frames = skeleton.frames(place, turn, joint)
    jacobian = skeleton.jacobian(frames, skeleton.points(frames))
    stiffness = skeleton.stiffness_of_forces(frames, jacobian, force)
    np.testing.assert_array_equal(stiffness, np.swapaxes(stiffness, 1, 2))
    h = 1e-6
    for k, motion in enumerate(h * np.eye(skeleton.size)):
        (ahead, pull_ahead), (back, pull_back) = moved(motion), moved(-motion)
        np.testing.assert_allclose((ahead - back) / (2 * h), jacobian[..., k], atol=1e-7)
        if k >= FREE:  # turns of the root do not commute: there the stiffness is the symmetric half
            np.testing.assert_allclose((pull_ahead - pull_back)[:, FREE:] / (2 * h), stiffness[:, FREE:, k], atol=1e-6)


def test_a_falling_body_falls_as_the_implicit_step_has_it() -> None:
    """z = z₀ − g Δt² n (n + 1)/2, the implicit Euler sum, which tends to g t²/2; no joint moves."""
    bodies = CoarseBodies(body_model(ROW5), 3)
    bodies.place_m[:, 2] += 1.0
    before = bodies.place_m.copy()
    stepped(bodies, 0.0, 0.2)
    fallen = G * STEP_S**2 * 20 * 21 / 2
    np.testing.assert_allclose(before - bodies.place_m, [[0, 0, fallen]] * 3, atol=1e-9)
    np.testing.assert_allclose(bodies.joint, 0.0, atol=1e-6)


def test_a_resting_body_sinks_by_its_share_of_the_weight() -> None:
    bodies = stepped(CoarseBodies(body_model(sled(friction=ball_foot(0.5))), 1), 0.0, 1.0)
    assert bodies.model.start_height_m - bodies.place_m[0, 2] == pytest.approx(SINK_M, rel=0.02)


def speed_on(foot: Foot, rise: float, seconds: float, *, step_s: float = STEP_S) -> tuple[float, float]:
    """How far and how fast a sled has slid along x after `seconds` on a slope, once settled on its feet."""
    bodies = CoarseBodies(body_model(sled(friction=foot, slope_rad=math.atan(rise))), 1)
    start = stepped(bodies, 0.0, 0.1).place_m[0, 0]
    before = stepped(bodies, 0.0, seconds).place_m[0, 0]
    after = stepped(bodies, 0.0, step_s).place_m[0, 0]
    return float(before - start), float(after - before) / step_s


def test_a_foot_holds_just_below_tan_mu_and_slides_just_above() -> None:
    """Held, it gives by a part of a millimetre as it takes up the load, and then stands."""
    way, speed = speed_on(ball_foot(0.5), 0.5 * 0.98, 1.0)
    assert abs(way) < 1e-3 and abs(speed) < 1e-6
    assert speed_on(ball_foot(0.5), 0.5 * 1.02, 1.0)[0] < -0.04


@pytest.mark.parametrize(
    ("foot", "rise", "friction"),
    [
        (ball_foot(0.3), 0.36, 0.3),
        (ball_foot(0.3), -0.36, 0.3),
        (ball_foot(0.3, back=0.7, side=0.5), 0.8, 0.7),
        (ball_foot(0.3, back=0.7, side=0.5), -0.36, 0.3),
    ],
)
def test_acceleration_down_an_incline(foot: Foot, rise: float, friction: float) -> None:
    """a = g (sin α − μ cos α), Coulomb, plain and by the direction of sliding; between 0.5 and 1 s of sliding."""
    slope = math.atan(abs(rise))
    wanted = -math.copysign(G * (math.sin(slope) - friction * math.cos(slope)), rise)
    found = (speed_on(foot, rise, 1.0)[1] - speed_on(foot, rise, 0.5)[1]) / 0.5
    assert found == pytest.approx(wanted, rel=0.01)


@pytest.mark.parametrize("angle_deg", [20, 70, 110, 160])
def test_a_sliding_bristle_foot_obeys_the_law_of_hu_2009(angle_deg: float) -> None:
    """Hu, Nirody, Scott & Shelley (2009), PNAS 106, 10081: F/N = −(μ_x û_x, μ_y û_y); all that acts on the sled is N and F."""
    ahead, back, side = 0.1, 0.2, 0.7
    bodies = stepped(CoarseBodies(body_model(sled(friction=ball_foot(ahead, back=back, side=side))), 1), 0.0, 0.2)
    way = np.array([math.cos(math.radians(angle_deg)), math.sin(math.radians(angle_deg))])
    bodies._state.speed_m_s[:, :, :2] = 3.0 * way
    speeds = []
    for _ in range(6):
        before = bodies.place_m[0, :2].copy()
        stepped(bodies, 0.0, STEP_S)
        speeds.append((bodies.place_m[0, :2] - before) / STEP_S)
    slowed = -(speeds[-1] - speeds[2]) / (3 * STEP_S)
    now = np.mean(speeds[2:], axis=0) / np.linalg.norm(np.mean(speeds[2:], axis=0))
    wanted = G * np.array([(ahead if now[0] > 0 else back) * now[0], side * now[1]])
    np.testing.assert_allclose(slowed, wanted, rtol=0.06, atol=0.03)


@pytest.mark.parametrize("segments", [1, 2, 6])
def test_a_bellows_bends_to_its_free_angle_under_vacuum(segments: int) -> None:
    """With next to no load at its end: angle = free angle · p / p₀."""
    model = body_model(cantilever(bending(segments=segments, mass_kg=1e-6), tip_kg=1e-6, tip_size_m=1e-3))
    bodies = stepped(CoarseBodies(model, 1), 20e3, 2.0, step_s=0.02)
    turns = [j.kind == "revolute" for j in model.joints]
    assert abs(bodies.joint[0, turns].sum()) == pytest.approx(0.8 * 20e3 / 50e3, rel=0.01)


def test_a_bellows_hangs_by_its_weight() -> None:
    """Small load at the end of a bending bellows: angle ≈ m g (L + reach) / k for one segment whose joint is at its middle."""
    model = body_model(cantilever(bending(segments=1, mass_kg=1e-6), tip_kg=1e-3, tip_size_m=1e-3))
    bodies = stepped(CoarseBodies(model, 1), 0.0, 2.0, step_s=0.02)
    turn = next(k for k, joint in enumerate(model.joints) if joint.kind == "revolute")
    angle = abs(bodies.joint[0, turn])
    assert 0.02 * angle == pytest.approx(1e-3 * G * 0.016 * math.cos(angle), rel=0.01)


def test_a_bellows_contracts_to_its_free_stroke_and_comes_to_its_limit() -> None:
    model = body_model(cantilever(contracting(), tip_kg=1e-6, tip_size_m=1e-3))
    slide = next(k for k, joint in enumerate(model.joints) if joint.kind == "prismatic")
    bodies = stepped(CoarseBodies(model, 1), 25e3, 2.0, step_s=0.02)
    assert abs(bodies.joint[0, slide]) == pytest.approx(0.005, rel=0.01)
    far = stepped(CoarseBodies(model, 1), 95e3, 2.0, step_s=0.02).joint[0, slide]
    joint = model.joints[slide]
    pull = abs(joint.actuation[0][1]) * 95e3
    assert abs(far) > joint.stop_at
    held = joint.stiffness * abs(far) + joint.stop_gain * (abs(far) - joint.stop_at) ** 2
    assert held == pytest.approx(pull, rel=0.01)


def test_copies_do_not_feel_each_other() -> None:
    """Each copy under its own vacuum does what it does alone, to the last digits."""
    model = body_model(replace(ROW5, bellows=tuple(replace(b, segments=1) for b in ROW5.bellows)))
    rng = np.random.default_rng(4)
    table = 20e3 * (1 + np.sin(np.linspace(0, 6, 40)[:, None, None] + rng.uniform(0, 6, (3, len(model.inlets)))))
    together, alone = CoarseBodies(model, 3), CoarseBodies(model, 1)
    for vacuum_Pa in table:
        together.step(vacuum_Pa, np.full(3, STEP_S))
        alone.step(vacuum_Pa[1:2], np.full(1, STEP_S))
    np.testing.assert_allclose(together.place_m[1], alone.place_m[0], atol=1e-9)
    assert np.abs(together.place_m[0] - together.place_m[1]).max() > 1e-4


def test_a_bellows_law_is_that_of_the_engines() -> None:
    """The joints' numbers come from the same model: nothing is set twice."""
    law = bellows_law(bending())
    model = body_model(cantilever(bending(segments=1), tip_kg=0.01))
    turn = next(joint for joint in model.joints if joint.kind == "revolute")
    assert turn.stiffness == pytest.approx(law.bend_stiffness)
