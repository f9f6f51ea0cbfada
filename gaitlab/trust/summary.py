"""What many builds of one robot did, in a few numbers: quantiles, chances and counted failures, wiring beside wiring."""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]

Z90 = 1.6449  # standard normal quantile of a two-sided 90 % interval


@dataclass(frozen=True)
class Quantiles:
    """5 %, 50 % and 95 % points, straight between order statistics; nan where nothing was measured."""

    p05: float
    p50: float
    p95: float


@dataclass(frozen=True)
class Chance:
    """A share of the draws, with its 90 % Wilson (1927) score interval."""

    share: float
    low: float
    high: float


@dataclass(frozen=True, slots=True)
class Outcome:
    """What one build did with one wiring: travel per period [m], speed [m/s], the searched-for score (more is better), its name.

    nan unless it walked.
    """

    outcome: str
    ring_started: bool
    travel_m: float
    speed_m_s: float
    score: float

    @property
    def walked(self) -> bool:
        """Whether there is a travel to count."""
        return math.isfinite(self.travel_m)


@dataclass(frozen=True)
class WiringSummary:
    """One wiring over all draws. Quantiles are of the draws that walked; chances and `outcomes` count every draw."""

    travel_m: Quantiles
    speed_m_s: Quantiles
    forward: Chance
    best: Chance
    ring_fails: Chance
    walks: Chance
    outcomes: tuple[tuple[str, int], ...]


def quantiles(values: FloatArray) -> Quantiles:
    """Quantiles of the finite `values` (n,)."""
    finite = values[np.isfinite(values)]
    if not len(finite):
        return Quantiles(math.nan, math.nan, math.nan)
    return Quantiles(*(float(q) for q in np.quantile(finite, (0.05, 0.5, 0.95), method="median_unbiased")))


def chance(count: float, total: int) -> Chance:
    """`count` of `total` draws with the Wilson score interval.

    >>> round(chance(9, 10).low, 2)
    0.65
    """
    share = count / total
    centre = (share + Z90**2 / (2 * total)) / (1 + Z90**2 / total)
    half = Z90 / (1 + Z90**2 / total) * math.sqrt(share * (1 - share) / total + Z90**2 / (4 * total**2))
    return Chance(share, min(max(centre - half, 0.0), share), max(min(centre + half, 1.0), share))


def best_shares(scores: FloatArray) -> FloatArray:
    """How many draws each wiring wins, (W,): `scores` (n, W), nan never wins, equal winners share the draw."""
    scores = np.where(np.isfinite(scores), scores, -np.inf)
    top = scores.max(axis=1, keepdims=True)
    winners = (scores == top) & np.isfinite(top)
    return np.asarray((winners / np.maximum(winners.sum(axis=1, keepdims=True), 1)).sum(axis=0))


def summaries(outcomes: Sequence[Sequence[Outcome]]) -> tuple[WiringSummary, ...]:
    """One summary per wiring from `outcomes[draw][wiring]`; the order of the wirings changes nothing but the order."""
    best = best_shares(np.array([[o.score for o in row] for row in outcomes]))
    columns = zip(*outcomes, strict=True)
    return tuple(_summary(list(column), float(b)) for column, b in zip(columns, best, strict=True))


def _summary(column: list[Outcome], best: float) -> WiringSummary:
    total = len(column)
    counted = Counter(o.outcome for o in column)
    return WiringSummary(
        travel_m=quantiles(np.array([o.travel_m for o in column])),
        speed_m_s=quantiles(np.array([o.speed_m_s for o in column])),
        forward=chance(sum(o.walked and o.travel_m > 0 for o in column), total),
        best=chance(best, total),
        ring_fails=chance(sum(not o.ring_started for o in column), total),
        walks=chance(sum(o.walked for o in column), total),
        outcomes=tuple(sorted(counted.items(), key=lambda item: (-item[1], item[0]))),
    )
