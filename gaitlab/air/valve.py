"""The membrane valve: normally closed, opened by control vacuum against the vacuum on its two flow sides."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, fields

import numpy as np

from gaitlab.air.lookup import FloatArray
from gaitlab.air.valve_geometry import valve_from_geometry
from gaitlab.robot.circuit import Valve, ValveGeometry

# Rounds off the switch between "side a is the deeper one" and "side b is"; chosen by us, far below any threshold.
SIDE_BLEND_PA = 200.0


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


@dataclass(frozen=True)
class OpeningSlopes:
    """Derivatives of the opening target by control vacuum, both flow-side vacuums [1/Pa] and the present opening [1]."""

    by_control: FloatArray
    by_a: FloatArray
    by_b: FloatArray
    by_opening: FloatArray


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
    difference = flow_vac_a - flow_vac_b
    apart = np.sqrt(difference * difference + SIDE_BLEND_PA**2)
    lift = bank.sealing - 0.5
    threshold = bank.threshold_Pa + 0.5 * (flow_vac_a + flow_vac_b) + lift * (apart - SIDE_BLEND_PA)
    raised = control_vac - threshold + bank.hysteresis_Pa * opening
    x = np.minimum(np.maximum(raised / bank.opening_span_Pa, 0.0), 1.0)
    by_control = 6.0 * x * (1.0 - x) / bank.opening_span_Pa
    tilt = lift * difference / apart
    slopes = OpeningSlopes(
        by_control, -by_control * (0.5 + tilt), -by_control * (0.5 - tilt), by_control * bank.hysteresis_Pa
    )
    return x * x * (3.0 - 2.0 * x), slopes


def conductance_share(opening: FloatArray, bank: ValveBank) -> FloatArray:
    """Share of the open conductance at an opening in [0, 1]: leak + (1 − leak) · opening; never zero."""
    return bank.leak_fraction + (1.0 - bank.leak_fraction) * opening


def threshold_Pa(valve: Valve, flow_vac_a: float, flow_vac_b: float) -> float:
    """Control vacuum at which the shut valve starts to open, sharp where `opening_target` rounds within 200 Pa."""
    low, high = min(flow_vac_a, flow_vac_b), max(flow_vac_a, flow_vac_b)
    return valve.threshold_Pa + low + valve.sealing * (high - low)
