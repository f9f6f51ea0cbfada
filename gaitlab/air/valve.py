"""The membrane valve: normally closed, opened by control vacuum against the vacuum on its two flow sides."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, fields
from functools import cached_property
from typing import NamedTuple

import numpy as np

from gaitlab.air.lookup import FloatArray
from gaitlab.air.valve_geometry import valve_from_geometry
from gaitlab.robot.circuit import Valve, ValveGeometry

# Rounds off the switch between "side a is the deeper one" and "side b is"; chosen by us, far below any threshold.
SIDE_BLEND_PA = 200.0


class _PerSpan(NamedTuple):
    """Threshold (1), and the weights [1/Pa] of control, half the flow sides' sum, their distance, and of the opening (1)."""

    threshold: FloatArray
    control: FloatArray
    half: FloatArray
    lift: FloatArray
    hysteresis: FloatArray


class OpeningSlopes(NamedTuple):
    """Derivatives of the opening target by control vacuum, both flow-side vacuums [1/Pa] and the present opening [1]."""

    by_control: FloatArray
    by_a: FloatArray
    by_b: FloatArray
    by_opening: FloatArray


@dataclass(frozen=True)
class ValveBank:
    """The switching numbers of n valves as arrays of shape (n,) [Pa, fractions, s]."""

    threshold_Pa: FloatArray
    opening_span_Pa: FloatArray
    sealing: FloatArray
    leak_fraction: FloatArray
    hysteresis_Pa: FloatArray
    travel_s: FloatArray

    @classmethod
    def of(cls, valves: Sequence[Valve | ValveGeometry]) -> ValveBank:
        """The numbers of these valves, those known by their geometry estimated first."""
        known = [valve_numbers(valve) for valve in valves]
        return cls(*(np.array([getattr(valve, field.name) for valve in known]) for field in fields(cls)))

    @cached_property
    def per_span(self) -> _PerSpan:
        """The numbers in opening spans, worked out once: the law is asked thousands of times."""
        lift = self.sealing - 0.5
        factors = (np.ones_like(lift), 0.5 * np.ones_like(lift), lift, self.hysteresis_Pa)
        whole, half, lifted, held = (factor / self.opening_span_Pa for factor in factors)
        return _PerSpan((self.threshold_Pa - lift * SIDE_BLEND_PA) * whole, whole, half, lifted, held)


def valve_numbers(valve: Valve | ValveGeometry) -> Valve:
    """The valve by its switching numbers; one known by its drawing is estimated (`valve_geometry`)."""
    return valve_from_geometry(valve) if isinstance(valve, ValveGeometry) else valve


def opening_target(
    control_vac: FloatArray, flow_vac_a: FloatArray, flow_vac_b: FloatArray, opening: FloatArray, bank: ValveBank
) -> tuple[FloatArray, OpeningSlopes]:
    """Opening in [0, 1] that each membrane tends to from its present `opening`, and its derivatives; all shapes (n,).

    threshold = threshold_Pa + low + sealing (high − low) − hysteresis · opening, with low and high the smaller and larger
    gauge vacuum of the two flow sides: raising all three pressures together changes nothing, and with one side at
    atmosphere the threshold rises by `sealing` per Pa on the other. With x = (control − threshold)/span held to [0, 1]
    the target is x² (3 − 2x). The membrane follows it with the time constant `travel_s`; `conductance_share` adds the leak.
    """
    per = bank.per_span
    difference = flow_vac_a - flow_vac_b
    apart = np.hypot(difference, SIDE_BLEND_PA)
    x = control_vac * per.control - per.threshold - (flow_vac_a + flow_vac_b) * per.half - apart * per.lift
    x += opening * per.hysteresis
    np.maximum(x, 0.0, out=x)
    np.minimum(x, 1.0, out=x)
    square = x * x
    sloped = 6.0 * (x - square)  # d target/dx
    common, tilted = sloped * per.half, sloped * per.lift * difference / apart
    slopes = OpeningSlopes(sloped * per.control, -common - tilted, tilted - common, sloped * per.hysteresis)
    return square * (3.0 - 2.0 * x), slopes


def conductance_share(opening: FloatArray, bank: ValveBank) -> FloatArray:
    """Share of the open conductance at an opening in [0, 1]: leak + (1 − leak) · opening; never zero."""
    return bank.leak_fraction + (1.0 - bank.leak_fraction) * opening


def threshold_Pa(valve: Valve, flow_vac_a: float, flow_vac_b: float) -> float:
    """Control vacuum at which the shut valve starts to open, sharp where `opening_target` rounds within 200 Pa."""
    low, high = min(flow_vac_a, flow_vac_b), max(flow_vac_a, flow_vac_b)
    return valve.threshold_Pa + low + valve.sealing * (high - low)
