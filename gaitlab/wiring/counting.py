"""How many wirings there are, exactly and before any of them is run.

With n free inlets of one kind the number of wirings is a coefficient of an exponential generating function,

    raw = n! [xⁿ] Π_outputs ( Σ_{j=least}^{room} xʲ/j! ) · e^{x·(open or held choices)},

and with groups of several sizes it has one variable per size. Wirings that differ by a turn of the ring of equal stages or by the
body's mirror are one; the number of such classes follows from the fixed points of every turn and mirror (Burnside's lemma).
"""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass, field
from itertools import product

from gaitlab.wiring.constraints import Constraints


@dataclass(frozen=True)
class Rules:
    """What an output may carry, and which sources beside the outputs are open to all (atmosphere N + 1, supply N + 2)."""

    stages: int
    per_output_max: int
    every_output_used: bool
    still: tuple[int, ...] = ()


@dataclass
class Fillings:
    """Ways to give groups of inlets to outputs one after the other, remembered by output and what is left.

    `sizes` are the different group sizes, `loads` the inlets that are already decided for each output.
    """

    rules: Rules
    sizes: tuple[int, ...]
    loads: tuple[int, ...]
    _known: dict[tuple[int, tuple[int, ...]], int] = field(default_factory=dict)

    def ways(self, output: int, left: tuple[int, ...]) -> int:
        """Number of ways to place `left[k]` groups of size `sizes[k]` on the outputs from position `output` on."""
        if output == self.rules.stages:
            return int(len(self.rules.still) ** sum(left))
        key = (output, left)
        if key not in self._known:
            self._known[key] = sum(ways for _, ways in self.choices(output, left))
        return self._known[key]

    def choices(self, output: int, left: tuple[int, ...]) -> Iterator[tuple[tuple[int, ...], int]]:
        """Each choice of how many groups of every size this output takes, with the number of wirings it leads to."""
        for taken in product(*(range(n + 1) for n in left)):
            load = self.loads[output] + sum(t * s for t, s in zip(taken, self.sizes, strict=True))
            if load > self.rules.per_output_max or (load == 0 and self.rules.every_output_used):
                continue
            rest = tuple(n - t for n, t in zip(left, taken, strict=True))
            picks = math.prod(math.comb(n, t) for n, t in zip(left, taken, strict=True))
            yield taken, picks * self.ways(output + 1, rest)


def fillings(constraints: Constraints, rules: Rules) -> tuple[Fillings, tuple[int, ...]] | None:
    """The table of ways under `constraints` and the numbers of free groups by size; None for contradicting decisions."""
    decided = possible(constraints, rules)
    if decided is None:
        return None
    loads, free = [0] * rules.stages, []
    for position, group in enumerate(constraints.groups()):
        if position not in decided:
            free.append(len(group))
        elif decided[position] <= rules.stages:
            loads[decided[position] - 1] += len(group)
    numbers = Counter(free)
    sizes = tuple(sorted(numbers))
    return Fillings(rules, sizes, tuple(loads)), tuple(numbers[s] for s in sizes)


def possible(constraints: Constraints, rules: Rules) -> dict[int, int] | None:
    """Source of every group that is decided; None for decisions that contradict each other or the rules."""
    decided = constraints.decided()
    if decided is None:
        return None
    groups = constraints.groups()
    forbidden = (
        groups[position] for position, source in decided.items() if source > rules.stages and source not in rules.still
    )
    return decided if all(constraints.excused.issuperset(group) for group in forbidden) else None


def count(constraints: Constraints, rules: Rules) -> int:
    """Number of wirings that keep `constraints` and `rules`.

    >>> count(Constraints(5, 5), Rules(5, 1, True))
    120
    """
    table = fillings(constraints, rules)
    return 0 if table is None else table[0].ways(0, table[1])


def count_still(constraints: Constraints, rules: Rules) -> int:
    """Number of those wirings in which no inlet is on an output: the only ones that a turn of the ring leaves as they are."""
    decided = possible(constraints, rules)
    if decided is None or rules.every_output_used or constraints.fixes_an_output():
        return 0
    return int(len(rules.still) ** (len(constraints.groups()) - len(decided)))


def count_distinct(constraints: Constraints, rules: Rules, *, turns: bool, mirror: tuple[int, ...] | None) -> int:
    """Number of classes of wirings under turns of the ring and the body's mirror, as far as each is a symmetry.

    Decisions and ties need not be symmetric themselves: with A the allowed wirings and all their turns and mA the mirror image of
    that set, the classes that meet the allowed set are those of A ∪ mA, on which the symmetries act, and
    |Fix(A ∪ mA)| = |Fix A| + |Fix mA| − |Fix(A ∩ mA)|. Stages must be odd (an even ring does not oscillate).

    >>> count_distinct(Constraints(7, 7), Rules(7, 1, True), turns=True, mirror=None)
    720
    """
    order = rules.stages if turns else 1
    if mirror is None:
        return (_with_turns(constraints, rules, order) + (order - 1) * count_still(constraints, rules)) // order
    both = constraints.joined(constraints.mirrored(mirror))
    symmetric = constraints.tied_to_mirror(mirror)
    unmoved = 2 * _with_turns(constraints, rules, order) - _shared(constraints, rules, mirror, order)
    turned = 2 * count_still(constraints, rules) - count_still(both, rules)
    mirrored = _with_turns(symmetric, rules, order)
    turned_and_mirrored = count_still(symmetric, rules)
    return (unmoved + mirrored + (order - 1) * (turned + turned_and_mirrored)) // (2 * order)


def _with_turns(constraints: Constraints, rules: Rules, order: int) -> int:
    """Size of the set of allowed wirings together with all their turns."""
    copies = order if constraints.fixes_an_output() else 1
    return copies * count(constraints, rules)


def _shared(constraints: Constraints, rules: Rules, mirror: tuple[int, ...], order: int) -> int:
    """Size of the part that A and its mirror image have in common."""
    image = constraints.mirrored(mirror)
    if not constraints.fixes_an_output():
        return count(constraints.joined(image), rules)
    return order * sum(count(constraints.joined(image.turned(steps)), rules) for steps in range(order))
