"""What the page's pictures are drawn from: the recorded motion, footfalls and waves of both walks as small plain data.

Lengths are whole hundredths of a millimetre and quaternions whole 1/5000, which no screen can tell from the record.
"""

from __future__ import annotations

import math
from typing import Any

import numpy as np
from numpy.typing import NDArray

from gaitlab.errors import InputError
from gaitlab.gait.records import Trace, Walk
from gaitlab.report.moments import even_moments
from gaitlab.report.phases import unrolled
from gaitlab.report.run_folder import SavedRun
from gaitlab.report.signal import signal_path
from gaitlab.report.style import VACUUM_STOPS
from gaitlab.ring.waves import RingRun
from gaitlab.wiring.wiring import Wiring

PERIODS = 3
PICTURES_PER_PERIOD = 30
LENGTH_UNIT_M = 1e-5
TURN_UNIT = 1 / 5000
WAVE_POINTS = 90
KPA = 1e3


def page_data(run: SavedRun) -> dict[str, Any]:
    """Both walks, where they were saved, and the scales they share."""
    best = run.best
    walks = [_walk_data("Best wiring", best.wiring, best.walk, run.ring, run.trace)]
    if best.reversed_wiring and best.reversed_walk and run.reversed_ring:
        words = "Same wiring, wave reversed"
        walks.append(_walk_data(words, best.reversed_wiring, best.reversed_walk, run.reversed_ring, run.reversed_trace))
    full = max(float(ring.output_vacuum_Pa.max()) for ring in (run.ring, run.reversed_ring) if ring is not None)
    return {
        "lengthUnit_mm": LENGTH_UNIT_M * 1e3,
        "turnUnit": TURN_UNIT,
        "fullVacuum_kPa": _rounded(max(full, 1.0) / KPA),
        "vacuumStops": list(VACUUM_STOPS),
        "walks": walks,
    }


def _walk_data(title: str, wiring: Wiring, walk: Walk, ring: RingRun, trace: Trace | None) -> dict[str, Any]:
    return {
        "title": title,
        "wiring": wiring.text(),
        "period_s": _rounded(ring.period_s, 5),
        "travel_mm": _rounded(walk.travel_m * 1e3, 3),
        "footfalls": [
            {
                "foot": foot,
                "duty": _rounded(dict(walk.duty_factor).get(foot, math.nan), 3),
                "stance": unrolled(bars, 1.0),
            }
            for foot, bars in walk.stance
        ],
        "ring": _ring_data(ring, wiring),
        "motion": None if trace is None else _motion(trace),
    }


def _ring_data(ring: RingRun, wiring: Wiring) -> dict[str, Any]:
    path = signal_path(ring)
    edges = None
    if path is not None:
        edges = {"phase": _list(path.phase, 4), "stage": path.stage.tolist(), "evacuates": path.evacuates.tolist()}
    return {
        "vacuum_kPa": [_list(_thinned(row) / KPA, 2) for row in ring.output_vacuum_Pa],
        "inlets": [list(wiring.inlets_on(stage + 1)) for stage in range(len(ring.phase))],
        "edges": edges,
    }


def _thinned(row: NDArray[np.float64]) -> NDArray[np.float64]:
    """One period at `WAVE_POINTS` even phases."""
    grid = np.arange(WAVE_POINTS) / WAVE_POINTS * len(row)
    return np.asarray(np.interp(grid, np.arange(len(row) + 1), np.append(row, row[0])))


def _motion(trace: Trace) -> dict[str, Any] | None:
    """Parts and their poses over the shown periods; None for a trace too short to show."""
    try:
        frames = list(even_moments(trace, periods=PERIODS, per_period=PICTURES_PER_PERIOD))
    except InputError:
        return None
    return {
        "picturesPerPeriod": PICTURES_PER_PERIOD,
        "firstPeriod": round(float(trace.time_s[frames[0]]) / trace.period_s),
        "parts": [
            {
                "kind": part.kind,
                "size": _list(np.array(part.size_m) * 1e3, 3),
                "inlet": trace.inlets.index(part.inlet) if part.inlet in trace.inlets else None,
            }
            for part in trace.parts
        ],
        "feet": list(trace.feet),
        "position": _whole(trace.position_m[frames], LENGTH_UNIT_M),
        "turn": _whole(_steady(trace.quaternion[frames]), TURN_UNIT),
        "foot": _whole(trace.foot_m[frames], LENGTH_UNIT_M),
        "loaded": trace.loaded[frames].astype(int).ravel().tolist(),
        "vacuum_kPa": _list(trace.vacuum_Pa[frames].ravel() / KPA, 2),
    }


def _steady(quaternion: NDArray[np.float64]) -> NDArray[np.float64]:
    """Signs chosen so that neighbours in time lie close: q and −q are the same turn, but between them lies none."""
    steady = quaternion.copy()
    for k in range(1, len(steady)):
        flip = np.sum(steady[k] * steady[k - 1], axis=-1, keepdims=True) < 0.0
        steady[k] = np.where(flip, -steady[k], steady[k])
    return steady


def _whole(values: NDArray[np.float64], unit: float) -> list[int]:
    return np.rint(values / unit).astype(int).ravel().tolist()


def _list(values: NDArray[np.float64], digits: int) -> list[float]:
    return [float(value) for value in np.round(np.asarray(values, dtype=float), digits)]


def _rounded(value: float, digits: int = 2) -> float | None:
    return round(value, digits) if math.isfinite(value) else None
