"""A speed that may be told to others: with its interval, in three units, and held against walkers that were published."""

from __future__ import annotations

import math
from dataclasses import dataclass

from gaitlab.trust.summary import Quantiles

# About 0.2 body lengths per period is where good many-legged walkers sit: 2 g hexapod, 20 Hz, 4 body lengths/s
# (IROS 2010) and centipedes (PMC12831010).
BODY_LENGTHS_PER_PERIOD_TOP = 0.2

# Published pneumatic walkers, body lengths per second: Shao et al. 2022 (RA-L, doi 10.1109/LRA.2022.3213137)
# 1.35 per minute; a decapod on bellows 0.07 (arXiv:2503.07321); a vacuum crawler 0.049 (doi 10.1089/soro.2018.0124).
PNEUMATIC_BODY_LENGTHS_S = (1.35 / 60, 0.07)

# What choices that should not matter (inertia factor, contact, engine) move one simulated distance by: 20 to 30 %, chosen by us
# on the safe side of the largest changes that tests/benchmarks/convergence.py prints.
ENGINE_SPREAD = 0.25


@dataclass(frozen=True)
class SpeedEstimate:
    """Speed [m/s], body lengths per second and per period: (low, middle, high) each; `warnings` in plain words."""

    speed_m_s: tuple[float, float, float]
    body_lengths_s: tuple[float, float, float]
    body_lengths_per_period: tuple[float, float, float]
    basis: str
    warnings: tuple[str, ...]


def estimate_from_draws(travel_m: Quantiles, speed_m_s: Quantiles, body_length_m: float) -> SpeedEstimate:
    """The estimate over the build tolerances: 5 %, 50 % and 95 % of the draws that walked."""
    speed = (speed_m_s.p05, speed_m_s.p50, speed_m_s.p95)
    travel = (travel_m.p05, travel_m.p50, travel_m.p95)
    return _estimate(speed, travel, body_length_m, "p05, p50 and p95 over the build tolerances")


def estimate_from_walk(travel_m: float, period_s: float, body_length_m: float) -> SpeedEstimate:
    """The estimate from one simulated walk: give or take what the physics engine's own choices move a distance by."""
    half = ENGINE_SPREAD * abs(travel_m)
    travel = (travel_m - half, travel_m, travel_m + half)
    speed = (travel[0] / period_s, travel[1] / period_s, travel[2] / period_s)
    basis = f"one simulated walk, give or take {100 * ENGINE_SPREAD:.0f} % for the engine's own choices, build tolerances not counted"
    return _estimate(speed, travel, body_length_m, basis)


def _estimate(
    speed: tuple[float, float, float], travel: tuple[float, float, float], body_length_m: float, basis: str
) -> SpeedEstimate:
    if not (math.isfinite(body_length_m) and body_length_m > 0):
        raise ValueError("body_length_m must be finite and above 0")
    per_s = (speed[0] / body_length_m, speed[1] / body_length_m, speed[2] / body_length_m)
    per_period = (travel[0] / body_length_m, travel[1] / body_length_m, travel[2] / body_length_m)
    return SpeedEstimate(speed, per_s, per_period, basis, tuple(_warnings(per_s, per_period)))


def _warnings(per_s: tuple[float, float, float], per_period: tuple[float, float, float]) -> list[str]:
    found: list[str] = []
    if abs(per_period[1]) > BODY_LENGTHS_PER_PERIOD_TOP:
        found.append(
            f"{abs(per_period[1]):.2f} body lengths per period is more than published walkers reach "
            f"(about {BODY_LENGTHS_PER_PERIOD_TOP:g} at the top): doubt the model before believing it"
        )
    if abs(per_s[1]) > 10 * PNEUMATIC_BODY_LENGTHS_S[1]:
        found.append(
            f"{abs(per_s[1]):.2f} body lengths per second is over ten times what published pneumatic walkers reach "
            f"({PNEUMATIC_BODY_LENGTHS_S[0]:.3f} to {PNEUMATIC_BODY_LENGTHS_S[1]:g})"
        )
    if math.isfinite(per_period[0]) and per_period[0] * per_period[2] < 0:
        found.append("the interval reaches from backwards to forwards: this design does not decide which way it goes")
    return found
