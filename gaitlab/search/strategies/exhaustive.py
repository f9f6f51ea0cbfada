"""Walks every distinct wiring until its travel has settled."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import islice

from gaitlab.search.strategies.ask_tell import Ask, Reading
from gaitlab.wiring.space import WiringSpace

BATCH = 512  # wirings held at a time; at its end workers wait for the last walk, 0.1 % of the time of two; chosen by us


class Exhaustive:
    """Every distinct wiring once, in the space's order; with a budget only the first so many."""

    listens = False

    def __init__(self, space: WiringSpace, budget: int | None = None) -> None:
        self._expected = min(space.distinct, budget or space.distinct)
        self._left = islice(iter(space), budget)

    def expected(self) -> int:
        """Number of distinct wirings, or the budget."""
        return self._expected

    def ask(self) -> Sequence[Ask]:
        """The next wirings."""
        return [Ask(wiring) for wiring in islice(self._left, BATCH)]

    def tell(self, readings: Sequence[Reading]) -> None:
        """Nothing depends on it."""
