"""What a wiring is scored on; more is better."""

from __future__ import annotations

import math
from dataclasses import dataclass

from gaitlab.gait.records import Walk

OBJECTIVES = ("travel", "speed", "straight", "air")

UNITS = {"travel": "mm/period", "speed": "mm/s", "straight": "mm/period", "air": "m/g"}
SCALE = {"travel": 1e3, "speed": 1e3, "straight": 1e3, "air": 1e-3}  # SI score to the unit above

MEANING = {
    "travel": "forward travel per period, of the robot's own heading",
    "speed": "forward speed",
    "straight": "forward travel less what it drifts sideways and what turning costs its ends",
    "air": "forward travel per mass of air let in",
}


@dataclass(frozen=True)
class Score:
    """A walk's score in SI and its scatter (one standard deviation of the settled periods); nan where it has none."""

    value: float
    scatter: float


def score_of(walk: Walk, objective: str) -> Score:
    """The walk's score under one of `OBJECTIVES`.

    travel: s [m per period], along the robot's mean heading over each period. speed: s/T [m/s]. straight: s − |drift| − |turn| ·
    L/2 [m], half a body length being what the ends sweep sideways (weights chosen by us). air: s/m_air [m/kg],
    the inverse of air per metre, negative for a robot that walks backwards. Raises KeyError for another name.
    """
    travel = walk.travel_m
    sideways = abs(walk.drift_m) + 0.5 * walk.body_length_m * abs(walk.turn_rad)
    air_kg = walk.air_kg_per_m * abs(travel)
    value = {
        "travel": travel,
        "speed": travel / walk.period_s,
        "straight": travel - sideways,
        "air": travel / air_kg if air_kg else math.nan,
    }[objective]
    return Score(value, scatter_of(objective, value, travel, walk.travel_scatter_m, walk.period_s))


def scatter_of(objective: str, score: float, travel_m: float, scatter_m: float, period_s: float) -> float:
    """The scatter that belongs to a score: the travel's, in the score's unit.

    >>> scatter_of("speed", 0.01, 0.02, 0.001, 2.0)
    0.0005
    """
    if objective == "speed":
        return scatter_m / period_s
    if objective == "air":
        return scatter_m * abs(score / travel_m) if travel_m else math.nan
    return scatter_m


def tied(one: Score, other: Score) -> bool:
    """Whether two scores differ by no more than their scatters together, √(σ₁² + σ₂²); an unknown scatter counts as none."""
    scatter = math.hypot(*(s.scatter if math.isfinite(s.scatter) else 0.0 for s in (one, other)))
    return abs(one.value - other.value) <= scatter
