"""The smooth waves of a body: along every row of legs the phase steps evenly by one Nth of a period, one way or the other."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import pairwise, product

from gaitlab.robot.parts import Leg
from gaitlab.robot.records import Robot
from gaitlab.wiring.places import block_origins
from gaitlab.wiring.space import Numbers, WiringSpace
from gaitlab.wiring.wiring import Wiring

MIDLINE_m = 1e-9
LATER_TO_TAIL = 1
LATER_TO_HEAD = -1


def time_step(output: int, stages: int) -> int:
    """Evacuation edge of an output in Nths of a period after output 1, for an odd ring of equal stages.

    Each stage lags the one before by half a period plus half an Nth, (N + 1)/2 Nths: neighbours in time are two stages apart.

    >>> [time_step(k, 5) for k in range(1, 6)]
    [0, 3, 1, 4, 2]
    """
    return (output - 1) * ((stages + 1) // 2) % stages


def ideal_phase(output: int, stages: int) -> float:
    """The same as a fraction of a period in [0, 1)."""
    return time_step(output, stages) / stages


def output_at(step: int, stages: int) -> int:
    """The output whose evacuation edge lies `step` Nths of a period after output 1's."""
    return 2 * step % stages + 1


def rows(robot: Robot) -> tuple[tuple[str, ...], ...]:
    """Inlets of the legs' first bellows, head to tail, one row for each side of the body; a body without legs has its spines' row."""
    origins = block_origins(robot)

    def station(leg: Leg) -> float:
        return origins[leg.block] + leg.at_m[0]

    sides: dict[int, list[Leg]] = {}
    for leg in sorted(robot.body.legs, key=station, reverse=True):
        side = 0 if abs(leg.at_m[1]) <= MIDLINE_m else (1 if leg.at_m[1] > 0 else -1)
        sides.setdefault(side, []).append(leg)
    if sides:
        return tuple(tuple(leg.units[0].inlet for leg in sides[side]) for side in sorted(sides, reverse=True))
    spines = sorted(robot.body.spines, key=lambda spine: origins[spine.front], reverse=True)
    return (tuple(unit.inlet for spine in spines for unit in spine.units),)


@dataclass(frozen=True)
class SmoothWaves:
    """Tells the smooth waves of one robot among its wirings."""

    space: WiringSpace
    rows: tuple[tuple[int, ...], ...]

    @classmethod
    def of(cls, robot: Robot, space: WiringSpace) -> SmoothWaves:
        """The smooth waves along the robot's rows of legs."""
        position = {inlet: i for i, inlet in enumerate(space.inlets)}
        return cls(space, tuple(tuple(position[inlet] for inlet in row) for row in rows(robot)))

    def direction(self, wiring: Wiring) -> int:
        """1: every leg evacuates one Nth of a period after the one before it (head first); −1: before it; 0: not smooth."""
        numbers, stages = self.space.numbers(wiring), self.space.stages
        steps: set[int] = set()
        for row in self.rows:
            sources = [numbers[i] for i in row]
            if any(s > stages for s in sources):
                return 0
            steps |= {(time_step(b, stages) - time_step(a, stages)) % stages for a, b in pairwise(sources)}
        return {1: LATER_TO_TAIL, stages - 1: LATER_TO_HEAD}.get(steps.pop(), 0) if len(steps) == 1 else 0

    def wirings(self) -> tuple[Wiring, ...]:
        """The distinct smooth waves that the limits allow, where the rows hold every inlet; else none."""
        if sorted(i for row in self.rows for i in row) != list(range(len(self.space.inlets))):
            return ()
        found = {self.space.canonical_numbers(n) for n in self._candidates() if self.space.holds(n)}
        return tuple(self.space.wiring(n) for n in sorted(found))

    def _candidates(self) -> Iterator[Numbers]:
        stages = self.space.stages
        for direction in (LATER_TO_TAIL, LATER_TO_HEAD):
            for starts in product(range(stages), repeat=len(self.rows)):
                numbers = [0] * len(self.space.inlets)
                for row, start in zip(self.rows, starts, strict=True):
                    for place, inlet in enumerate(row):
                        numbers[inlet] = output_at((start + direction * place) % stages, stages)
                yield tuple(numbers)
