"""Small robots that a closed form exists for: a cantilever on a heavy base, a sled, a two-anchor crawler."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path

import numpy as np

from gaitlab.body.engine import Engine, EngineSettings, advance
from gaitlab.body.engines import open_engine
from gaitlab.body.model import body_model
from gaitlab.robot.circuit import Ground
from gaitlab.robot.parts import Bellows, Block, Body, Foot, MeasuredBend, MeasuredStroke, Skid, Spine, Unit
from gaitlab.robot.reader import read_robot
from gaitlab.robot.records import Robot

ROBOTS = Path(__file__).resolve().parents[2] / "robots"
ROW5 = read_robot(ROBOTS / "tray_row5.toml").robot
G = 9.80665


def bending(
    *,
    segments: int = 6,
    stiffness: float = 0.02,
    free_rad: float = 0.8,
    mass_kg: float = 1e-3,
    axial_N_m: float = 400.0,
    bend_damping_s: float = 0.04,
) -> Bellows:
    """A bending bellows, 32 mm long, `free_rad` at 50 kPa."""
    return Bellows(
        name="bend",
        action="bend",
        length_m=0.032,
        mass_kg=mass_kg,
        segments=segments,
        rest_volume_m3=2.4e-6,
        swept_volume_m3=0.8e-6,
        measured_bend=MeasuredBend(free_rad, 50e3, bend_stiffness_N_m_rad=stiffness),
        axial_stiffness_N_m=axial_N_m,
        solid_bend_rad=2.0,
        bend_damping_s=bend_damping_s,
        axial_damping_s=1e-4,
    )


def contracting(*, segments: int = 1, axial_N_m: float = 300.0, stroke_m: float = 0.01) -> Bellows:
    """A contracting bellows, 32 mm long, `stroke_m` at 50 kPa."""
    return Bellows(
        name="pull",
        action="contract",
        length_m=0.032,
        mass_kg=0.004,
        segments=segments,
        rest_volume_m3=2.4e-6,
        swept_volume_m3=0.8e-6,
        measured_stroke=MeasuredStroke(stroke_m, 50e3),
        axial_stiffness_N_m=axial_N_m,
        bend_stiffness_N_m_rad=0.05,
        solid_stroke_m=0.016,
        axial_damping_s=0.01,
    )


def robot_with(body: Body, bellows: Sequence[Bellows], feet: Sequence[Foot], ground: Ground | None = None) -> Robot:
    """The five-leg crawler's circuit with another body on it."""
    return replace(ROW5, body=body, bellows=tuple(bellows), feet=tuple(feet), ground=ground or Ground())


def cantilever(bellows: Bellows, *, tip_kg: float, toward: str = "down", tip_size_m: float = 0.03) -> Robot:
    """A small block at the end of a bellows that sticks out backwards from a base of 200 kg on four skids."""
    base = Block("base", (0.2, 0.2, 0.2), 200.0)
    tip = Block("tip", (tip_size_m,) * 3, tip_kg)
    spine = Spine("arm", "base", "tip", (-0.1, 0.0, 0.0), (0.0, 0.0, 0.0), toward, (Unit(bellows.name, "arm"),))
    return robot_with(Body((base, tip), (), (spine,), corner_skids("base", 0.08, -0.2)), [bellows], [ball_foot(1.0)])


def sled(*, friction: Foot, slope_rad: float = 0.0) -> Robot:
    """A block of 0.2 kg on four skids, with a stiff light tail that makes it a robot."""
    tail = replace(bending(stiffness=0.5, segments=1), mass_kg=1e-3)
    blocks = (Block("sled", (0.12, 0.08, 0.02), 0.2), Block("tail", (0.005, 0.005, 0.005), 0.001))
    spine = Spine("arm", "sled", "tail", (-0.06, 0.0, 0.0), (0.0, 0.0, 0.0), "left", (Unit("bend", "arm"),))
    body = Body(blocks, (), (spine,), corner_skids("sled", 0.04, -0.012))
    return robot_with(body, [tail], [friction], Ground(slope_rad))


def crawler(*, ahead: float, back: float, block_kg: float = 0.03, segments: int = 1) -> Robot:
    """Two blocks joined by a contracting bellows, each on a pad of bristles that slides forward easily."""
    bristle = Foot("bristle", 0.004, ahead, 5e-4, 0.03, "across", friction_backward=back, friction_sideways=back)
    blocks = (Block("front", (0.03, 0.03, 0.02), block_kg), Block("rear", (0.03, 0.03, 0.02), block_kg))
    pull = contracting(segments=segments)
    spine = Spine("pull", "front", "rear", (-0.015, 0, 0), (0.015, 0, 0), "down", (Unit("pull", "pull"),))
    skids = tuple(
        Skid(f"{block}{end}", block, (x, 0.0, -0.012), "bristle")
        for block in ("front", "rear")
        for end, x in (("1", 0.01), ("2", -0.01))
    )
    return robot_with(Body(blocks, (), (spine,), skids), [pull], [bristle])


def corner_skids(block: str, half_m: float, z_m: float) -> tuple[Skid, ...]:
    """Four skids under the corners of a block."""
    places = [(x, y) for x in (half_m, -half_m) for y in (half_m, -half_m)]
    return tuple(Skid(f"{block}{index}", block, (x, y, z_m), "ball") for index, (x, y) in enumerate(places))


def ball_foot(friction: float, *, back: float | None = None, side: float | None = None) -> Foot:
    """A foot of one sphere."""
    return Foot("ball", 0.004, friction, 1e-3, friction_backward=back, friction_sideways=side)


def opened(robot: Robot, engine: str = "pybullet", **settings: float) -> Engine:
    """An engine with the robot's body in it."""
    return open_engine(engine, body_model(robot), EngineSettings(**settings))  # type: ignore[arg-type]


def held(engine: Engine, vacuum_Pa: float, seconds: float) -> None:
    """Run with every inlet at one vacuum, raised smoothly over the first half."""
    steps = round(seconds / engine.settings.step_s)
    rise = 0.5 - 0.5 * np.cos(np.pi * np.clip(np.linspace(0.0, 2.0, steps), 0.0, 1.0))
    assert advance(engine, np.outer(vacuum_Pa * rise, np.ones(len(engine.model.inlets)))) == ""


def place_of(engine: Engine, block: str) -> np.ndarray:
    """Middle of a block in the world."""
    index = next(i for i, part in enumerate(engine.model.parts) if part.name == block)
    return np.asarray(engine.part_poses()[0][index])


def heading_of(engine: Engine, block: str) -> float:
    """Heading of a block about the vertical [rad]."""
    index = next(i for i, part in enumerate(engine.model.parts) if part.name == block)
    x, y, z, w = engine.part_poses()[1][index]
    return math.atan2(2.0 * (w * z + x * y), 1.0 - 2.0 * (y * y + z * z))
