"""Motion: free oscillation, mass matrix, joints in the air in both engines, and the damper that keeps its damping."""

from __future__ import annotations

import math
from dataclasses import replace

import mujoco
import numpy as np
import pytest

from gaitlab.body.drive import Drive, damping_parts, light_motions
from gaitlab.body.dynamics import centre_of_mass, link_origins, mass_matrix
from gaitlab.body.engine import EngineSettings, advance
from gaitlab.body.model import body_model
from gaitlab.body.mujoco_engine import MujocoEngine
from gaitlab.robot.parts import Block, Body, Spine, Unit
from gaitlab.robot.reader import read_robot
from tests.body.rigs import (
    ROBOTS,
    ROW5,
    ball_foot,
    bending,
    cantilever,
    contracting,
    corner_skids,
    crawler,
    held,
    opened,
    robot_with,
)

ENGINES = ("pybullet", "mujoco")
SHIPPED = sorted(ROBOTS.glob("*.toml"))


@pytest.mark.parametrize("engine", ENGINES)
def test_free_oscillation_has_the_frequency_of_a_pendulum_on_a_spring(engine: str) -> None:
    """f = √(k/I)/2π, one joint in the middle of the bellows, I of the tip block about it by the parallel axis."""
    stiffness, tip, size, length = 0.05, 0.05, 0.03, 0.032
    bellows = bending(segments=1, stiffness=stiffness, bend_damping_s=1e-4, axial_N_m=4e4)
    world = opened(cantilever(bellows, tip_kg=tip, toward="left", tip_size_m=size), engine)
    piece = 0.5 * bellows.mass_kg
    arm, radius = 0.5 * length, 0.5 * bellows.diameter_m
    inertia = tip * (arm**2 + size**2 / 6.0)
    inertia += piece * ((0.5 * arm) ** 2 + arm**2 / 12.0 + radius**2 / 4.0)
    rate = world.settings.step_s
    push = 3e3 * np.ones((round(0.05 / rate), 1))
    assert advance(world, push) == ""
    angles = []
    for _ in range(round(3.0 / rate)):
        assert advance(world, np.zeros((1, 1))) == ""
        angles.append(world.joint_state()[1, 0])
    crossings = np.flatnonzero(np.diff(np.sign(angles)) > 0)
    fine = crossings - np.array(angles)[crossings] / np.diff(angles)[crossings]
    period = float(np.diff(fine).mean()) * rate
    assert 1.0 / period == pytest.approx(math.sqrt(stiffness / inertia) / (2.0 * math.pi), rel=0.01)


@pytest.mark.parametrize("path", SHIPPED, ids=lambda path: path.stem)
@pytest.mark.parametrize("factor", [1.0, 60.0])
def test_mass_matrix_is_that_of_the_second_engine(path, factor: float) -> None:  # type: ignore[no-untyped-def]
    """Our Σ m JᵥᵀJᵥ + J_ωᵀ I J_ω at zero pose against MuJoCo's own composite-body algorithm."""
    model = body_model(read_robot(path).robot)
    world = MujocoEngine(model, EngineSettings(step_s=1e-4, inertia_factor=factor))
    full = second_mass_matrix(world)
    ours = mass_matrix(model, factor)
    assert ours == pytest.approx(full, rel=1e-9, abs=1e-12 * np.abs(full).max())


def second_mass_matrix(world: MujocoEngine) -> np.ndarray:
    """Column k is the force that a unit acceleration of coordinate k takes."""
    size = world._world.nv
    columns = np.zeros((size, size))
    for index, unit in enumerate(np.eye(size)):
        mujoco.mj_mulM(world._world, world._data, columns[index], unit)
    return columns


@pytest.mark.parametrize("path", SHIPPED, ids=lambda path: path.stem)
def test_engines_stand_the_body_where_the_model_says(path) -> None:  # type: ignore[no-untyped-def]
    """Frames, centres of mass and feet of both engines before the first step, against the model's own kinematics."""
    model = body_model(read_robot(path).robot)
    root = np.array([0.0, 0.0, model.start_height_m])
    origins = link_origins(model) + root
    for name in ENGINES:
        world = opened(read_robot(path).robot, name, step_s=2.5e-4)
        assert world.base_pose()[0] == pytest.approx(root, abs=1e-6)
        assert world.centre_of_mass() == pytest.approx(centre_of_mass(model) + root, abs=1e-6)
        centres = np.array([origins[look.link] + look.centre_m for look in model.looks])
        assert world.part_poses()[0] == pytest.approx(centres, abs=1e-6)
        feet = np.array([origins[foot.link] + np.mean(foot.centres_m, axis=0) for foot in model.feet])
        assert world.feet().position_m == pytest.approx(feet, abs=1e-6)


