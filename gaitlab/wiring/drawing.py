"""Draws one wiring at random, each allowed one with the same chance, however many there are."""

from __future__ import annotations

from dataclasses import dataclass, field
from fractions import Fraction

import numpy as np

from gaitlab.wiring.constraints import Constraints
from gaitlab.wiring.counting import Fillings, Rules, fillings

EXACT_IN_FLOATS = 2**53
Left = tuple[int, ...]
Choices = tuple[tuple[tuple[Left, int], ...], int]  # what an output may take, with the ways each leaves, and their sum


@dataclass
class Urn:
    """All wirings under one set of constraints, ready to draw from: output after output takes a number of groups of every size
    with the weight of what that leaves open, then the groups themselves."""

    table: Fillings
    left: Left
    groups: tuple[tuple[int, ...], ...]
    decided: dict[int, int]
    _known: dict[tuple[int, Left], Choices] = field(default_factory=dict)

    @classmethod
    def of(cls, constraints: Constraints, rules: Rules) -> Urn:
        """The urn of all wirings under these limits. Raises ValueError when there is none."""
        table = fillings(constraints, rules)
        if table is None or table[0].ways(0, table[1]) == 0:
            raise ValueError("no wiring keeps these limits")
        return cls(*table, constraints.groups(), constraints.decided() or {})

    def drawn(self, rng: np.random.Generator) -> tuple[int, ...]:
        """Source numbers of one wiring."""
        sources = dict(self.decided)
        free = [g for g in range(len(self.groups)) if g not in self.decided]
        pools = {size: [g for g in free if len(self.groups[g]) == size] for size in self.table.sizes}
        left = self.left
        for output in range(self.table.rules.stages):
            taken = self._taken(output, left, rng)
            left = tuple(n - t for n, t in zip(left, taken, strict=True))
            for size, number in zip(self.table.sizes, taken, strict=True):
                for _ in range(number):
                    sources[_popped(pools[size], rng)] = output + 1
        for group in sorted(g for pool in pools.values() for g in pool):
            sources[group] = self.table.rules.still[int(rng.integers(len(self.table.rules.still)))]
        return self._numbers(sources)

    def _numbers(self, sources: dict[int, int]) -> tuple[int, ...]:
        numbers = [0] * sum(len(group) for group in self.groups)
        for position, group in enumerate(self.groups):
            for inlet in group:
                numbers[inlet] = sources[position]
        return tuple(numbers)

    def _taken(self, output: int, left: Left, rng: np.random.Generator) -> Left:
        choices, total = self._choices(output, left)
        if len(choices) == 1:
            return choices[0][0]
        shot = rng.random() * total if total < EXACT_IN_FLOATS else Fraction(float(rng.random())) * total
        for taken, ways in choices:
            shot -= ways
            if shot < 0:
                return taken
        return choices[-1][0]

    def _choices(self, output: int, left: Left) -> Choices:
        key = (output, left)
        if key not in self._known:
            choices = tuple((taken, ways) for taken, ways in self.table.choices(output, left) if ways)
            self._known[key] = (choices, sum(ways for _, ways in choices))
        return self._known[key]


def _popped(pool: list[int], rng: np.random.Generator) -> int:
    return pool.pop(int(rng.integers(len(pool))))
