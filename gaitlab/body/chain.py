"""One chain of bellows cut into segments: where its joints sit, how stiff each is, which bellows lies between them.

A bending bellows of K segments has K turning joints at the segments' centres, each K times as stiff as the whole (at the
centres, not the ends, the tip moves under load as a beam's does, but for 1/(4 K²)); its lengthwise give is one slide at
the head of the chain. A contracting bellows has a slide at the centre of each segment and two hinges at about a quarter
and three quarters of its length. Bellows are taken as rigid in twist and across their bending plane.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from gaitlab.body.bellows import BellowsLaw, bellows_law
from gaitlab.body.solids import Solid, rod
from gaitlab.robot.circuit import Vector
from gaitlab.robot.parts import Bellows, Leg, Spine, Unit
from gaitlab.robot.records import Robot

FloatArray = NDArray[np.float64]

TOWARD = {"up": (0.0, 0.0, 1.0), "down": (0.0, 0.0, -1.0), "left": (0.0, 1.0, 0.0), "right": (0.0, -1.0, 0.0)}


@dataclass(frozen=True)
class Station:
    """A joint of a chain at distance `along_m` from its head; the other numbers are those of the body's Joint."""

    along_m: float
    kind: str
    axis: Vector
    unit: str
    stiffness: float
    damping: float
    stop_at: float = math.inf
    stop_gain: float = 0.0
    actuation: tuple[tuple[str, float], ...] = ()


@dataclass(frozen=True)
class ChainUnit:
    """One bellows in its place: from `start_m` on along the chain."""

    unit: Unit
    bellows: Bellows
    law: BellowsLaw
    start_m: float

    @property
    def end_m(self) -> float:
        """Distance of its far end from the chain's head."""
        return self.start_m + self.bellows.length_m


@dataclass(frozen=True)
class Chain:
    """A leg or spine ready to be cut: `axes` (3, 3) has its own x, y, z as columns in the body frame.

    z points from the far end to the head, x to where a bellows of turn 0 bends under vacuum.
    """

    name: str
    axes: FloatArray
    units: tuple[ChainUnit, ...]

    @property
    def length_m(self) -> float:
        """Length at rest."""
        return self.units[-1].end_m

    @property
    def bend_stiffness(self) -> float:
        """Bending stiffness [N m/rad] of all bellows in series."""
        return 1.0 / sum(1.0 / unit.law.bend_stiffness for unit in self.units)

    @property
    def axial_stiffness(self) -> float:
        """Axial stiffness [N/m] of all bellows in series."""
        return 1.0 / sum(1.0 / unit.law.axial_stiffness for unit in self.units)

    def place(self, along_m: float) -> FloatArray:
        """Point (3,) on the chain's axis, from its head, in the body frame."""
        return -along_m * self.axes[:, 2]

    def bend_axis(self, unit: ChainUnit) -> FloatArray:
        """Turning axis (3,) about which the far end moves to where the unit bends: −y, turned about the chain's z."""
        turn = unit.unit.turn_rad
        return np.asarray(self.axes @ np.array([math.sin(turn), -math.cos(turn), 0.0]))

    def unit_at(self, along_m: float) -> ChainUnit:
        """The bellows at that distance from the head."""
        return next((unit for unit in self.units if along_m <= unit.end_m), self.units[-1])

    def solids(self, start_m: float, end_m: float) -> list[Solid]:
        """The pieces of bellows between two distances from the head, placed from the head in the body frame."""
        pieces = []
        for unit in self.units:
            low, high = max(start_m, unit.start_m), min(end_m, unit.end_m)
            if high > low:
                mass = unit.bellows.mass_kg * (high - low) / unit.bellows.length_m
                centre = self.place(0.5 * (low + high))
                radius = 0.5 * unit.bellows.diameter_m
                pieces.append(rod(mass, radius, high - low, centre_m=centre, along=self.axes[:, 2]))
        return pieces

    def stations(self) -> list[Station]:
        """All joints from head to far end."""
        bending = [unit for unit in self.units if unit.law.action == "bend"]
        slide = [_chain_slide(self, bending)] if bending else []
        rest = [station for unit in self.units for station in _unit_stations(self, unit)]
        return [*slide, *sorted(rest, key=lambda station: station.along_m)]


def chain_of(robot: Robot, item: Leg | Spine, laws: dict[str, BellowsLaw]) -> Chain:
    """The chain of a leg or spine, with its units one after the other."""
    units, start = [], 0.0
    for unit in item.units:
        bellows = robot.bellows_named(unit.bellows)
        units.append(ChainUnit(unit, bellows, laws[unit.bellows], start))
        start += bellows.length_m
    axes = leg_axes(item) if isinstance(item, Leg) else spine_axes(item)
    return Chain(item.name, axes, tuple(units))


