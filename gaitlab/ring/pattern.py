"""Load patterns: what a wiring means to the ring, told apart from how the builder numbers outputs and names inlets.

Two wirings that hang the same bellows on the same lengths of tube in the same order round the ring are one and the same
gas network, turned. A search solves each pattern once.
"""

from __future__ import annotations

import hashlib
from collections.abc import Mapping
from dataclasses import dataclass, replace

from gaitlab.ring.tubing import tube_lengths
from gaitlab.robot.circuit import Ambient, FlowPart, Ring, StageOverride, Supply, Valve, ValveGeometry
from gaitlab.robot.parts import Bellows
from gaitlab.robot.records import Robot
from gaitlab.wiring.wiring import HELD, Source, Wiring


@dataclass(frozen=True)
class Load:
    """One bellows on its tube: the gas an output has to move through `tube_m` of tube."""

    bellows: Bellows
    tube_m: float


@dataclass(frozen=True)
class StageParts:
    """One stage as built, with the loads on its output in a fixed order."""

    resistor: FlowPart
    valve: Valve | ValveGeometry
    port_m3: float
    control_m3: float
    loads: tuple[Load, ...]


@dataclass(frozen=True)
class LoadPattern:
    """Everything that decides how a ring runs; equal patterns give equal bytes. `held` hangs on the supply itself."""

    ambient: Ambient
    supply: Supply
    bore_m: float
    inlet_loss: float
    stages: tuple[StageParts, ...]
    held: tuple[Load, ...]

    def turned(self, steps: int) -> LoadPattern:
        """The same ring with its counting begun `steps` stages further on."""
        return replace(self, stages=self.stages[steps:] + self.stages[:steps])

    def key(self) -> str:
        """A name for the pattern that is the same in every process and on disk (SHA-256 of its numbers)."""
        return hashlib.sha256(repr(self).encode()).hexdigest()


@dataclass(frozen=True)
class Placement:
    """How a robot's wiring sits on a pattern: `turn` stages on, and the inlets in the order of the pattern's loads."""

    turn: int
    inlets: tuple[tuple[str, ...], ...]
    held: tuple[str, ...]


def load_pattern(robot: Robot, wiring: Wiring) -> LoadPattern:
    """The wiring's load pattern, counted so that all turned copies are equal."""
    return placed_pattern(robot, wiring)[0]


def placed_pattern(robot: Robot, wiring: Wiring) -> tuple[LoadPattern, Placement]:
    """The canonical pattern, and where the robot's outputs and inlets are in it."""
    pattern, inlets, held = counted_pattern(robot, wiring)
    turn = _least_turn(pattern)
    placement = Placement(turn, inlets[turn:] + inlets[:turn], held)
    return pattern.turned(turn), placement


def counted_pattern(robot: Robot, wiring: Wiring) -> tuple[LoadPattern, tuple[tuple[str, ...], ...], tuple[str, ...]]:
    """The pattern in the robot's own counting, with the inlets on each output and on the supply, in load order."""
    loads = _loads(robot)
    parts = stage_parts(robot.ring)
    inlets = tuple(_ordered(wiring, k + 1, loads) for k in range(len(parts)))
    held = _ordered(wiring, HELD, loads)
    stages = tuple(replace(part, loads=tuple(loads[i] for i in on)) for part, on in zip(parts, inlets, strict=True))
    pattern = LoadPattern(
        ambient=robot.ambient,
        supply=robot.supply,
        bore_m=robot.tubes.bore_m,
        inlet_loss=robot.tubes.inlet_loss,
        stages=stages,
        held=tuple(loads[i] for i in held),
    )
    return pattern, inlets, held


def stage_parts(ring: Ring) -> tuple[StageParts, ...]:
    """The N stages as built, without loads: the ring's parts, with what each override replaces."""
    own = {override.stage: override for override in ring.overrides}
    return tuple(_stage(ring, own.get(k + 1)) for k in range(ring.stages))


def _stage(ring: Ring, own: StageOverride | None) -> StageParts:
    parts = StageParts(ring.resistor, ring.valve, ring.port_m3, ring.control_m3, ())
    if own is None:
        return parts
    names = ("resistor", "valve", "port_m3", "control_m3")
    return replace(parts, **{name: getattr(own, name) for name in names if getattr(own, name) is not None})


def _loads(robot: Robot) -> dict[str, Load]:
    """The load behind each inlet, in the robot's inlet order."""
    lengths = tube_lengths(robot)
    types = {}
    for chain in robot.chains():
        for unit in chain.units:
            types[unit.inlet] = robot.bellows_named(unit.bellows)
            if unit.opposed_inlet is not None:
                types[unit.opposed_inlet] = types[unit.inlet]
    return {inlet: Load(bellows, lengths[inlet]) for inlet, bellows in types.items()}


def _ordered(wiring: Wiring, source: Source, loads: Mapping[str, Load]) -> tuple[str, ...]:
    """Inlets on one source, sorted by what they load it with (equal loads stay in wiring order and do not matter)."""
    return tuple(sorted(wiring.inlets_on(source), key=lambda inlet: repr(loads[inlet])))


def _least_turn(pattern: LoadPattern) -> int:
    """The turn that puts the stages' descriptions in their least cyclic order."""
    words = [repr(stage) for stage in pattern.stages]
    rank = {word: place for place, word in enumerate(sorted(set(words)))}
    ranks = [rank[word] for word in words]
    return min(range(len(ranks)), key=lambda k: ranks[k:] + ranks[:k])
