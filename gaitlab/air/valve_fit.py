"""From a measured valve to its switching numbers: flow against control vacuum, and vacuum passed to a dead end."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from scipy.optimize import least_squares

from gaitlab.air.lookup import FloatArray
from gaitlab.errors import InputError, must

LEAST_POINTS = 5
LEAK_RANGE = (1e-6, 0.4)
# First guesses of the opening pressure as shares of the control range, tried one after the other; chosen by us.
STARTS = (0.2, 0.35, 0.5, 0.65)


@dataclass(frozen=True)
class ValveFit:
    """A measured flow curve in the valve law's terms.

    `start_Pa` is the control vacuum at which the valve starts to open at the flow-side vacuum of the measurement,
    `opening_span_Pa` what it takes from there to full opening, `full_flow` the open flow in the table's unit,
    `rms` the root mean square of the misfit over the full flow.
    """

    start_Pa: float
    opening_span_Pa: float
    leak_fraction: float
    full_flow: float
    rms: float

    def flow(self, control_vac_Pa: FloatArray) -> FloatArray:
        """Flow of the fitted law at these control vacuums, in the table's unit."""
        return _flow(
            np.asarray(control_vac_Pa, dtype=float), self.start_Pa, self.opening_span_Pa, self.leak_fraction
        ) * (self.full_flow)

    def threshold_Pa(self, flow_vac_Pa: float, sealing: float) -> float:
        """Threshold with both flow sides at atmosphere, if one of them was at `flow_vac_Pa` in the measurement."""
        return self.start_Pa - sealing * flow_vac_Pa


def fit_flow_curve(control_vac_Pa: Sequence[float], flow: Sequence[float]) -> ValveFit:
    """Least-squares fit of start, span, leak and full flow to a measured table; any unit of flow.

    Raises InputError for fewer than five points, a value that is not finite, or a curve that never opens.
    """
    control, measured = np.asarray(control_vac_Pa, dtype=float), np.asarray(flow, dtype=float)
    _check(control, measured)
    reach, scale = float(control.max()), float(measured.max())

    def misfit(x: FloatArray) -> FloatArray:
        opened = _flow(control, x[0] * reach, x[1] * reach, math.exp(x[2]))
        return np.asarray(x[3] * opened - measured / scale)

    bounds = ([0.0, 1e-3, math.log(LEAK_RANGE[0]), 0.1], [1.0, 1.0, math.log(LEAK_RANGE[1]), 2.0])
    found = [least_squares(misfit, [start, 0.1, math.log(1e-3), 0.95], bounds=bounds) for start in STARTS]
    best = min(found, key=lambda fit: float(fit.cost))
    start, span, leak, full = (float(v) for v in best.x)
    rms = math.sqrt(2.0 * float(best.cost) / control.size) / full
    return ValveFit(start * reach, span * reach, math.exp(leak), full * scale, rms)


def fit_sealing(
    control_vac_Pa: Sequence[float], passed_vac_Pa: Sequence[float], supply_vac_Pa: float
) -> tuple[float, float]:
    """Closing threshold [Pa] and sealing [1] of a valve that passes vacuum to a dead end until it shuts itself.

    At rest the control vacuum equals the threshold: c = threshold + v + sealing (V − v) with v passed, V supplied
    (`valve.opening_target`): a straight line in V − v. Raises InputError for fewer than two points or unequal lengths.
    """
    control, passed = np.asarray(control_vac_Pa, dtype=float), np.asarray(passed_vac_Pa, dtype=float)
    if control.size < 2 or control.size != passed.size:
        raise InputError(must("table", "at least two pairs", (control.size, passed.size), "give both columns"))
    columns = np.stack([np.ones_like(passed), supply_vac_Pa - passed], axis=1)
    threshold, sealing = np.linalg.lstsq(columns, control - passed, rcond=None)[0]
    return float(threshold), float(sealing)


def _flow(control: FloatArray, start: float, span: float, leak: float) -> FloatArray:
    x = np.clip((control - start) / span, 0.0, 1.0)
    return np.asarray(leak + (1.0 - leak) * x * x * (3.0 - 2.0 * x))


def _check(control: FloatArray, flow: FloatArray) -> None:
    if control.size < LEAST_POINTS or control.size != flow.size:
        rule = f"at least {LEAST_POINTS} pairs of control vacuum and flow"
        raise InputError(must("table", rule, (control.size, flow.size), "measure from shut to open"))
    if not (np.isfinite(control).all() and np.isfinite(flow).all()):
        raise InputError(must("table", "finite numbers", "a value that is not", "leave empty readings out"))
    if float(flow.max()) <= 0.0 or float(control.max()) <= 0.0:
        raise InputError(
            must("table", "one with a flow above 0", float(flow.max()), "raise the control vacuum until it opens")
        )
