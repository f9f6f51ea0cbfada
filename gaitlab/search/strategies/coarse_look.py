"""Which wirings get a coarse walk: all of a space that can be listed, else swaps of the best so far, again and again."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from itertools import islice

import numpy as np

from gaitlab.search.settings import BUNDLE
from gaitlab.search.strategies.candidates import LISTED_MAX, Candidates
from gaitlab.wiring.space import WiringSpace
from gaitlab.wiring.wiring import Wiring

BATCH = 10 * BUNDLE  # coarse walks asked for at a time
MOST = 50 * BUNDLE  # coarse walks in a space that cannot be listed; chosen by us
AT_RANDOM = (
    BUNDLE  # of a batch there are drawn at random at least, so that no part of the space is shut out; chosen by us
)


class CoarseLook:
    """Proposes wirings in batches and learns their coarse scores; a failed one counts as the worst."""

    def __init__(self, space: WiringSpace, first: Sequence[Wiring], seed: int) -> None:
        self._space = space
        self.scores: dict[Wiring, float] = {}
        self._listed: Iterator[Wiring] | None = iter(space) if space.distinct <= LISTED_MAX else None
        self._candidates = Candidates(space, np.random.default_rng(seed))
        self._first = list(first)
        self._spread: set[Wiring] = set()

    def next(self) -> list[Wiring]:
        """The next wirings; empty at the end."""
        if self._listed is not None:
            return list(islice(self._listed, BATCH))
        room = min(BATCH, MOST - len(self.scores))
        wirings = (self._around(room - AT_RANDOM) if self.scores else self._first[:room]) if room > 0 else []
        self._candidates.mark(wirings)
        wirings += self._candidates.drawn(max(0, room - len(wirings)))
        self._candidates.mark(wirings)
        return wirings

    def tell(self, scores: dict[Wiring, float]) -> None:
        """Takes in coarse scores, nan for walks that failed."""
        self.scores.update(scores)

    def ranked(self) -> list[Wiring]:
        """All wirings looked at, best first."""
        return sorted(self.scores, key=lambda wiring: (-self.score(wiring), wiring.text()))

    def score(self, wiring: Wiring) -> float:
        """The wiring's coarse score."""
        score = self.scores[wiring]
        return score if np.isfinite(score) else self._worst

    @property
    def _worst(self) -> float:
        return min((score for score in self.scores.values() if np.isfinite(score)), default=0.0)

    def _around(self, most: int) -> list[Wiring]:
        """Unseen neighbours of the best wirings whose neighbours have not been looked at yet."""
        found: dict[Wiring, None] = {}
        for wiring in self.ranked():
            if len(found) >= most:
                break
            if wiring not in self._spread:
                self._spread.add(wiring)
                found |= dict.fromkeys(n for n in self._space.neighbours(wiring) if n not in self.scores)
        return list(found)[: max(0, most)]
