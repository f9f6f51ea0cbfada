"""Footfalls: duty factor and stance of each foot, and the phase of its swing, from the samples of whole periods."""

from __future__ import annotations

import numpy as np

from gaitlab.gait.motion import BoolArray, FloatArray

Stance = tuple[tuple[float, float], ...]

# Gaps and touches shorter than this fraction of a period are contact chatter, not steps (chosen by us).
CHATTER = 0.02


def duty_factors(loaded: BoolArray) -> FloatArray:
    """Fraction of the time that each foot carries weight, (F,) from (T, F) over whole periods (last instant not repeated)."""
    return np.asarray(np.mean(loaded[:-1], axis=0), dtype=np.float64)


def folded(loaded: BoolArray, samples_per_period: int) -> FloatArray:
    """Share of the periods in which a foot carries weight, by phase: (samples_per_period, F)."""
    shares: FloatArray = loaded[:-1].reshape(-1, samples_per_period, loaded.shape[1]).mean(axis=0)
    return shares


def stance_intervals(share: FloatArray, *, start_phase: float = 0.0) -> Stance:
    """Stances of one foot as (start, end) phases in [0, 1), in order; end below start means across the period's end.

    `share` (S,) is the folded load of one foot; it stands where half the periods agree. A foot that always stands gives
    ((0, 1),), one that never does (). `start_phase` is the wave's phase at the first sample.

    >>> import numpy as np
    >>> stance_intervals(np.repeat([1.0, 0.0], 50))
    ((0.0, 0.5),)
    """
    count = len(share)
    stands = _without_chatter(share >= 0.5, max(1, round(CHATTER * count)))
    if stands.all():
        return ((0.0, 1.0),)
    before = np.roll(stands, 1)
    starts = np.flatnonzero(stands & ~before)
    ends = np.flatnonzero(~stands & before)
    phases = [(float(s / count), float(ends[np.searchsorted(ends, s) % len(ends)] / count)) for s in starts]
    return tuple(sorted(((s + start_phase) % 1.0, (e + start_phase) % 1.0) for s, e in phases))


def _without_chatter(stands: BoolArray, shortest: int) -> BoolArray:
    for value in (False, True):  # first close short gaps, then drop short touches
        stands = _without_short_runs(stands, value, shortest)
    return stands


def _without_short_runs(flags: BoolArray, value: bool, shortest: int) -> BoolArray:
    if flags.all() or not flags.any():
        return flags
    turn = int(np.flatnonzero(flags != np.roll(flags, 1))[0])  # start at an edge, so that no run wraps
    rolled = np.roll(flags, -turn)
    edges = np.flatnonzero(np.diff(rolled)) + 1
    for run in np.split(np.arange(len(rolled)), edges):
        if rolled[run[0]] == value and len(run) <= shortest:
            rolled[run] = not value
    return np.roll(rolled, turn)


def swing_phases(loaded: BoolArray, velocity_m_s: FloatArray, samples_per_period: int) -> tuple[FloatArray, FloatArray]:
    """Phase of the middle of each foot's swing, and how plainly it is marked (0…1); both (F,).

    The phase is that of the first harmonic of the swing weight w: z = Σ w e^(2πi φ) / Σ|w|: phase arg z / 2π, mark |z|. For a foot that
    lifts, w is "carries no weight". A foot that never lifts (a skid, a dragged leg) swings when it is carried forward
    against the mean of all its motion, so there w is the body-frame velocity along its larger axis. `velocity_m_s` is
    (T, F, 2). A foot that neither lifts nor moves has mark 0.
    """
    turns = np.exp(2j * np.pi * np.arange(len(loaded) - 1) / samples_per_period)
    lifts = 1.0 - loaded[:-1].astype(np.float64)
    moves = _larger_axis(velocity_m_s[:-1])
    lifting = (lifts.mean(axis=0) > CHATTER) & (lifts.mean(axis=0) < 1.0 - CHATTER)
    weight = np.where(lifting, lifts, moves)
    z = (weight * turns[:, None]).sum(axis=0)
    total = np.abs(weight).sum(axis=0)
    marks = np.abs(z) / np.where(total > 0.0, total, 1.0)
    return (np.angle(z) / (2.0 * np.pi)) % 1.0, np.asarray(marks, dtype=np.float64)


def _larger_axis(velocity_m_s: FloatArray) -> FloatArray:
    """Velocity less its mean along x or y, whichever swings more over all feet together, (T, F)."""
    about = velocity_m_s - velocity_m_s.mean(axis=0)
    axis = int(np.argmax(np.sum(about**2, axis=(0, 1))))
    return np.asarray(about[..., axis], dtype=np.float64)
