"""The body as both physics engines build it: a tree of rigid links, one joint each, and the numbers of every joint.

When every joint is at zero all link frames are parallel to the body frame (x forward, y left, z up), so that axes,
offsets and inertias of all links are written in one orientation. Link 0 is the root block and moves freely; joint j
carries link j + 1.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from gaitlab.gait.records import Part
from gaitlab.robot.circuit import Vector

FloatArray = NDArray[np.float64]
GRAVITY_M_S2 = 9.80665  # standard gravity, ISO 80000-3


@dataclass(frozen=True)
class Joint:
    """The joint that carries a link: a slide along or a turn about `axis` (unit vector) at `origin_m` in the parent's frame.

    Torque or force along the axis: actuation by inlet · vacuum − stiffness · q − damping · q̇ − stop_gain · (|q| − stop_at)²
    with the sign of q, the last only past `stop_at`. `unit` names the bellows (by its inlet) that the joint is a segment of;
    it is empty for the slide that stands for the lengthwise give of a chain's bending bellows.
    """

    kind: str  # "revolute" | "prismatic"
    axis: Vector
    origin_m: Vector
    chain: str
    unit: str
    stiffness: float
    damping: float
    stop_at: float
    stop_gain: float
    actuation: tuple[tuple[str, float], ...]

    def stiffest(self, vacuum_Pa: float) -> float:
        """Stiffness with the solid limit as far in as `vacuum_Pa` drives it: k √(1 + 4 (stop_gain/k) (P/k − stop_at))."""
        pull = max((abs(gain) for _, gain in self.actuation), default=0.0) * vacuum_Pa
        past = max(pull / self.stiffness - self.stop_at, 0.0)
        return float(self.stiffness * np.sqrt(1.0 + 4.0 * self.stop_gain / self.stiffness * past))


@dataclass(frozen=True)
class Link:
    """A rigid link: `com_m` and `inertia_kg_m2` (3 × 3 about the centre of mass) in its own frame, which sits in its joint.

    `scaled_axis` is the axis about which the numerical inertia factor acts (None: left as it is, as blocks are).
    """

    name: str
    parent: int
    mass_kg: float
    com_m: Vector
    inertia_kg_m2: tuple[Vector, Vector, Vector]
    joint: Joint | None = None
    scaled_axis: Vector | None = None

    def inertia(self, factor: float) -> FloatArray:
        """Inertia [kg m²] (3, 3) with `factor` on the rotation about `scaled_axis`: I + (factor − 1)(a·I·a) a aᵀ."""
        inertia: FloatArray = np.array(self.inertia_kg_m2)
        if self.scaled_axis is None:
            return inertia
        axis = np.array(self.scaled_axis)
        return np.asarray(inertia + (factor - 1.0) * (axis @ inertia @ axis) * np.outer(axis, axis))


@dataclass(frozen=True)
class FootModel:
    """A foot: spheres of `radius_m` at `centres_m` in the frame of `link`. Friction for sliding forward, back and sideways.

    Forward is +x of the link's frame. `leg` tells a leg's foot from a skid on a block.
    """

    name: str
    link: int
    centres_m: tuple[Vector, ...]
    radius_m: float
    friction: tuple[float, float, float]
    leg: bool

    @property
    def bristle(self) -> bool:
        """Whether friction depends on the direction of sliding."""
        return len(set(self.friction)) > 1


@dataclass(frozen=True)
class Look:
    """Where a part of the picture sits: centre and orientation (x y z w) in the frame of its link."""

    part: Part
    link: int
    centre_m: Vector
    quaternion: tuple[float, float, float, float]


@dataclass(frozen=True)
class BlockModel:
    """A block of the robot file: which link carries it and where its middle sits in that link's frame."""

    name: str
    link: int
    centre_m: Vector


@dataclass(frozen=True)
class ChainModel:
    """A leg or spine as the checks and measures need it: the links it is made of, its length and its series stiffness.

    `bend_stiffness` [N m/rad] and `axial_stiffness` [N/m] are of the whole chain; `last_link` carries its foot or rear block.
    """

    name: str
    leg: bool
    first_link: int
    last_link: int
    length_m: float
    mass_kg: float
    bend_stiffness: float
    axial_stiffness: float


@dataclass(frozen=True)
class BodyModel:
    """An engine-neutral body: links in an order where parents come first, feet, looks, and the ground under it.

    `start_height_m` puts the lowest foot on the ground with all joints at zero; `vacuum_max_Pa` is the most the supply can do.
    """

    name: str
    inlets: tuple[str, ...]
    links: tuple[Link, ...]
    feet: tuple[FootModel, ...]
    looks: tuple[Look, ...]
    blocks: tuple[BlockModel, ...]
    chains: tuple[ChainModel, ...]
    slope_rad: float
    ground_friction: float
    start_height_m: float
    length_m: float
    vacuum_max_Pa: float
    warnings: tuple[str, ...] = ()

    @property
    def joints(self) -> tuple[Joint, ...]:
        """The joints in order; joint j carries link j + 1."""
        return tuple(link.joint for link in self.links if link.joint is not None)

    @property
    def parts(self) -> tuple[Part, ...]:
        """The parts of the picture, in the order of part poses."""
        return tuple(look.part for look in self.looks)

    @property
    def mass_kg(self) -> float:
        """Mass of everything."""
        return sum(link.mass_kg for link in self.links)

    @property
    def gravity_m_s2(self) -> Vector:
        """Gravity in the frame of the ground plane: a slope is a tilt of gravity, positive slope is uphill forward."""
        return (
            -GRAVITY_M_S2 * float(np.sin(self.slope_rad)),
            0.0,
            -GRAVITY_M_S2 * float(np.cos(self.slope_rad)),
        )
