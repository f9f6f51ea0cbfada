"""Where the switching edge is on its way round the ring: stage by stage, an evacuation and a venting edge in turn."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from gaitlab.ring.waves import RingRun

FloatArray = NDArray[np.float64]


@dataclass(frozen=True)
class SignalPath:
    """Edge k happens at `phase[k]` (rising, unrolled) at `stage[k]` (from 0) and evacuates where `evacuates[k]`.

    After the last edge it starts again `phase[-1] − phase[0]` later; first and last are the same edge.
    """

    phase: FloatArray
    stage: NDArray[np.int_]
    evacuates: NDArray[np.bool_]

    def at(self, phase: float) -> tuple[float, bool]:
        """Position on the ring in stages (1.5 is halfway from stage 2 to 3, counted from 0) and whether an evacuation edge ran last."""
        span = self.phase[-1] - self.phase[0]
        here = self.phase[0] + (phase - self.phase[0]) % span
        k = int(np.searchsorted(self.phase, here, side="right")) - 1
        k = min(max(k, 0), len(self.phase) - 2)
        share = (here - self.phase[k]) / (self.phase[k + 1] - self.phase[k])
        return float(self.stage[k] + share), bool(self.evacuates[k])


def signal_path(ring: RingRun) -> SignalPath | None:
    """The edges of a ring that oscillates, in the order in which they follow each other; None for one that rests.

    Stage i answers an evacuation edge of stage i − 1 by venting and the other way round; each edge is taken as the first
    of its kind after the one before, at the half-swing crossings that `phase` and `duty` tell.
    """
    stages = len(ring.phase)
    if not np.isfinite(ring.period_s) or stages < 3 or not np.all(np.isfinite(ring.phase)):
        return None
    times, places, kinds = [float(ring.phase[0])], [0], [True]
    for k in range(1, 2 * stages + 1):
        stage, evacuates = k % stages, k % 2 == 0
        edge = float(ring.phase[stage]) + (0.0 if evacuates else float(ring.duty[stage]))
        times.append(times[-1] + ((edge - times[-1]) % 1.0 or 1.0))
        places.append(stage)
        kinds.append(evacuates)
    return SignalPath(np.array(times), np.array(places), np.array(kinds))