def laws_of(robot: Robot) -> dict[str, BellowsLaw]:
    """Laws of all bellows types of a robot by name."""
    return {bellows.name: bellows_law(bellows) for bellows in robot.bellows}


def leg_axes(leg: Leg) -> FloatArray:
    """Axes (3, 3) of a leg: hanging down, swung out to its own side (left for one on the middle line), then turned."""
    outwards = leg.splay_rad if leg.at_m[1] >= 0 else -leg.splay_rad
    c, s = math.cos(outwards), math.sin(outwards)
    tilt = np.array([[1.0, 0.0, 0.0], [0.0, c, -s], [0.0, s, c]])
    c, s = math.cos(leg.heading_rad), math.sin(leg.heading_rad)
    return np.asarray(tilt @ np.array([[c, -s, 0.0], [s, c, 0.0], [0.0, 0.0, 1.0]]))


def spine_axes(spine: Spine) -> FloatArray:
    """Axes (3, 3) of a spine: it runs backwards, so its z is forward, and its x is where it bends to."""
    forward, toward = np.array([1.0, 0.0, 0.0]), np.array(TOWARD[spine.toward])
    return np.column_stack([toward, np.cross(forward, toward), forward])


def _chain_slide(chain: Chain, bending: Sequence[ChainUnit]) -> Station:
    """The lengthwise give of the bending bellows in series, as one slide; positive is longer."""
    compliance = sum(1.0 / unit.law.axial_stiffness for unit in bending)
    slow = sum(unit.bellows.axial_damping_s / unit.law.axial_stiffness for unit in bending)
    return Station(0.0, "prismatic", _vector(-chain.axes[:, 2]), "", 1.0 / compliance, slow / compliance**2)


def _unit_stations(chain: Chain, unit: ChainUnit) -> list[Station]:
    if unit.law.action == "bend":
        return _turns(chain, unit, centres(unit.bellows.segments), actuated=True)
    return [*_slides(chain, unit), *_turns(chain, unit, hinges(unit.bellows.segments), actuated=False)]


def centres(segments: int) -> list[float]:
    """Centres of equal segments as fractions of the length."""
    return [(index + 0.5) / segments for index in range(segments)]


def hinges(segments: int) -> list[float]:
    """Two hinges of a contracting bellows, at the quarters, moved in half a segment's half where a slide sits there."""
    quarter = 0.25 if segments % 4 != 2 else 0.25 - 0.25 / segments
    return [quarter, 1.0 - quarter]


def _turns(chain: Chain, unit: ChainUnit, at: Sequence[float], *, actuated: bool) -> list[Station]:
    law, count = unit.law, len(at)
    stiffness = count * law.bend_stiffness
    return [
        Station(
            along_m=unit.start_m + fraction * unit.bellows.length_m,
            kind="revolute",
            axis=_vector(chain.bend_axis(unit)),
            unit=unit.unit.inlet,
            stiffness=stiffness,
            damping=stiffness * unit.bellows.bend_damping_s,
            stop_at=law.solid / count if actuated else math.inf,
            stop_gain=law.stop_gain * count**2 if actuated else 0.0,
            actuation=_actuation(unit, law.gain) if actuated else (),
        )
        for fraction in at
    ]


def _slides(chain: Chain, unit: ChainUnit) -> list[Station]:
    law, count = unit.law, unit.bellows.segments
    stiffness = count * law.axial_stiffness
    return [
        Station(
            along_m=unit.start_m + fraction * unit.bellows.length_m,
            kind="prismatic",
            axis=_vector(-chain.axes[:, 2]),
            unit=unit.unit.inlet,
            stiffness=stiffness,
            damping=stiffness * unit.bellows.axial_damping_s,
            stop_at=law.solid / count,
            stop_gain=law.stop_gain * count**2,
            actuation=_actuation(unit, -law.gain),
        )
        for fraction in centres(count)
    ]


def _actuation(unit: ChainUnit, gain: float) -> tuple[tuple[str, float], ...]:
    own = ((unit.unit.inlet, gain),)
    if unit.unit.opposed_inlet is None:
        return own
    return (*own, (unit.unit.opposed_inlet, -gain))


def _vector(array: FloatArray) -> Vector:
    return (float(array[0]), float(array[1]), float(array[2]))
