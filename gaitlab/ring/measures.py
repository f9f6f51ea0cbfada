"""What is read off periodic waveforms: edges, phases, duty, rise and fall, lags and the harmonic.

Everything here takes gauge vacuum on one even period, shape (K,) or (N, K), end point not repeated, and times as fractions
of that period. An edge lies between two samples and is found by a straight line through them.
"""

from __future__ import annotations

import numpy as np

from gaitlab.ring.waves import FloatArray

RISE_FROM, RISE_TO = 0.1, 0.9  # of the swing, as is common for electrical edges
FLAT_PA = 1.0  # a swing below this is no wave


def half_swing(wave: FloatArray) -> float:
    """Midway between the least and the greatest value of one wave (K,)."""
    return 0.5 * float(wave.min() + wave.max())


def crossings(wave: FloatArray, level: float) -> tuple[FloatArray, FloatArray]:
    """Phases at which one wave (K,) passes `level` upwards, and downwards; each sorted, in [0, 1)."""
    after = np.roll(wave, -1)
    above, above_after = wave >= level, after >= level
    found = []
    for here in (np.flatnonzero(~above & above_after), np.flatnonzero(above & ~above_after)):
        found.append(np.sort(np.mod((here + (level - wave[here]) / (after[here] - wave[here])) / wave.size, 1.0)))
    return found[0], found[1]


def evacuation_edge(wave: FloatArray) -> float:
    """Phase of the upward passage through half swing; of several, the one after the longest stay below. nan if flat."""
    if np.ptp(wave) < FLAT_PA:
        return float("nan")
    up, down = crossings(wave, half_swing(wave))
    waits = np.array([np.min(np.mod(edge - down, 1.0)) for edge in up])
    return float(up[int(np.argmax(waits))])


def phases(waves: FloatArray) -> FloatArray:
    """Lag (N,) of each output's evacuation edge behind the first output's, in [0, 1); nan where an output is flat."""
    edges = np.array([evacuation_edge(wave) for wave in waves])
    lag = np.mod(edges - edges[0], 1.0)
    return np.where(lag > 1.0 - 1e-12, 0.0, lag)


def duty(waves: FloatArray) -> FloatArray:
    """Fraction of the period (N,) that each output spends above its own half swing; nan where it is flat."""
    return np.array([_time_above(wave) for wave in waves])


def _time_above(wave: FloatArray) -> float:
    if np.ptp(wave) < FLAT_PA:
        return float("nan")
    up, down = crossings(wave, half_swing(wave))
    following = np.array([np.min(np.mod(down - edge, 1.0)) for edge in up])
    return float(following.sum())


def rise_and_fall(waves: FloatArray) -> tuple[FloatArray, FloatArray]:
    """10–90 % times of evacuation and of venting, each (N,), as fractions of a period; nan where flat.

    Counted around the edge itself: from the last passage of the first mark to the first passage of the second.
    """
    pairs = np.array([(_edge_time(wave), _edge_time(-wave)) for wave in waves])
    return pairs[:, 0], pairs[:, 1]


def _edge_time(wave: FloatArray) -> float:
    edge = evacuation_edge(wave)
    if np.isnan(edge):
        return edge
    low, swing = float(wave.min()), float(np.ptp(wave))
    starts, ends = (crossings(wave, low + part * swing)[0] for part in (RISE_FROM, RISE_TO))
    return float(np.min(np.mod(edge - starts, 1.0)) + np.min(np.mod(ends - edge, 1.0)))


def stage_lags(phase: FloatArray) -> FloatArray:
    """Lag (N,) of each stage behind the one before it round the ring (of the first behind the last), in (0, 1]."""
    lag = np.mod(phase - np.roll(phase, 1), 1.0)
    return np.where(lag <= 0.0, lag + 1.0, lag)


def harmonic(phase: FloatArray) -> int:
    """Which harmonic h of the ring runs: the lags round the ring sum to (N + h)/2 whole periods, h = 1 the fundamental.

    Each stage lags by half a period (it inverts) and its delay h/(2 N). Returns 0 where phases are missing.
    """
    if not np.all(np.isfinite(phase)):
        return 0
    return int(2 * round(float(stage_lags(phase).sum())) - phase.size)
