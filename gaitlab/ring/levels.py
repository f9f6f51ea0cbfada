"""Switch levels in motion: the output vacuum at which the next valve takes hold, and at which it lets go."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from gaitlab.ring.waves import FloatArray, RingRun
from gaitlab.robot.circuit import Valve


def hold_levels(valves: Sequence[Valve], run: RingRun) -> FloatArray:
    """Vacuum [Pa] (N,) on each output at which the next valve stands half open while that one's own output is at its peak."""
    half, sealing = _numbers(valves)[:2]
    return np.roll(half + sealing * run.peak_vacuum_Pa, -1)


def release_levels(valves: Sequence[Valve], run: RingRun) -> FloatArray:
    """Vacuum [Pa] (N,) on each output at which the next valve, open until then, stands half shut, its own output at its least."""
    half, sealing, hysteresis = _numbers(valves)
    return np.roll(half - hysteresis + sealing * run.least_vacuum_Pa, -1)


def margins(valves: Sequence[Valve], run: RingRun) -> tuple[tuple[str, float], ...]:
    """How far the levels in motion are from failing [Pa], worst stage.

    `high_margin_Pa` is how far an output's peak passes the hold level, `low_margin_Pa` how far its least falls below the
    release level. A ring near its onset still runs on negative ones, with a small swing.
    """
    high, low = run.peak_vacuum_Pa - hold_levels(valves, run), release_levels(valves, run) - run.least_vacuum_Pa
    return ("high_margin_Pa", float(high.min())), ("low_margin_Pa", float(low.min()))


def _numbers(valves: Sequence[Valve]) -> tuple[FloatArray, FloatArray, FloatArray]:
    half = np.array([valve.threshold_Pa + 0.5 * valve.opening_span_Pa for valve in valves])
    sealing = np.array([valve.sealing for valve in valves])
    return half, sealing, np.array([valve.hysteresis_Pa for valve in valves])
