"""Short walks where a Gaussian process over wirings expects most, settled walks for the best of them."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from gaitlab.search.settings import SHORT_PERIODS
from gaitlab.search.strategies.ask_tell import Ask, Reading
from gaitlab.search.strategies.candidates import Candidates
from gaitlab.search.strategies.gaussian import likely_scale, posterior
from gaitlab.search.strategies.kernel import WiringKernel
from gaitlab.search.strategies.settling import Settling
from gaitlab.wiring.space import WiringSpace
from gaitlab.wiring.wiring import Wiring


@dataclass(frozen=True)
class ProcessTuning:
    """Settings of the search, found on tables of one seven-leg body (tests/benchmarks/search_cost.py) and kept for all others.

    `first`: walks drawn before the first fit. `batch`: walks between two fits, fixed so that the number of workers
    changes nothing. `daring`: standard deviations added to the mean. `settled_share` of the walks are settled ones at most.
    """

    first: int = 8
    batch: int = 4
    daring: float = 4.0
    settled_share: float = 0.03


def default_budget(space: WiringSpace) -> int:
    """A seventh of the wirings, at least 24 walks and at most 400; chosen by us on the tables of the benchmark."""
    return min(space.distinct + 4, max(24, min(400, round(space.distinct / 7))))


class ProcessSearch:
    """Upper-confidence search: walk next where mean + daring · standard deviation is largest, in batches.

    Within a batch a chosen wiring counts as read with its expected value (the kriging-believer rule), so that the batch spreads out.
    A failed walk counts as the worst reading so far.
    """

    listens = True

    def __init__(
        self,
        space: WiringSpace,
        first: Sequence[Wiring],
        budget: int | None,
        seed: int,
        tuning: ProcessTuning = ProcessTuning(),
    ) -> None:
        self._tuning, self._budget = tuning, budget or default_budget(space)
        settled = max(1, round(tuning.settled_share * self._budget))
        self._short_left = min(space.distinct, max(1, self._budget - settled))
        self._settling = Settling(min(settled, self._budget - self._short_left))
        self._candidates = Candidates(space, np.random.default_rng(seed))
        self._kernel = WiringKernel(space)
        self._first = list(first)
        self._walked: list[Wiring] = []
        self._scores: list[float] = []

    def expected(self) -> int:
        """The budget."""
        return self._budget

    def ask(self) -> Sequence[Ask]:
        """The next batch of short walks, then settled walks of the best."""
        wirings = self._next() if self._short_left else []
        if not wirings:
            return self._settling.ask()
        self._candidates.mark(wirings)
        self._short_left -= len(wirings)
        return [Ask(wiring, SHORT_PERIODS) for wiring in wirings]

    def tell(self, readings: Sequence[Reading]) -> None:
        """Refits on the short readings, keeps the settled ones for the end."""
        self._settling.tell(readings)
        for reading in readings:
            if not reading.ask.settled:
                self._walked.append(reading.ask.wiring)
                self._scores.append(reading.score)

    def _next(self) -> list[Wiring]:
        if not self._walked:
            begin = self._first[: self._short_left]
            self._candidates.mark(begin)
            more = min(self._tuning.first, self._short_left) - len(begin)
            return begin + self._candidates.drawn(max(0, more))
        known = np.array(self._scores)
        if not np.any(np.isfinite(known)):
            return self._candidates.drawn(min(self._tuning.batch, self._short_left))
        known = np.where(np.isfinite(known), known, np.nanmin(known))
        best = [self._walked[i] for i in np.argsort(-known, kind="stable")]
        return self._most_promising(known, self._candidates.near(best))

    def _most_promising(self, known: np.ndarray, pool: list[Wiring]) -> list[Wiring]:
        number = min(self._tuning.batch, self._short_left, len(pool))
        features, seen = self._kernel.features(pool), self._kernel.features(self._walked)
        inner, outer = self._kernel.between(seen, seen), self._kernel.between(features, seen)
        scale, chosen = likely_scale(inner, known), list[int]()
        for _ in range(number):
            mean, deviation = posterior(inner, known, scale).predicted(outer)
            hope = mean + self._tuning.daring * deviation
            hope[chosen] = -np.inf
            pick = int(np.argmax(hope))
            chosen.append(pick)
            inner, outer, known = self._believed(features, inner, outer, known, pick, float(mean[pick]))
        return [pool[i] for i in chosen]

    def _believed(
        self, features: np.ndarray, inner: np.ndarray, outer: np.ndarray, known: np.ndarray, pick: int, mean: float
    ) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
        """Kernel and readings as if the picked wiring had been read at its mean."""
        row = outer[pick : pick + 1]
        inner = np.block([[inner, row.T], [row, np.ones((1, 1))]])
        outer = np.hstack([outer, self._kernel.between(features, features[:, pick : pick + 1])])
        return inner, outer, np.append(known, mean)
