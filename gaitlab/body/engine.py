"""What a physics engine must offer to carry a body, and the step loop over it, written once for all engines."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from gaitlab.body.drive import Drive
from gaitlab.body.records import BodyModel

FloatArray = NDArray[np.float64]

# Bullet clamps joint speeds at 100 rad/s (or m/s), so a blow-up shows as a speed at the clamp, never as nan.
SPEED_LIMIT = 99.0
# A root block that sank below this part of its starting height has no leg under it any more (chosen by us).
COLLAPSED_FRACTION = 0.25


@dataclass(frozen=True)
class EngineSettings:
    """Numerical choices of one run: step, inertia factor, and a nudge of the starting place (x, y and height, each by it).

    `residual` is the contact solver's stopping threshold and `iterations` its most; they matter to Bullet only. A residual
    of zero costs time and keeps resting feet from creeping.
    """

    step_s: float = 1e-3
    inertia_factor: float = 60.0
    nudge_m: float = 0.0
    residual: float = 0.0
    iterations: int = 50


@dataclass(frozen=True)
class FeetState:
    """Feet at one instant, in the model's order: `position_m` (F, 3) of the middle of each foot, `velocity_m_s` (F, 3) there.

    `quaternion` (F, 4) x y z w is the orientation of the foot's link frame, `spin_rad_s` (F, 3) its turning rate in the
    world (a round foot rolls: its sole slides with velocity + spin × (0, 0, −radius)). `normal_N` (F,) is the force of
    the ground on each foot across the ground plane, zero in the air.
    """

    position_m: FloatArray
    velocity_m_s: FloatArray
    quaternion: FloatArray
    spin_rad_s: FloatArray
    normal_N: FloatArray


class Engine(Protocol):
    """One body in one world with a ground plane z = 0 and gravity tilted by the slope. Not shared between threads."""

    @property
    def name(self) -> str:
        """pybullet or mujoco."""

    @property
    def model(self) -> BodyModel:
        """What was built."""

    @property
    def settings(self) -> EngineSettings:
        """How it was built."""

    @property
    def drive(self) -> Drive:
        """The actuation law that belongs to model and settings."""

    def joint_state(self) -> FloatArray:
        """Joint positions and speeds, shape (J, 2), in the model's order."""

    def step(self, torque: FloatArray) -> None:
        """Load torques or forces (J,) along the joint axes and move on by one step."""

    def base_pose(self) -> tuple[FloatArray, FloatArray]:
        """Position (3,) of the root block's middle and orientation (4,) x y z w of its frame in the world."""

    def base_velocity(self) -> tuple[FloatArray, FloatArray]:
        """Velocity (3,) of the root link's centre of mass and its turning rate (3,) in the world."""

    def feet(self) -> FeetState:
        """Places, speeds and loads of the feet now."""

    def part_poses(self) -> tuple[FloatArray, FloatArray]:
        """Centres (P, 3) and orientations (P, 4) of all parts of the picture in the world."""

    def centre_of_mass(self) -> FloatArray:
        """Centre of mass (3,) of the whole body in the world."""

    def close(self) -> None:
        """Free the engine's memory; the engine cannot be used afterwards."""


def advance(engine: Engine, vacuum_Pa: FloatArray) -> str:
    """Step once for every row of `vacuum_Pa` (steps, inlets); returns "" or why the run cannot go on.

    The order is fixed: read the joints, work out spring, damper and the pressure of this very instant, load them, step.
    Loads last one step only, so they are loaded before every step; a pressure held over several steps moves the travel.
    Failures: "diverged" (a joint at the speed limit or a number that is none), "fell_over" (root block on the ground).
    """
    drive, state = engine.drive, np.zeros((1, 2))
    for pressure in drive.pressure_torque(vacuum_Pa):
        state = engine.joint_state()
        engine.step(drive.torque(pressure, state))
    return failure(engine, state[:, 1])


def failure(engine: Engine, speeds: FloatArray) -> str:
    """The name of what has gone wrong for good, or ""; `speeds` are those of the joints, at most one step old."""
    height = float(engine.base_pose()[0][2])
    fastest = max(float(speeds.max()), -float(speeds.min()))
    if not (np.isfinite(height) and fastest < SPEED_LIMIT):
        return "diverged"
    return "fell_over" if height < COLLAPSED_FRACTION * engine.model.start_height_m else ""
