"""Which recorded instants moving pictures show: the last whole periods of a trace, beginning at phase 0, at an even beat."""

from __future__ import annotations

import numpy as np

from gaitlab.errors import InputError, must
from gaitlab.gait.records import Trace


def even_moments(trace: Trace, *, periods: int, per_period: int) -> tuple[int, ...]:
    """Indices of the recorded instants nearest to `per_period` even steps through the last `periods` whole periods.

    A shorter trace gives the whole periods it has. Raises InputError when it holds less than one, or for counts below
    one period and two pictures.
    """
    if periods < 1 or per_period < 2:
        raise InputError(must("periods and pictures per period", "at least 1 and 2", (periods, per_period)))
    step = float(np.median(np.diff(trace.time_s))) if len(trace.time_s) > 1 else 0.0
    first = int(np.ceil(trace.time_s[0] / trace.period_s - 1e-6))
    last = int(np.floor((trace.time_s[-1] + step) / trace.period_s + 1e-6))
    whole = min(periods, last - first)
    if whole < 1:
        held = f"{(trace.time_s[-1] - trace.time_s[0]) / trace.period_s:.2f} periods"
        raise InputError(must("trace", "at least one whole period long", held, "record more periods"))
    wanted = trace.period_s * (last - whole + np.arange(whole * per_period) / per_period)
    return tuple(int(np.argmin(np.abs(trace.time_s - moment))) for moment in wanted)
