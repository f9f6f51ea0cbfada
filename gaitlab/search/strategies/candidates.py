"""Where a strategy looks for the next wirings: the whole space if it can be listed, else round the best and at random."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

import numpy as np

from gaitlab.wiring.space import WiringSpace
from gaitlab.wiring.wiring import Wiring

LISTED_MAX = 5_000  # wirings that are listed once and all looked at; a larger space is sampled; chosen by us for speed
ROUND_BEST = 12  # best wirings whose neighbours are looked at; chosen by us
AT_RANDOM = 200  # drawn beside them, so that no part of the space is shut out; chosen by us
DRAWS_PER_WIRING = 50  # tries for one unseen wiring before the space counts as used up; chosen by us


class Candidates:
    """Unseen wirings of one space, in an order that the seed alone decides."""

    def __init__(self, space: WiringSpace, rng: np.random.Generator) -> None:
        self._space, self._rng = space, rng
        self._seen: set[Wiring] = set()
        self._listed = list(space) if space.distinct <= LISTED_MAX else None

    def mark(self, wirings: Iterable[Wiring]) -> None:
        """Takes wirings out of what is proposed from now on."""
        self._seen.update(wirings)

    def drawn(self, number: int) -> list[Wiring]:
        """Up to `number` unseen wirings at random, each wiring with the same chance before symmetry."""
        found: dict[Wiring, None] = {}
        for _ in range(DRAWS_PER_WIRING * number):
            if len(found) == number or len(found) + len(self._seen) >= self._space.distinct:
                break
            wiring = self._space.sampled(self._rng)
            if wiring not in self._seen:
                found[wiring] = None
        return list(found)

    def near(self, best: Sequence[Wiring]) -> list[Wiring]:
        """Unseen wirings worth a look: all of a space that can be listed, else swaps of the `best` and some at random."""
        if self._listed is not None:
            return [wiring for wiring in self._listed if wiring not in self._seen]
        around = {w for wiring in best[:ROUND_BEST] for w in self._space.neighbours(wiring)} - self._seen
        return sorted(around | set(self.drawn(AT_RANDOM)), key=Wiring.text)
