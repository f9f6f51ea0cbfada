"""What a set of wirings has in common: inlets that share a source and inlets whose source is decided.

Sources are whole numbers here: outputs 1…N, atmosphere N + 1, supply N + 2; inlets are their positions in the robot's order.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace

Ties = tuple[tuple[int, ...], ...]
Fixed = tuple[tuple[int, int], ...]


@dataclass(frozen=True)
class Constraints:
    """`ties` are groups of inlets on one source, `fixed` pairs (inlet, source) that are decided.

    `excused` inlets may be on atmosphere or supply though the limits forbid it to others: those that a decision puts there.
    """

    inlets: int
    stages: int
    ties: tuple[tuple[int, ...], ...] = ()
    fixed: tuple[tuple[int, int], ...] = ()
    excused: frozenset[int] = frozenset()

    @classmethod
    def of(cls, inlets: int, stages: int, ties: Ties = (), fixed: Fixed = ()) -> Constraints:
        """The constraints of a robot file: whatever is decided, or tied to it, is excused."""
        bare = cls(inlets, stages, ties, fixed)
        named = {inlet for inlet, _ in fixed}
        return replace(bare, excused=frozenset(i for group in bare.groups() if named & set(group) for i in group))

    def mirrored(self, mirror: tuple[int, ...]) -> Constraints:
        """The same constraints on the mirror image: inlet i stands where `mirror[i]` stood."""
        ties = tuple(tuple(mirror[i] for i in tie) for tie in self.ties)
        fixed = tuple((mirror[i], source) for i, source in self.fixed)
        return Constraints(self.inlets, self.stages, ties, fixed, frozenset(mirror[i] for i in self.excused))

    def turned(self, steps: int) -> Constraints:
        """Every decided output moved on by `steps` round the ring."""
        fixed = tuple((i, turned_source(s, steps, self.stages)) for i, s in self.fixed)
        return replace(self, fixed=fixed)

    def joined(self, other: Constraints) -> Constraints:
        """Both sets of constraints at once; excused is who is so in both."""
        ties, fixed = self.ties + other.ties, self.fixed + other.fixed
        return replace(self, ties=ties, fixed=fixed, excused=self.excused & other.excused)

    def tied_to_mirror(self, mirror: tuple[int, ...]) -> Constraints:
        """These constraints, and every inlet on the source of its mirror image."""
        return replace(self, ties=self.ties + tuple(enumerate(mirror)))

    def fixes_an_output(self) -> bool:
        """Whether some inlet is decided to be on an output: then the numbering cannot be turned freely."""
        return any(source <= self.stages for _, source in self.fixed)

    def groups(self) -> tuple[tuple[int, ...], ...]:
        """The inlets in groups that share a source, each group sorted, groups in order of their first inlet."""
        root = list(range(self.inlets))
        for tie in self.ties:
            _merge(root, tie)
        members: dict[int, list[int]] = {}
        for inlet in range(self.inlets):
            members.setdefault(_root_of(root, inlet), []).append(inlet)
        return tuple(tuple(group) for group in members.values())

    def decided(self) -> dict[int, int] | None:
        """Source of every group that is decided, by the group's position; None if two decisions contradict each other."""
        position = {inlet: g for g, group in enumerate(self.groups()) for inlet in group}
        sources: dict[int, int] = {}
        for inlet, source in self.fixed:
            if sources.setdefault(position[inlet], source) != source:
                return None
        return sources


def turned_source(source: int, steps: int, stages: int) -> int:
    """The source after a turn of the ring by `steps`; atmosphere and supply stay.

    >>> turned_source(5, 1, 5), turned_source(6, 1, 5)
    (1, 6)
    """
    return (source - 1 + steps) % stages + 1 if source <= stages else source


def _root_of(root: list[int], inlet: int) -> int:
    while root[inlet] != inlet:
        inlet = root[inlet]
    return inlet


def _merge(root: list[int], tie: Iterable[int]) -> None:
    first, *others = sorted({_root_of(root, inlet) for inlet in tie})
    for other in others:
        root[other] = first
