"""Measures of a walk from its recorded motion: travel, drift, turn, slip, attitude, air per metre, each defined once here.

All of them are pure functions of arrays sampled on a grid of whole periods; lengths in m, angles in rad.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from gaitlab.gait.motion import BoolArray, FloatArray


@dataclass(frozen=True)
class Steps:
    """Displacement per period, each in the body's own heading of that period; arrays of shape (periods,)."""

    forward_m: FloatArray
    left_m: FloatArray
    turn_rad: FloatArray


def steps_per_period(position_m: FloatArray, yaw_rad: FloatArray, samples_per_period: int) -> Steps:
    """Travel, drift and turn of every period.

    The displacement d from one period's start to the next is split along the heading ψ̄, the mean yaw over that same
    period: forward d·(cos ψ̄, sin ψ̄), left d·(−sin ψ̄, cos ψ̄). Taking the mean, not the yaw at one instant, makes the
    split independent of the phase at which periods are counted, and is exact for a path of even curvature.

    `position_m` (T, 2 or 3) and `yaw_rad` (T,) with T = periods · `samples_per_period` + 1; yaw may wrap.

    >>> import numpy as np
    >>> steps_per_period(np.array([[0.0, 0], [0.01, 0], [0.02, 0]]), np.zeros(3), 2).forward_m
    array([0.02])
    """
    yaw = np.unwrap(yaw_rad)
    ends = np.arange(0, len(yaw), samples_per_period)
    moved = np.diff(position_m[ends, :2], axis=0)
    heading = _mean_per_period(yaw, samples_per_period)
    cos, sin = np.cos(heading), np.sin(heading)
    return Steps(
        forward_m=moved[:, 0] * cos + moved[:, 1] * sin,
        left_m=-moved[:, 0] * sin + moved[:, 1] * cos,
        turn_rad=np.diff(yaw[ends]),
    )


def _mean_per_period(values: FloatArray, samples_per_period: int) -> FloatArray:
    # Trapezoidal, so that a period's first and last instant count half each and a straight ramp has its middle as mean.
    middles: FloatArray = 0.5 * (values[1:] + values[:-1])
    means: FloatArray = middles.reshape(-1, samples_per_period).mean(axis=1)
    return means


def settled(travels_m: FloatArray, *, periods: int, scatter: float, floor_m: float = 2e-4) -> bool:
    """Whether the last `periods` travels agree: standard deviation at most `scatter` · |mean|, or `floor_m`.

    The floor of 0.2 mm keeps a gait that stands still from being called unsettled (chosen by us).
    """
    if len(travels_m) < periods:
        return False
    tail = np.asarray(travels_m[-periods:])
    return bool(np.std(tail, ddof=1) <= max(scatter * abs(float(np.mean(tail))), floor_m))


def slip(sole_m_s: FloatArray, loaded: BoolArray, sample_s: float, travel_m: float) -> float:
    """How far a foot slides while it carries weight, over the distance travelled: 0 planted or rolling, 1 dragged all the way.

    ∫|v_sole| dt over the loaded time, summed over the feet, divided by the number of feet that ever carry weight and by
    |travel|. `sole_m_s` (T, F, 2) is the speed of the sole, not of the foot's middle: a round foot may roll. `loaded` (T, F);
    `travel_m` over the same instants. nan without travel or without a loaded foot.
    """
    carrying = int(np.count_nonzero(loaded.any(axis=0)))
    if carrying == 0 or travel_m == 0.0:
        return float("nan")
    return float(np.sum(slid_m(sole_m_s, loaded, sample_s)) / (carrying * abs(travel_m)))


def slid_m(sole_m_s: FloatArray, loaded: BoolArray, sample_s: float) -> FloatArray:
    """Distance that each sole slid between samples while loaded at both ends, (T − 1, F), by the trapezoidal rule."""
    speed = np.hypot(sole_m_s[..., 0], sole_m_s[..., 1])
    distance: FloatArray = 0.5 * sample_s * (speed[1:] + speed[:-1]) * (loaded[1:] & loaded[:-1])
    return distance


def mean_over_periods(values: FloatArray) -> float:
    """Time mean of a sampled quantity over whole periods (trapezoidal: the end points count half each)."""
    return float(np.mean(0.5 * (values[1:] + values[:-1])))


def air_kg_per_m(air_kg_per_period: float, travel_m: float) -> float:
    """Air taken per metre travelled: air per period over |travel|; infinite for a walk on the spot is given as nan."""
    return float(air_kg_per_period / abs(travel_m)) if travel_m != 0.0 else float("nan")
