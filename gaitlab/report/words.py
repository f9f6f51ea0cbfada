"""Numbers and findings in the words that sheet and page share."""

from __future__ import annotations

import math

from gaitlab.gait.records import Walk
from gaitlab.report.run_folder import RankedWiring, SavedRun, WiringSpread
from gaitlab.trust.speed import SpeedEstimate, estimate_from_draws, estimate_from_walk

MM = 1e3
KPA = 1e3
UNKNOWN = "–"
# Shares of the best wiring's travel at which we change the word, chosen by us.
ON_THE_SPOT = 0.2
MUCH_SLOWER = 0.7


def number(value: float, digits: int = 1) -> str:
    """A number with a real minus sign, or a dash for what is not known.

    >>> number(-1.234), number(float("nan")), number(-0.01)
    ('−1.2', '–', '0.0')
    """
    if not math.isfinite(value):
        return UNKNOWN
    text = f"{value:.{digits}f}"
    return (text.removeprefix("-") if float(text) == 0.0 else text).replace("-", "−")


def speed_estimate(run: SavedRun) -> SpeedEstimate | None:
    """Speed of the best wiring with its interval: over the tolerances where a spread was run, else the engine's own doubt.

    None where the best wiring has no travel to speak of.
    """
    walk, spread = run.best.walk, spread_of_best(run)
    if spread is not None:
        return estimate_from_draws(spread.summary.travel_m, spread.summary.speed_m_s, walk.body_length_m)
    if not (math.isfinite(walk.travel_m) and math.isfinite(walk.period_s) and walk.body_length_m > 0):
        return None
    return estimate_from_walk(walk.travel_m, walk.period_s, walk.body_length_m)


def spread_of_best(run: SavedRun) -> WiringSpread | None:
    """The spread of the best wiring, where it was run."""
    rows = run.spread.wirings if run.spread else ()
    return next((row for row in rows if row.wiring == run.best.wiring), None)


def speed_text(estimate: SpeedEstimate | None) -> str:
    """The speed with its interval, in mm/s and body lengths per second."""
    if estimate is None:
        return "not known: the best wiring did not walk"
    low, middle, high = (number(MM * value) for value in estimate.speed_m_s)
    lengths = number(estimate.body_lengths_s[1], 3)
    return f"{middle} mm/s, likely {low} to {high} ({lengths} body lengths/s)"


def reversed_text(best: RankedWiring) -> str:
    """What the robot does when the wave runs the other way, from the walk that was run."""
    walk = best.reversed_walk
    if walk is None:
        return "The reversed wave was not walked in this run; expect a different speed."
    if not math.isfinite(walk.travel_m):
        return f"With the wave reversed it does not walk ({walk.outcome.replace('_', ' ')})."
    share = walk.travel_m / best.walk.travel_m if best.walk.travel_m else math.inf
    travel = f"{number(MM * walk.travel_m)} mm per period instead of {number(MM * best.walk.travel_m)}"
    return f"With the wave reversed it {_reversed_verb(share)}: {travel}."


def _reversed_verb(share: float) -> str:
    if abs(share) < ON_THE_SPOT:
        return "walks on the spot"
    if share < 0.0:
        return "walks backwards"
    if share < MUCH_SLOWER:
        return "still walks forward, but much slower"
    return "walks forward as well, at much the same speed" if share < 1.0 / MUCH_SLOWER else "walks faster"


def course_text(walk: Walk) -> str:
    """Drift and turn of a walk with their sides (left is positive in the records)."""
    if not (math.isfinite(walk.drift_m) and math.isfinite(walk.turn_rad)):
        return "not known"
    drift, turn = MM * walk.drift_m, math.degrees(walk.turn_rad)
    return f"drifts {_sided(drift, ' mm')}, turns {_sided(turn, '°')} per period"


def _sided(value: float, unit: str) -> str:
    text = number(abs(value))
    if float(text) == 0.0:
        return f"{text}{unit}"
    return f"{text}{unit} to the {'left' if value > 0.0 else 'right'}"


def rechecks_text(run: SavedRun) -> str:
    """How the order of the finalists held in the rechecks, and how far the best travel moved."""
    if not run.rechecks:
        return "The order of the finalists was not rechecked in this run."
    asked = [check for check in run.rechecks if check.order_kept is not None]
    kept = sum(bool(check.order_kept) for check in asked)
    names = ", ".join(check.name for check in run.rechecks)
    text = (
        f"Order kept in {kept} of {len(asked)} rechecks ({names})" if asked else f"{_no_order(run)} (rechecks: {names})"
    )
    base = run.best.walk.travel_m
    moves = [abs(check.travel_m / base - 1.0) for check in run.rechecks if math.isfinite(check.travel_m) and base]
    return f"{text}; the best wiring's travel moved by up to {100 * max(moves):.0f} %." if moves else f"{text}."


def _no_order(run: SavedRun) -> str:
    return (
        "Finalists all tied: no order to keep"
        if any("all tied" in check.note for check in run.rechecks)
        else "No order to keep"
    )


def source_text(source: int | str) -> str:
    """A wiring's source in words."""
    if source == "open":
        return "atmosphere"
    return "supply" if source == "held" else f"output {source}"
