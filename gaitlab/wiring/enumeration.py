"""Lists wirings one after the other in a fixed order, without holding more than one of them."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from gaitlab.wiring.constraints import Constraints
from gaitlab.wiring.counting import Rules


@dataclass
class _Listing:
    """State of the depth-first listing: source of each inlet so far, load of each output, inlets still to come."""

    groups: tuple[tuple[int, ...], ...]
    decided: dict[int, int]
    rules: Rules
    first_in_place: bool
    numbers: list[int]
    loads: list[int]

    def listed(self, position: int, to_come: int) -> Iterator[tuple[int, ...]]:
        if position == len(self.groups):
            yield tuple(self.numbers)
            return
        group = self.groups[position]
        if position in self.decided:
            yield from self.listed(position + 1, to_come)
            return
        for source in self._sources(group):
            self.place(group, source)
            if self._unused() <= to_come - len(group):
                yield from self.listed(position + 1, to_come - len(group))
            self._take_back(group, source)

    def _sources(self, group: tuple[int, ...]) -> list[int]:
        """Sources with room; with turns free, the first inlet on any output is on output 1."""
        stages = self.rules.stages
        last = 1 if self.first_in_place and not any(self.loads) else stages
        room = self.rules.per_output_max - len(group)
        return [s for s in range(1, last + 1) if self.loads[s - 1] <= room] + list(self.rules.still)

    def _unused(self) -> int:
        return self.loads.count(0) if self.rules.every_output_used else 0

    def place(self, group: tuple[int, ...], source: int) -> None:
        for inlet in group:
            self.numbers[inlet] = source
        if source <= self.rules.stages:
            self.loads[source - 1] += len(group)

    def _take_back(self, group: tuple[int, ...], source: int) -> None:
        if source <= self.rules.stages:
            self.loads[source - 1] -= len(group)


def representatives(constraints: Constraints, rules: Rules, *, first_in_place: bool) -> Iterator[tuple[int, ...]]:
    """Every wiring under `constraints` and `rules` as source numbers, in lexicographic order of its groups.

    With `first_in_place` only those whose first inlet on any output is on output 1: one of each set of turns.
    """
    groups, decided = constraints.groups(), constraints.decided()
    if decided is None:
        return
    listing = _Listing(groups, decided, rules, first_in_place, [0] * constraints.inlets, [0] * rules.stages)
    for position, source in decided.items():
        listing.place(groups[position], source)
    if max(listing.loads) > rules.per_output_max:
        return
    free = sum(len(group) for position, group in enumerate(groups) if position not in decided)
    yield from listing.listed(0, free)
