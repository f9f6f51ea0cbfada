"""Intervals on the circle of phase, cut to the stretch a chart shows."""

from __future__ import annotations

from collections.abc import Sequence

Interval = tuple[float, float]


def unrolled(intervals: Sequence[Interval], periods: float) -> list[Interval]:
    """The intervals [start, end] of phase, repeated every period and cut to [0, `periods`], in order.

    An end before its start (or above 1) means that the interval runs on into the next period.

    >>> unrolled([(0.75, 0.25)], 2.0)
    [(0.0, 0.25), (0.75, 1.25), (1.75, 2.0)]
    """
    pieces = []
    for start, end in intervals:
        length = end - start if end >= start else end - start + 1.0
        first = start % 1.0 - 1.0
        for turn in range(int(periods) + 2):
            low, high = max(first + turn, 0.0), min(first + turn + min(length, 1.0), periods)
            if high > low:
                pieces.append((low, high))
    return sorted(pieces)


def holds(intervals: Sequence[Interval], phase: float) -> bool:
    """Whether `phase` (taken modulo one) lies in one of the intervals."""
    return any(low <= phase % 1.0 < high for low, high in unrolled(intervals, 1.0))
