"""Coarse walks for all wirings, or for a few thousand of a larger space; settled walks for those that may be the best.

Settled and coarse score of a wiring are tied together as in Kennedy & O'Hagan (2000), "Predicting the output from a complex computer
code when fast approximations are available", Biometrika 87, 1–13, doi 10.1093/biomet/87.1.1: settled = coarse + a + b · coarse + δ, with
a, b and the Gaussian process δ over wirings unknown and learned from the wirings walked both ways. The next wiring walked
is the one of which most can be hoped; the search ends when none is left of which more can be hoped than has been found.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from gaitlab.search.strategies.ask_tell import Ask, Reading
from gaitlab.search.strategies.coarse_look import CoarseLook
from gaitlab.search.strategies.gaussian import FloatArray, likely_scale, posterior
from gaitlab.search.strategies.kernel import WiringKernel
from gaitlab.search.strategies.settling import CONFIDENCE
from gaitlab.wiring.space import WiringSpace
from gaitlab.wiring.wiring import Wiring

LEAST = (
    4  # settled walks before the search may end by itself: fewer do not tell how far coarse walks are off; chosen by us
)
LOOKED_AT = 400  # best wirings by coarse score among which the next is chosen; chosen by us, for speed


@dataclass(frozen=True)
class ScreenTuning:
    """Settings of the search, chosen by us with the table of `tray_row7` in sight (tests/benchmarks/search_cost.py).

    `first`: settled walks of the best by coarse score before the first fit. `batch`: settled walks between two fits, fixed so that
    the number of workers changes nothing. `own`: variance of each wiring's own error over that of δ. `line`: standard
    deviation of a and b, in units of δ's and of δ's over the coarse scores'.
    """

    first: int = 2
    batch: int = 2
    own: float = 0.2
    line: float = 1.0


def default_budget(space: WiringSpace) -> int:
    """Settled walks: one for every fifty wirings, at least 8 and at most 60; chosen by us."""
    return min(space.distinct, max(8, min(60, round(space.distinct / 50))))


class ScreenSearch:
    """First coarse walks, then settled ones, `budget` of them at most."""

    listens = True

    def __init__(
        self,
        space: WiringSpace,
        first: Sequence[Wiring],
        budget: int | None,
        seed: int,
        tuning: ScreenTuning = ScreenTuning(),
    ) -> None:
        self._tuning, self._left = tuning, budget or default_budget(space)
        self._look = CoarseLook(space, first, seed)
        self._kernel = WiringKernel(space)
        self._settled: dict[Wiring, float] = {}
        self._coarse_done = False

    def expected(self) -> int:
        """Settled walks at most. Coarse ones are not counted: each takes a small part of a settled one's time."""
        return self._left

    def ask(self) -> Sequence[Ask]:
        """The next coarse walks, and then the next settled ones."""
        if not self._coarse_done:
            wirings = self._look.next()
            if wirings:
                return [Ask(wiring, coarse=True) for wiring in wirings]
            self._coarse_done = True
        chosen = self._next()
        self._left -= len(chosen)
        return [Ask(wiring) for wiring in chosen]

    def tell(self, readings: Sequence[Reading]) -> None:
        """Keeps the scores of both kinds."""
        self._look.tell({r.ask.wiring: r.score for r in readings if r.ask.coarse})
        self._settled.update((r.ask.wiring, r.score) for r in readings if r.ask.settled)

    def _next(self) -> list[Wiring]:
        pool = [wiring for wiring in self._look.ranked() if wiring not in self._settled][:LOOKED_AT]
        walked = {wiring: score for wiring, score in self._settled.items() if np.isfinite(score)}
        if not walked:
            return pool[: min(self._tuning.first, self._left)]
        chosen: list[Wiring] = []
        found = max(walked.values())
        for _ in range(min(self._tuning.batch, self._left, len(pool))):
            mean, deviation = self._expected_of(pool, walked)
            hope = mean + CONFIDENCE * deviation
            hope[[pool.index(wiring) for wiring in chosen]] = -np.inf
            pick = int(np.argmax(hope))
            if hope[pick] <= found and len(walked) >= LEAST:
                break
            chosen.append(pool[pick])
            walked = {**walked, pool[pick]: float(mean[pick])}  # counts as read, so that the batch spreads out
        return chosen

    def _expected_of(self, pool: Sequence[Wiring], walked: dict[Wiring, float]) -> tuple[FloatArray, FloatArray]:
        """Mean and standard deviation of the settled scores of the pool."""
        known = list(walked)
        coarse, coarse_known = self._coarse(pool), self._coarse(known)
        error = np.array([walked[wiring] for wiring in known]) - coarse_known
        place, place_known = self._along(coarse), self._along(coarse_known)
        features, seen = self._kernel.features(pool), self._kernel.features(known)
        line, own = self._tuning.line**2, self._tuning.own
        inner = self._kernel.between(seen, seen) + line * (1.0 + np.outer(place_known, place_known))
        outer = self._kernel.between(features, seen) + line * (1.0 + np.outer(place, place_known))
        scale = likely_scale(inner, error, own, mean=0.0)
        mean, deviation = posterior(inner, error, scale, own).predicted(outer, 1.0 + own + line * (1.0 + place**2))
        return coarse + mean, deviation

    def _coarse(self, wirings: Sequence[Wiring]) -> FloatArray:
        return np.array([self._look.score(wiring) for wiring in wirings])

    def _along(self, coarse: FloatArray) -> FloatArray:
        """Coarse scores in standard deviations from their mean."""
        every = self._coarse(list(self._look.scores))
        return np.asarray((coarse - np.mean(every)) / (np.std(every) or 1.0))
