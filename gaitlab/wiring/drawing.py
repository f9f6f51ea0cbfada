"""Draws one wiring at random, each allowed one with the same chance, however many there are."""

from __future__ import annotations

from fractions import Fraction

import numpy as np

from gaitlab.wiring.constraints import Constraints
from gaitlab.wiring.counting import Rules, fillings


def drawn(constraints: Constraints, rules: Rules, still: tuple[int, ...], rng: np.random.Generator) -> tuple[int, ...]:
    """Source numbers of one wiring: output after output takes a number of groups with the weight of what that leaves open.

    Raises ValueError when there is no wiring to draw.
    """
    table = fillings(constraints, rules)
    if table is None or table[0].ways(0, table[1]) == 0:
        raise ValueError("no wiring keeps these limits")
    ways, left = table
    groups, decided = constraints.groups(), constraints.decided() or {}
    source_of_group = dict(decided)
    pools = {
        size: [g for g, group in enumerate(groups) if len(group) == size and g not in decided] for size in ways.sizes
    }
    for output in range(rules.stages):
        taken = _picked(list(ways.choices(output, left)), rng)
        left = tuple(n - t for n, t in zip(left, taken, strict=True))
        for size, number in zip(ways.sizes, taken, strict=True):
            for _ in range(number):
                source_of_group[_popped(pools[size], rng)] = output + 1
    for group in sorted(g for pool in pools.values() for g in pool):
        source_of_group[group] = still[int(rng.integers(len(still)))]
    position = {inlet: g for g, group in enumerate(groups) for inlet in group}
    return tuple(source_of_group[position[inlet]] for inlet in range(constraints.inlets))


def _picked(choices: list[tuple[tuple[int, ...], int]], rng: np.random.Generator) -> tuple[int, ...]:
    """One choice by its weight; the weights may be too large for floats."""
    total = sum(ways for _, ways in choices)
    shot = Fraction(float(rng.random())) * total
    for taken, ways in choices:
        shot -= ways
        if shot < 0:
            return taken
    return choices[-1][0]


def _popped(pool: list[int], rng: np.random.Generator) -> int:
    return pool.pop(int(rng.integers(len(pool))))
