"""The mechanical side of a robot file: bellows types, feet, blocks, legs and spines.

Pressures are gauge vacuum (positive numbers) unless the name says ambient; lengths in m, masses in kg, volumes in m³,
angles in rad, times in s. Body frame: x forward, y left, z up.
"""

from __future__ import annotations

from dataclasses import dataclass

from gaitlab.robot.circuit import Vector
from gaitlab.robot.fields import (
    DEGREE,
    GRAM,
    KILO,
    MILLI,
    ML,
    integer,
    number,
    numbers,
    table,
    tables,
    text,
)


@dataclass(frozen=True)
class MeasuredBend:
    """Bench numbers of a bending bellows: free bend at a vacuum, and one of bending stiffness, tip stiffness, blocked force."""

    free_bend_rad: float = number("free_bend_deg", DEGREE, above=0, at_most=360)
    at_vacuum_Pa: float = number("at_vacuum_kPa", KILO, above=0, below=101.3)
    bend_stiffness_N_m_rad: float | None = number("bend_stiffness_N_m_rad", default=None, above=0)
    tip_stiffness_N_m: float | None = number("tip_stiffness_N_mm", 1e3, default=None, above=0)
    blocked_force_N: float | None = number("blocked_force_N", default=None, above=0)


@dataclass(frozen=True)
class MeasuredStroke:
    """Bench numbers of a contracting bellows: free stroke at a vacuum, and one of axial stiffness and blocked force."""

    free_stroke_m: float = number("free_stroke_mm", MILLI, above=0, at_most=1000)
    at_vacuum_Pa: float = number("at_vacuum_kPa", KILO, above=0, below=101.3)
    blocked_force_N: float | None = number("blocked_force_N", default=None, above=0)


@dataclass(frozen=True)
class BellowsGeometry:
    """The drawing of a bellows: diameters, wall, number of convolutions, material; `eccentricity_m` of the stiff spine when it bends.

    Exactly one of `youngs_Pa`, `shore_A` and `spring_rate_N_m` (axial, measured or from the maker) is given.
    """

    outer_m: float = number("outer_mm", MILLI, above=0, at_most=500)
    inner_m: float = number("inner_mm", MILLI, above=0, at_most=500)
    wall_m: float = number("wall_mm", MILLI, above=0, at_most=50)
    convolutions: int = integer("convolutions", at_least=1, at_most=1000)
    youngs_Pa: float | None = number("youngs_MPa", 1e6, default=None, above=0, at_most=10_000)
    shore_A: float | None = number("shore_A", default=None, above=0, below=100)
    spring_rate_N_m: float | None = number("spring_rate_N_mm", 1e3, default=None, above=0)
    eccentricity_m: float = number("eccentricity_mm", MILLI, default=0.0, at_least=0)


@dataclass(frozen=True)
class Bellows:
    """One type of bellows: how it moves under vacuum, how stiff it is, what air it holds.

    `axial_stiffness_N_m` and `bend_stiffness_N_m_rad` are of the whole bellows; a file that gives a `geometry` may leave
    them to it, any other file must state both, because the axial one decides the sign of the travel.
    `solid_bend_rad` / `solid_stroke_m` is where the convolutions touch.
    """

    name: str
    action: str = text("action", choices=("bend", "contract"))
    length_m: float = number("length_mm", MILLI, above=0, at_most=1000)
    mass_kg: float = number("mass_g", GRAM, above=0, at_most=1e5)
    segments: int = integer("segments", at_least=1, at_most=40)
    rest_volume_m3: float = number("rest_mL", ML, above=0)
    swept_volume_m3: float = number("swept_mL", ML, above=0)
    measured_bend: MeasuredBend | None = table("measured_bend", MeasuredBend, default=None)
    measured_stroke: MeasuredStroke | None = table("measured_stroke", MeasuredStroke, default=None)
    geometry: BellowsGeometry | None = table("geometry", BellowsGeometry, default=None)
    bend_stiffness_N_m_rad: float | None = number("bend_stiffness_N_m_rad", default=None, above=0)
    axial_stiffness_N_m: float | None = number("axial_stiffness_N_m", default=None, above=0)
    solid_bend_rad: float | None = number("solid_bend_deg", DEGREE, default=None, above=0, at_most=360)
    solid_stroke_m: float | None = number("solid_stroke_mm", MILLI, default=None, above=0)
    bend_damping_s: float = number("bend_damping_ms", MILLI, default=0.040, above=0, at_most=2000)
    axial_damping_s: float = number("axial_damping_ms", MILLI, default=0.010, above=0, at_most=2000)
    diameter_m: float = number("diameter_mm", MILLI, default=0.012, above=0, at_most=500)


