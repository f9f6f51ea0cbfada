"""Pressure waves as the body sees them: smooth periodic functions of phase, and the record of a ring's run."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]


@dataclass(frozen=True)
class Waves:
    """Gauge vacuum at each inlet over one period.

    `vacuum_Pa` has shape (inlets, K): column k holds the values at phase k/K (the end point is not repeated), K a few
    hundred, smooth enough for periodic interpolation. Inlets that are open or held are constant rows.
    """

    period_s: float
    inlets: tuple[str, ...]
    vacuum_Pa: FloatArray


@dataclass(frozen=True)
class RingRun:
    """What a ring does under one load: a named outcome, and the periodic state where there is one.

    Arrays over stages have shape (N,), in ring order; `phase` is the evacuation edge's lag behind output 1 as a fraction of
    a period in [0, 1); `output_vacuum_Pa` has shape (N, K) over one period; `waves` holds the same for the bellows.
    Where the ring does not oscillate the arrays hold the resting state (K = 1) and `period_s` is nan.
    """

    outcome: str
    remedy: str
    period_s: float
    phase: FloatArray
    duty: FloatArray
    peak_vacuum_Pa: FloatArray
    least_vacuum_Pa: FloatArray
    rise_s: FloatArray
    fall_s: FloatArray
    start_up_s: float
    supply_mean_Pa: float
    supply_min_Pa: float
    air_kg_per_period: float
    harmonic: int
    output_vacuum_Pa: FloatArray
    supply_vacuum_Pa: FloatArray
    waves: Waves
    details: tuple[tuple[str, float], ...] = field(default=())
