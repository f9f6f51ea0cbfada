"""What measured traces say before any model: period, phases, levels and one averaged period of every gauge.

A stage's edge is where its vacuum rises through the middle of its swing (between its 5 % and 95 % points); phases are
lags of edges behind the first measured stage, as fractions of a period; levels are read off the averaged period.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from gaitlab.trust.trace_csv import BenchTraces

FloatArray = NDArray[np.float64]

PHASES = 48  # phases at which an averaged period is kept: edges of a tenth of a period get five points; chosen by us
SWING_LEAST_PA = 1000.0  # a swing below 1 kPa is taken for noise of the gauge, not a logic level; chosen by us
GUARD = 0.2  # an edge must start from a fifth of the swing below the middle, so that noise makes no edges; chosen by us


@dataclass(frozen=True)
class GaugeReading:
    """One gauge over an averaged period: `vacuum_Pa` (PHASES,) from the reference edge on, levels, and times of its edges."""

    phase: float
    phase_scatter: float
    peak_Pa: float
    least_Pa: float
    rise_s: float
    vacuum_Pa: FloatArray


@dataclass(frozen=True)
class TraceReading:
    """All gauges. `outcome`: oscillates, rests (no swing), or too_short (fewer than two whole periods); then gauges are empty.

    `levels_Pa` is every stage's median, whatever the outcome.
    """

    outcome: str
    remedy: str
    period_s: float
    period_scatter_s: float
    periods: int
    reference_stage: int
    stages: tuple[tuple[int, GaugeReading], ...]
    inlets: tuple[tuple[str, GaugeReading], ...]
    supply_Pa: FloatArray | None
    levels_Pa: tuple[tuple[int, float], ...]


def read_rhythm(traces: BenchTraces) -> TraceReading:
    """Period, phases and averaged periods of measured traces."""
    levels = tuple((k, float(np.nanmedian(v))) for k, v in traces.stages)
    edges = {k: rising_edges(traces.time_s, v) for k, v in traces.stages}
    reference = next((k for k, found in edges.items() if len(found) >= 2), None)
    if reference is None:
        return _without_rhythm(traces, edges, levels)
    marks = edges[reference]
    periods = np.diff(marks)
    if len(periods) < 2:
        return _named("too_short", "record at least three periods, from well after the start-up on", levels)
    return TraceReading(
        outcome="oscillates",
        remedy="",
        period_s=float(np.median(periods)),
        period_scatter_s=float(periods.std(ddof=1)),
        periods=len(periods),
        reference_stage=reference,
        stages=tuple((k, gauge_reading(traces.time_s, v, marks)) for k, v in traces.stages),
        inlets=tuple((i, gauge_reading(traces.time_s, v, marks)) for i, v in traces.inlets),
        supply_Pa=None if traces.supply_Pa is None else averaged_period(traces.time_s, traces.supply_Pa, marks),
        levels_Pa=levels,
    )


def rising_edges(time_s: FloatArray, vacuum_Pa: FloatArray) -> FloatArray:
    """Times (E,) at which the vacuum rises through the middle of its swing, straight between samples; none without a swing."""
    good = np.isfinite(vacuum_Pa)
    t, v = time_s[good], vacuum_Pa[good]
    middle, swing = middle_and_swing(v)
    if swing < SWING_LEAST_PA:
        return np.empty(0)
    guard = GUARD * swing
    found: list[float] = []
    armed = False
    for i in range(len(v)):
        if v[i] < middle - guard:
            armed = True
        elif armed and v[i] >= middle + guard:
            found.append(_crossing(t, v, i, middle))
            armed = False
    return np.array(found)


def middle_and_swing(vacuum_Pa: FloatArray) -> tuple[float, float]:
    """The middle level and the swing between the 5 % and 95 % points: extremes of noise do not count."""
    low, high = np.quantile(vacuum_Pa, (0.05, 0.95))
    return float(low + high) / 2, float(high - low)


def _crossing(t: FloatArray, v: FloatArray, i: int, middle: float) -> float:
    """The last crossing of `middle` at or before sample `i`."""
    while v[i - 1] >= middle:
        i -= 1
    return float(t[i - 1] + (middle - v[i - 1]) / (v[i] - v[i - 1]) * (t[i] - t[i - 1]))


def averaged_period(time_s: FloatArray, vacuum_Pa: FloatArray, marks: FloatArray) -> FloatArray:
    """The mean period (PHASES,) between the reference `marks` (M,): phase k/PHASES, each period stretched to its own length."""
    good = np.isfinite(vacuum_Pa)
    phases = np.arange(PHASES) / PHASES
    instants = marks[:-1, None] + phases * np.diff(marks)[:, None]
    return np.asarray(np.interp(instants, time_s[good], vacuum_Pa[good]).mean(axis=0))


def gauge_reading(time_s: FloatArray, vacuum_Pa: FloatArray, marks: FloatArray) -> GaugeReading:
    """One gauge against the reference `marks` (M,)."""
    mean = averaged_period(time_s, vacuum_Pa, marks)
    edges = rising_edges(time_s, vacuum_Pa)
    inside = edges[(edges >= marks[0]) & (edges < marks[-1])]
    places = np.searchsorted(marks, inside, side="right") - 1
    turns = np.exp(2j * np.pi * (inside - marks[places]) / np.diff(marks)[places])
    mean_turn = turns.mean() if len(turns) else complex(np.nan)
    scatter = float(np.sqrt(max(0.0, -2 * np.log(min(abs(mean_turn), 1.0)))) / (2 * np.pi)) if len(turns) else np.nan
    return GaugeReading(
        phase=float(np.angle(mean_turn) / (2 * np.pi) % 1.0) if len(turns) else np.nan,
        phase_scatter=scatter,
        peak_Pa=float(mean.max()),
        least_Pa=float(mean.min()),
        rise_s=rise_time(mean) * float(np.median(np.diff(marks))),
        vacuum_Pa=mean,
    )


def rise_time(period: FloatArray) -> float:
    """From a tenth to nine tenths of the swing on the way up, as a fraction of the period `period` (K,); nan without a swing."""
    low, high = float(period.min()), float(period.max())
    if high - low < SWING_LEAST_PA:
        return float("nan")
    count = len(period)
    upward = np.roll(period, -int(period.argmin()))
    top = int(upward.argmax())
    ramp = np.maximum.accumulate(upward[: top + 1])
    at = np.interp((low + 0.1 * (high - low), low + 0.9 * (high - low)), ramp, np.arange(top + 1))
    return float(at[1] - at[0]) / count


def _without_rhythm(
    traces: BenchTraces, edges: dict[int, FloatArray], levels: tuple[tuple[int, float], ...]
) -> TraceReading:
    swings = any(np.nanmax(v) - np.nanmin(v) > SWING_LEAST_PA for _, v in traces.stages)
    if swings or any(len(e) for e in edges.values()):
        return _named("too_short", "record at least three periods, from well after the start-up on", levels)
    return _named(
        "rests",
        "the ring does not swing: compare its levels with those of gaitlab inverter, then with gaitlab ring",
        levels,
    )


def _named(outcome: str, remedy: str, levels: tuple[tuple[int, float], ...]) -> TraceReading:
    nan = float("nan")
    return TraceReading(outcome, remedy, nan, nan, 0, 0, (), (), None, levels)
