"""What a membrane valve's drawing says about its switching: an estimate until a bench curve replaces it."""

from __future__ import annotations

from gaitlab.air.elastomer import lift_pressure_Pa
from gaitlab.air.gas import Gas
from gaitlab.air.iso import equivalent_area_m2
from gaitlab.air.restrictor import equivalent_square
from gaitlab.air.section import section_of
from gaitlab.errors import InputError, must
from gaitlab.robot.circuit import BenchRestrictor, FlowPart, IsoPart, Valve, ValveGeometry
from gaitlab.robot.fields import MILLI
from gaitlab.robot.rubber import youngs_from_shore_Pa

STANDARD_Pa = 101_325.0
# Mean gas pressure left between membrane and seat, as a share of atmosphere: 0 for a perfectly wetting contact that the
# surrounding air must be pulled off, 1 for a seat so rough that air fills it. Chosen by us, half way.
SEAT_FILM_SHARE = 0.5
# A bulged membrane stands on average at about half its centre deflection over the seat line (paraboloid: exactly ½).
MEAN_LIFT = 0.5
ESTIMATE_WARNING = (
    "estimate: threshold, span and sealing come from the drawing and may be off by half; measure one valve"
)


def valve_from_geometry(valve: ValveGeometry) -> Valve:
    """Switching numbers from the drawing.

    The control vacuum c must pull the membrane off its seat, on whose area share φ only part of the atmosphere acts from
    above, against the mean vacuum on the flow sides acting on the rest: c ≥ (1 − film) φ p + (1 − φ)(v_a + v_b)/2. So
    threshold = (1 − film) φ p, and with one flow side at atmosphere sealing = (1 − φ)/2. From there the membrane bulges
    (clamped sheet, `elastomer.lift_pressure_Pa`) until the curtain under it, mean lift times span, is as
    large as the open channel, or until it touches the bottom of the gap: that pressure is the opening span.
    Raises InputError unless exactly one of Young's modulus and Shore hardness is given.
    """
    span = lift_pressure_Pa(
        full_lift_m(valve),
        radius_m=valve.span_m / 2.0,
        thickness_m=valve.membrane_m,
        youngs_Pa=membrane_youngs_Pa(valve),
    )
    return Valve(
        threshold_Pa=(1.0 - SEAT_FILM_SHARE) * valve.seat_fraction * STANDARD_Pa,
        opening_span_Pa=span,
        sealing=(1.0 - valve.seat_fraction) / 2.0,
        open=valve.open,
        leak_fraction=valve.leak_fraction,
        hysteresis_Pa=valve.hysteresis_Pa,
        travel_s=valve.travel_s,
    )


def membrane_youngs_Pa(valve: ValveGeometry) -> float:
    """Young's modulus of the membrane, from the file or by Gent's relation."""
    if (valve.youngs_Pa is None) == (valve.shore_A is None):
        got = (valve.youngs_Pa, valve.shore_A)
        raise InputError(must("valve", "given by exactly one of youngs_MPa and shore_A", got, "leave one of them out"))
    return valve.youngs_Pa if valve.youngs_Pa is not None else youngs_from_shore_Pa(float(valve.shore_A or 0.0))


def full_lift_m(valve: ValveGeometry) -> float:
    """Centre deflection at which the valve is fully open: curtain as large as the channel, or the gap used up."""
    return min(valve.gap_m, curtain_lift_m(valve))


def curtain_lift_m(valve: ValveGeometry) -> float:
    """Centre deflection at which the curtain under the membrane is as large as the open channel."""
    return open_area_m2(valve.open) / (MEAN_LIFT * valve.span_m)


def open_area_m2(part: FlowPart) -> float:
    """Cross section of a flow part, or of the hole that stands for it."""
    if isinstance(part, IsoPart):
        return equivalent_area_m2(part)
    if isinstance(part, BenchRestrictor):
        return equivalent_square(part, Gas()).side_m ** 2
    return section_of(part).area_m2


def valve_warnings(valve: ValveGeometry) -> tuple[str, ...]:
    """What is doubtful in the drawing of a valve: `shallow_gap` and `estimate`, each text beginning with its name."""
    wanted = curtain_lift_m(valve)
    if valve.gap_m >= wanted:
        return (ESTIMATE_WARNING,)
    shallow = (
        f"shallow_gap: {valve.gap_m / MILLI:.3g} mm lets the membrane lift too little for the open channel "
        f"({wanted / MILLI:.3g} mm would do); the real valve passes less than `open` says"
    )
    return (ESTIMATE_WARNING, shallow)
