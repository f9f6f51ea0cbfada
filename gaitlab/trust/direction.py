"""A wiring against its own reversed wave: which way to run the ring, in words, and how sure that is."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from gaitlab.gait.records import Walk
from gaitlab.trust.summary import Chance, chance

FloatArray = NDArray[np.float64]

AS_GIVEN, REVERSED, EITHER = "as given", "reversed", "either"
SURE, LIKELY, UNDECIDED = "sure", "likely", "not decided"

# Chosen by us: sure when even the low end of the 90 % interval is four builds of five, likely at four of five themselves.
SURE_LOW, LIKELY_SHARE = 0.8, 0.8
CLEAR_SHARE = (
    0.5  # one walk each says "likely" only where they differ by half the better one: twice an engine's own ±25 %
)
ON_THE_SPOT = 0.25  # a reversed wave with under a quarter of the travel walks on the spot, as builders say


@dataclass(frozen=True)
class Advice:
    """Which wave to build (`choose`), how sure (`sure`), the chance that the wiring as given beats its reverse, and all in words."""

    choose: str
    sure: str
    chance_as_given: Chance | None
    words: str


def advice(given: Walk, backward: Walk, *, scores: FloatArray | None = None) -> Advice:
    """Advice from one walk each, and from common draws where there are any: `scores` (n, 2), as given and reversed."""
    won = None if scores is None else _chance(scores)
    choose, sure = _from_walks(given, backward) if won is None else _from_draws(won)
    return Advice(choose, sure, won, _words(choose, sure, won, given, backward, 0 if scores is None else len(scores)))


def _chance(scores: FloatArray) -> Chance | None:
    """The share of the draws, of those in which either walked, that the first column wins; a tie is half a win."""
    counted = np.where(np.isfinite(scores), scores, -np.inf)
    told = counted[np.isfinite(counted).any(axis=1)]
    if not len(told):
        return None
    wins = float((told[:, 0] > told[:, 1]).sum() + 0.5 * (told[:, 0] == told[:, 1]).sum())
    return chance(wins, len(told))


def _from_draws(won: Chance) -> tuple[str, str]:
    share, low = (won.share, won.low) if won.share >= 0.5 else (1 - won.share, 1 - won.high)
    choose = AS_GIVEN if won.share >= 0.5 else REVERSED
    if low >= SURE_LOW:
        return choose, SURE
    return (choose, LIKELY) if share >= LIKELY_SHARE else (EITHER, UNDECIDED)


def _from_walks(given: Walk, backward: Walk) -> tuple[str, str]:
    one, other = _or_worst(given.travel_m), _or_worst(backward.travel_m)
    if one == other:
        return EITHER, UNDECIDED
    choose = AS_GIVEN if one > other else REVERSED
    if not (math.isfinite(one) and math.isfinite(other)):
        return choose, LIKELY
    clear = abs(one - other) > CLEAR_SHARE * max(abs(one), abs(other))
    return (choose, LIKELY) if clear else (EITHER, UNDECIDED)


def _or_worst(travel_m: float) -> float:
    return travel_m if math.isfinite(travel_m) else -math.inf


def _words(choose: str, sure: str, won: Chance | None, given: Walk, backward: Walk, draws: int) -> str:
    basis = "one walk each, tolerances not counted" if won is None else _won_text(won, draws)
    clear, unclear = f"Run the wave {choose}: {sure} ({basis}).", f"No direction is clearly better ({basis})."
    head = unclear if choose == EITHER else clear
    better, worse = (backward, given) if choose == REVERSED else (given, backward)
    return " ".join([head, *_remarks(choose, better, worse)])


def _won_text(won: Chance, draws: int) -> str:
    share, low, high = (f"{100 * x:.0f}" for x in (won.share, won.low, won.high))
    return f"as given it is the better one in {share} % of {draws} draws, 90 % interval {low} to {high} %"


def _remarks(choose: str, better: Walk, worse: Walk) -> list[str]:
    found: list[str] = []
    if not math.isfinite(worse.travel_m) and choose != EITHER:
        found.append(f"The other way round it does not walk ({worse.outcome}).")
    elif choose != EITHER and abs(worse.travel_m) < ON_THE_SPOT * abs(better.travel_m):
        found.append("The other way round it nearly walks on the spot: mind which way the ring block goes in.")
    if better.travel_m < 0:
        found.append("It walks tail first: turn the body round, or take a wiring that goes forward.")
    return found