@dataclass(frozen=True)
class Foot:
    """A foot: one sphere, or a pad of two spheres `spacing_m` apart along `spacing_axis`.

    `friction` holds for sliding forward (+x of the part that carries it); `friction_backward` and `friction_sideways`
    where given make it direction-dependent (bristles). Backward means the foot slides towards −x.
    """

    name: str
    radius_m: float = number("radius_mm", MILLI, above=0, at_most=200)
    friction: float = number("friction", above=0, at_most=5)
    mass_kg: float = number("mass_g", GRAM, default=0.0005, above=0)
    spacing_m: float = number("spacing_mm", MILLI, default=0.0, at_least=0, at_most=500)
    spacing_axis: str = text("spacing_axis", choices=("across", "along"), default="across")
    friction_backward: float | None = number("friction_backward", default=None, above=0, at_most=5)
    friction_sideways: float | None = number("friction_sideways", default=None, above=0, at_most=5)


@dataclass(frozen=True)
class Block:
    """A rigid block of the trunk: a box `size_m` (x, y, z) of even density, centred on its own frame."""

    name: str = text("name")
    size_m: Vector = numbers("size_mm", MILLI, length=3)
    mass_kg: float = number("mass_g", GRAM, above=0, at_most=1e6)


@dataclass(frozen=True)
class Unit:
    """One bellows of a chain. `turn_rad` turns its bending direction about the chain's axis from the chain's own heading.

    `inlet` is its air inlet; `opposed_inlet` a second one on the other side of the same bellows that bends it the other way.
    """

    bellows: str = text("bellows")
    inlet: str = text("inlet")
    opposed_inlet: str | None = text("opposed_inlet", default=None)
    turn_rad: float = number("turn_deg", DEGREE, default=0.0, at_least=-360, at_most=360)


@dataclass(frozen=True)
class Leg:
    """A chain of bellows from a block to a foot. It hangs down (−z), tilted outwards (sideways, away from x) by `splay_rad`.

    Under vacuum its tip bends towards `heading_rad` (0 forward +x, 90° left +y). A file may write `bellows = "type"`
    instead of [[body.leg.unit]]: one unit whose inlet has the leg's name.
    """

    name: str = text("name")
    block: str = text("block")
    at_m: Vector = numbers("at_mm", MILLI, length=3)
    foot: str = text("foot")
    heading_rad: float = number("heading_deg", DEGREE, default=0.0, at_least=-360, at_most=360)
    splay_rad: float = number("splay_deg", DEGREE, default=0.0, at_least=-80, at_most=80)
    units: tuple[Unit, ...] = tables("unit", Unit, default=())


@dataclass(frozen=True)
class Spine:
    """A chain of bellows between two blocks, running backwards (−x) from `front_at_m` on the front block to the rear block.

    Under vacuum the rear end bends towards `toward` (a unit's turn_deg turns that about the chain's axis).
    A file may write `bellows = "type"` for one unit whose inlet has the spine's name.
    """

    name: str = text("name")
    front: str = text("front")
    rear: str = text("rear")
    front_at_m: Vector = numbers("front_at_mm", MILLI, length=3)
    rear_at_m: Vector = numbers("rear_at_mm", MILLI, length=3)
    toward: str = text("toward", choices=("up", "down", "left", "right"), default="down")
    units: tuple[Unit, ...] = tables("unit", Unit, default=())


@dataclass(frozen=True)
class Skid:
    """A foot fixed to a block (worms, slithering bodies): `at_m` is the centre of its sphere or pad in the block's frame."""

    name: str = text("name")
    block: str = text("block")
    at_m: Vector = numbers("at_mm", MILLI, length=3)
    foot: str = text("foot")


@dataclass(frozen=True)
class Payload:
    """A load fixed to a block."""

    mass_kg: float = number("mass_g", GRAM, above=0, at_most=1e6)
    block: str = text("block")
    at_m: Vector = numbers("at_mm", MILLI, length=3)


@dataclass(frozen=True)
class Body:
    """A tree of rigid blocks joined by spines, with legs and skids. The block that is no spine's rear is the root (trunk)."""

    blocks: tuple[Block, ...] = tables("block", Block)
    legs: tuple[Leg, ...] = tables("leg", Leg, default=())
    spines: tuple[Spine, ...] = tables("spine", Spine, default=())
    skids: tuple[Skid, ...] = tables("skid", Skid, default=())
    payloads: tuple[Payload, ...] = tables("payload", Payload, default=())
