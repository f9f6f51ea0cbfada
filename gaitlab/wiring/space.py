"""All wirings that a robot's limits allow, with those that differ by a symmetry of the robot counted as one."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import cached_property
from itertools import combinations

import numpy as np

from gaitlab.errors import InputError, must
from gaitlab.robot.records import Robot
from gaitlab.wiring.constraints import Constraints, turned_source
from gaitlab.wiring.counting import Rules, count, count_distinct
from gaitlab.wiring.drawing import Urn
from gaitlab.wiring.enumeration import representatives
from gaitlab.wiring.limits import (
    constraints_of,
    refuse_nothing,
    rules_of,
    source_number,
    source_of,
)
from gaitlab.wiring.mirror import mirror_of
from gaitlab.wiring.places import Place, inlet_places
from gaitlab.wiring.wiring import Wiring

Numbers = tuple[int, ...]  # source of each inlet in order: outputs 1…N, atmosphere N + 1, supply N + 2


@dataclass(frozen=True)
class WiringSpace:
    """The allowed wirings of one robot and its symmetries.

    `turns`: the stages are equal, so that moving every output on by one only shifts time. `mirror`: position of each inlet's mirror
    image (travel kept, drift and turn negated), None where the body has none. `places`: where each inlet is, forward and left [m].
    """

    inlets: tuple[str, ...]
    constraints: Constraints
    rules: Rules
    turns: bool
    mirror: Numbers | None
    places: tuple[Place, ...]

    @classmethod
    def of(cls, robot: Robot) -> WiringSpace:
        """The space of a robot's wirings. Raises InputError when its limits leave none, naming the numbers that clash."""
        constraints, rules = constraints_of(robot), rules_of(robot)
        refuse_nothing(constraints, rules)
        return cls(
            inlets=robot.inlets(),
            constraints=constraints,
            rules=rules,
            turns=not robot.ring.overrides,
            mirror=mirror_of(robot),
            places=inlet_places(robot),
        )

    @property
    def stages(self) -> int:
        """Outputs of the ring."""
        return self.rules.stages

    @cached_property
    def raw(self) -> int:
        """Number of allowed wirings."""
        return count(self.constraints, self.rules)

    @cached_property
    def distinct(self) -> int:
        """Number of allowed wirings that no symmetry of the robot makes equal."""
        return count_distinct(self.constraints, self.rules, turns=self.turns, mirror=self.mirror)

    def numbers(self, wiring: Wiring) -> Numbers:
        """The wiring as source numbers. Raises InputError when its inlets are not this robot's."""
        if tuple(inlet for inlet, _ in wiring.pairs) != self.inlets:
            raise InputError(must("wiring", "of the inlets " + ", ".join(self.inlets), wiring.text()))
        return tuple(source_number(source, self.stages) for _, source in wiring.pairs)

    def wiring(self, numbers: Numbers) -> Wiring:
        """The wiring with these source numbers."""
        sources = (source_of(n, self.stages) for n in numbers)
        return Wiring(tuple(zip(self.inlets, sources, strict=True)))

    def allows(self, wiring: Wiring) -> bool:
        """Whether the robot's limits allow this wiring."""
        return self.holds(self.numbers(wiring))

    def holds(self, numbers: Numbers) -> bool:
        """Whether the limits allow these source numbers."""
        if any(numbers[i] != source for i, source in self.constraints.fixed):
            return False
        if any(numbers[i] != numbers[group[0]] for group in self._groups for i in group[1:]):
            return False
        if any(numbers[g[0]] > self.stages and numbers[g[0]] not in self.rules.still for g in self._free_groups):
            return False
        least = 1 if self.rules.every_output_used else 0
        return all(least <= numbers.count(s) <= self.rules.per_output_max for s in range(1, self.stages + 1))

    @cached_property
    def _groups(self) -> tuple[Numbers, ...]:
        return self.constraints.groups()

    @cached_property
    def _free_groups(self) -> tuple[Numbers, ...]:
        decided = self.constraints.decided() or {}
        return tuple(group for g, group in enumerate(self._groups) if g not in decided)

    @cached_property
    def _anchor(self) -> tuple[int, int] | None:
        """An inlet that is decided to be on an output: it sets how far a wiring must be turned to be allowed."""
        return next(((i, s) for i, s in self.constraints.fixed if s <= self.stages), None)

    def canonical(self, wiring: Wiring) -> Wiring:
        """The one wiring that stands for all that are equal to this one by symmetry (the first of them in order)."""
        return self.wiring(self.canonical_numbers(self.numbers(wiring)))

    def canonical_numbers(self, numbers: Numbers) -> Numbers:
        """The same on source numbers: the smallest allowed image with the numbering turned to its normal place."""
        images = [self._in_place(numbers)]
        if self.mirror is not None:
            images.append(self._in_place(self.mirrored_numbers(numbers)))
        return min((n for n in images if self.holds(n)), default=images[0])

    def mirrored_numbers(self, numbers: Numbers) -> Numbers:
        """The wiring seen in the mirror: each inlet takes the source of its mirror image."""
        return numbers if self.mirror is None else tuple(numbers[i] for i in self.mirror)

    def _in_place(self, numbers: Numbers) -> Numbers:
        """Turned so that the decided inlet is on its output, or else so that the first inlet on any output is on output 1."""
        if not self.turns:
            return numbers
        if self._anchor is not None and numbers[self._anchor[0]] <= self.stages:
            steps = self._anchor[1] - numbers[self._anchor[0]]
        else:
            steps = 1 - next((n for n in numbers if n <= self.stages), 1)
        return self._turned(numbers, steps)

    def _turned(self, numbers: Numbers, steps: int) -> Numbers:
        return tuple(turned_source(n, steps, self.stages) for n in numbers)

    def orbit(self, wiring: Wiring) -> tuple[Wiring, ...]:
        """Every allowed wiring that a symmetry of the robot makes equal to this one, in order, itself included."""
        numbers = self.numbers(wiring)
        images = {self._turned(n, s) for n in (numbers, self.mirrored_numbers(numbers)) for s in range(self._order)}
        return tuple(self.wiring(n) for n in sorted(images) if self.holds(n))

    @property
    def _order(self) -> int:
        return self.stages if self.turns else 1

    def reversed(self, wiring: Wiring) -> Wiring | None:
        """The representative of the wiring whose wave runs the other way in time; None where the limits forbid it."""
        backwards = self.canonical(wiring.reversed(self.stages))
        return backwards if self.allows(backwards) else None

    def __iter__(self) -> Iterator[Wiring]:
        """Every distinct wiring once, by its representative, in a fixed order and without holding them all."""
        for numbers in representatives(self.constraints, self.rules, first_in_place=self._first_in_place):
            if self.mirror is None or self.canonical_numbers(numbers) == numbers:
                yield self.wiring(numbers)

    @property
    def _first_in_place(self) -> bool:
        return self.turns and self._anchor is None

    def neighbours(self, wiring: Wiring) -> tuple[Wiring, ...]:
        """Distinct wirings one move away: two groups of inlets swap their sources, or one group takes another source."""
        numbers = self.numbers(wiring)
        here = self.canonical_numbers(numbers)
        moved = {self.canonical_numbers(n) for n in self._moves(numbers) if self.holds(n)}
        return tuple(self.wiring(n) for n in sorted(moved - {here}))

    def _moves(self, numbers: Numbers) -> Iterator[Numbers]:
        for one, other in combinations(self._free_groups, 2):
            yield _with_sources(numbers, ((one, numbers[other[0]]), (other, numbers[one[0]])))
        for group in self._free_groups:
            for source in (*range(1, self.stages + 1), *self.rules.still):
                yield _with_sources(numbers, ((group, source),))

    def sampled(self, rng: np.random.Generator) -> Wiring:
        """The representative of one wiring drawn evenly from all allowed ones."""
        return self.wiring(self.canonical_numbers(self._urn.drawn(rng)))

    @cached_property
    def _urn(self) -> Urn:
        return Urn.of(self.constraints, self.rules)


def _with_sources(numbers: Numbers, changes: tuple[tuple[Numbers, int], ...]) -> Numbers:
    changed = list(numbers)
    for group, source in changes:
        for inlet in group:
            changed[inlet] = source
    return tuple(changed)
