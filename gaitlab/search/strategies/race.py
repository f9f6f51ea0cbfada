"""Short walks for all wirings (or as many as the budget allows), settled walks for those that may still win."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from itertools import islice

import numpy as np

from gaitlab.search.settings import SHORT_PERIODS
from gaitlab.search.strategies.ask_tell import Ask, Reading
from gaitlab.search.strategies.candidates import Candidates
from gaitlab.search.strategies.settling import Settling
from gaitlab.wiring.space import WiringSpace
from gaitlab.wiring.wiring import Wiring

BATCH = 64
SETTLED_SHARE = 0.2  # of the walks at most are settled ones; chosen by us


class Race:
    """Every distinct wiring walks `SHORT_PERIODS`; who cannot catch up with the best settled reading is out.

    With a budget below what that takes, a random part of the space runs.
    """

    listens = True

    def __init__(self, space: WiringSpace, budget: int | None, seed: int) -> None:
        total = budget or space.distinct + max(4, round(SETTLED_SHARE * space.distinct))
        settled = max(1, round(SETTLED_SHARE * total / (1.0 + SETTLED_SHARE)))
        self._runners = min(space.distinct, max(1, total - settled))
        most = min(total - self._runners, self._runners)
        self._settling = Settling(most)
        self._expected = self._runners + most
        self._start = self._field(space, seed)

    def _field(self, space: WiringSpace, seed: int) -> Iterator[Wiring]:
        if self._runners == space.distinct:
            return iter(space)
        return iter(Candidates(space, np.random.default_rng(seed)).drawn(self._runners))

    def expected(self) -> int:
        """All short walks and the most settled ones there can be."""
        return self._expected

    def ask(self) -> Sequence[Ask]:
        """Short walks first, then settled ones down the list."""
        short = [Ask(wiring, SHORT_PERIODS) for wiring in islice(self._start, BATCH)]
        return short or self._settling.ask()

    def tell(self, readings: Sequence[Reading]) -> None:
        """Keeps the readings for the settled walks."""
        self._settling.tell(readings)
