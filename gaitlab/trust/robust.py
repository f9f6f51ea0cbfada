"""Finalists of a search ranked again over the build tolerances: by the median or by any quantile of their score."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from gaitlab.errors import InputError, must
from gaitlab.trust.spread import FloatArray, Spread, WiringSpread

MEDIAN = 0.5


@dataclass(frozen=True)
class RobustRank:
    """One finalist: its rank over the tolerances (from 1), the quantile it is ranked on, and its spread."""

    rank: int
    quantile_score: float
    spread: WiringSpread


def robust_ranking(spread: Spread, *, quantile: float = MEDIAN) -> tuple[RobustRank, ...]:
    """The wirings of a spread by their `quantile` of the score, the best first.

    A low quantile (0.1) asks what nine builds of ten reach. A draw that did not walk counts as worse than any that did, so a
    wiring that fails too often ranks last, with a score of nan. Raises InputError for a quantile outside 0…1.
    """
    check_quantile(quantile)
    scores = [failing_quantile(column, quantile) for column in spread.scores.T]
    texts = [w.wiring.text() for w in spread.wirings]
    order = sorted(range(len(scores)), key=lambda k: (-scores[k], texts[k]))
    return tuple(
        RobustRank(rank, scores[k] if math.isfinite(scores[k]) else math.nan, spread.wirings[k])
        for rank, k in enumerate(order, start=1)
    )


def check_quantile(quantile: float) -> None:
    """Raises InputError for a quantile outside 0…1."""
    if not 0.0 <= quantile <= 1.0:
        raise InputError(must("quantile", "from 0 to 1", quantile, "0.5 is the median, 0.1 a cautious choice"))


def failing_quantile(scores: FloatArray, quantile: float) -> float:
    """The lower order statistic at `quantile` of `scores` (n,), a nan counted as minus infinity."""
    counted = np.where(np.isfinite(scores), scores, -np.inf)
    return float(np.quantile(counted, quantile, method="lower"))
