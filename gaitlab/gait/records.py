"""What one walk leaves behind: its measures, and on request its recorded motion for pictures."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]


@dataclass(frozen=True)
class WaveReading:
    """The travelling wave seen in the footfalls: direct, retrograde, standing or none; length in legs; coherence 0…1."""

    direction: str
    wavelength_legs: float
    coherence: float


@dataclass(frozen=True)
class Walk:
    """One walk of one wiring. SI units, angles in rad; nan where the outcome leaves nothing to measure.

    `travel_m` is forward distance per period (mean over the settled periods), `travel_scatter_m` the standard deviation of
    those periods, `travels_m` every period since the gait began. `drift_m` sideways and `turn_rad` heading change per period.
    """

    outcome: str
    remedy: str
    engine: str
    step_s: float
    period_s: float
    travel_m: float
    travel_scatter_m: float
    travels_m: tuple[float, ...]
    drift_m: float
    turn_rad: float
    slip: float
    duty_factor: tuple[tuple[str, float], ...]
    stance: tuple[tuple[str, tuple[tuple[float, float], ...]], ...]
    wave: WaveReading
    body_length_m: float
    pitch_rad: float
    height_mean_m: float
    height_min_m: float
    stability_margin_m: float
    air_kg_per_m: float
    simulated_s: float
    warnings: tuple[str, ...] = ()

    @property
    def speed_m_s(self) -> float:
        """Forward speed: travel over period."""
        return self.travel_m / self.period_s


@dataclass(frozen=True)
class Part:
    """The look of one rigid part, for pictures: box (full sizes), sphere (radius, 0, 0) or capsule (radius, length, 0) along its z."""

    name: str
    kind: str
    size_m: tuple[float, float, float]
    offset_m: tuple[float, float, float]
    inlet: str | None
    chain: str | None


@dataclass(frozen=True)
class Trace:
    """Recorded motion: T instants, P parts, I inlets, F feet.

    `time_s` (T,) counts from the gait's start; `position_m` (T, P, 3) and `quaternion` (T, P, 4; x y z w) of each part's
    centre in the world; `vacuum_Pa` (T, I) in `inlets` order; `loaded` (T, F) whether a foot carries weight, `foot_m` (T, F, 3).
    """

    parts: tuple[Part, ...]
    inlets: tuple[str, ...]
    feet: tuple[str, ...]
    period_s: float
    time_s: FloatArray
    position_m: FloatArray
    quaternion: FloatArray
    vacuum_Pa: FloatArray
    loaded: BoolArray
    foot_m: FloatArray