def test_joints_in_the_air_move_alike_in_both_engines() -> None:
    """A two-bellows chain that swings in the air under two waves: every joint within 0.5 % of its swing."""
    swings = {name: air_motion(name) for name in ENGINES}
    swing = np.ptp(swings["pybullet"], axis=0)
    assert swing.min() > 0.05
    assert np.abs(swings["pybullet"] - swings["mujoco"]).max(axis=0) == pytest.approx(0.0, abs=0.005 * swing.min())


def air_motion(engine: str, step_s: float = 2.5e-4) -> np.ndarray:
    """Turning joints (100, J) of the chain over a second."""
    bellows = bending(segments=2, stiffness=0.03, free_rad=0.6)
    blocks = (Block("base", (0.2, 0.2, 0.2), 200.0), Block("tip", (0.03, 0.03, 0.03), 0.01))
    units = (Unit("bend", "inner"), Unit("bend", "outer"))
    spine = Spine("arm", "base", "tip", (-0.1, 0.0, 0.0), (0.0, 0.0, 0.0), "left", units)
    body = Body(blocks, (), (spine,), corner_skids("base", 0.08, -0.2))
    world = opened(robot_with(body, [bellows], [ball_foot(1.0)]), engine, step_s=step_s)
    times = step_s * np.arange(round(1.0 / step_s))
    waves = 20e3 * (1.0 - np.cos(2.0 * np.pi * 2.0 * (times[:, None] - np.array([0.0, 0.12]))))
    turning = [index for index, joint in enumerate(world.model.joints) if joint.kind == "revolute"]
    rows = []
    for chunk in np.split(waves, 100):
        assert advance(world, chunk) == ""
        rows.append(world.joint_state()[turning, 0])
    return np.array(rows)


def test_light_motions_are_turns_and_slides_of_one_bellows_apart() -> None:
    """The trunk must not be among them: a common motion of all slides of a bellows has no part in any."""
    for segments in (1, 2, 3):
        model = body_model(crawler(ahead=0.1, back=0.9, segments=segments))
        light = light_motions(model)
        assert light.T @ light == pytest.approx(np.eye(2 + segments - 1), abs=1e-12)
        slides = np.array([joint.kind == "prismatic" for joint in model.joints], dtype=float)
        assert light.T @ slides == pytest.approx(np.zeros(light.shape[1]), abs=1e-12)
        implicit, explicit = damping_parts(model)
        assert implicit + explicit == pytest.approx(np.diag([joint.damping for joint in model.joints]), abs=1e-12)
        whole = slides / slides.sum()
        assert whole @ explicit @ whole == pytest.approx(300.0 * 0.01, rel=1e-9)


def test_look_ahead_is_the_implicit_euler_step_in_the_air() -> None:
    """Order 2 by halving the step: joints of the swinging chain against MuJoCo at a twentieth of a millisecond."""
    reference = air_motion("mujoco", step_s=5e-5)
    errors = [np.abs(air_motion("pybullet", step_s=step_s) - reference).max() for step_s in (1e-3, 5e-4, 2.5e-4)]
    orders = np.log2(np.array(errors[:-1]) / np.array(errors[1:]))
    assert orders.min() > 1.6


def test_a_standing_robot_feels_its_springs_alone() -> None:
    """Statics are exact: after a rest, the torque on every joint is pressure − k q, whatever its damping."""
    world = opened(ROW5)
    held(world, 20e3, 3.0)
    state = world.joint_state()
    pressure = world.drive.pressure_torque(np.full((1, 5), 20e3))[0]
    elastic = world.drive.elastic_torque(pressure, state[:, 0])
    assert world.drive.torque(pressure, state) == pytest.approx(elastic, rel=1e-5, abs=1e-8)


def test_drive_sums_pressure_spring_damper_and_stop() -> None:
    """One joint by hand: P − k q − c q̇ − s (|q| − q_s)²."""
    bellows = replace(contracting(), axial_damping_s=0.02)
    model = body_model(cantilever(bellows, tip_kg=5e-3))
    slide = next(index for index, joint in enumerate(model.joints) if joint.kind == "prismatic")
    drive = Drive(model, step_s=1e-4, inertia_factor=60.0)
    state = np.zeros((len(model.joints), 2))
    state[slide] = (-0.018, 0.03)
    vacuum = 30e3
    torque = drive.torque(drive.pressure_torque(np.array([[vacuum]]))[0], state)[slide]
    joint = model.joints[slide]
    expected = -300.0 * 0.01 / 50e3 * vacuum + 300.0 * 0.018 - 300.0 * 0.02 * 0.03 + joint.stop_gain * 0.002**2
    assert torque == pytest.approx(expected, rel=1e-12)
