"""Settled walks of wirings drawn at random: the baseline that any cleverer strategy must beat."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from gaitlab.search.strategies.ask_tell import Ask, Reading
from gaitlab.search.strategies.candidates import Candidates
from gaitlab.wiring.space import WiringSpace

DEFAULT_BUDGET = 100
BATCH = 64


class RandomDraws:
    """`budget` different wirings, each walked until its travel has settled (or for `periods`)."""

    listens = False

    def __init__(self, space: WiringSpace, budget: int | None, seed: int, periods: int | None = None) -> None:
        self._budget = min(space.distinct, budget or DEFAULT_BUDGET)
        self._candidates = Candidates(space, np.random.default_rng(seed))
        self._asked, self._periods = 0, periods

    def expected(self) -> int:
        """The budget, or the whole space if that is smaller."""
        return self._budget

    def ask(self) -> Sequence[Ask]:
        """The next draws."""
        wirings = self._candidates.drawn(min(BATCH, self._budget - self._asked))
        self._candidates.mark(wirings)
        self._asked += len(wirings)
        return [Ask(wiring, self._periods) for wiring in wirings]

    def tell(self, readings: Sequence[Reading]) -> None:
        """Nothing depends on it."""
