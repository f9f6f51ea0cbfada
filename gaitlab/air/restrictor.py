"""From a bench reading to a channel: a pump of known curve draws through the restrictor, the gauge says how hard."""

from __future__ import annotations

import math
from functools import lru_cache

from scipy.optimize import brentq

from gaitlab.air.fanno import duct_flow
from gaitlab.air.gas import Gas
from gaitlab.air.section import section_of
from gaitlab.air.supply import pump_mass_flow
from gaitlab.errors import InputError, must
from gaitlab.robot.circuit import BenchRestrictor, SquareDuct
from gaitlab.robot.fields import KILO

EQUIVALENT_LENGTH_M = 0.010  # printed test channels are commonly 10 mm long (common practice, no source)
SIDE_RANGE_M = (2e-6, 20e-3)  # chosen by us: far beyond what is printed or cast on either side


def bench_mass_flow(reading: BenchRestrictor, gas: Gas) -> float:
    """Mass flow [kg/s] that the pump drew through the restrictor at the gauge's reading."""
    check_reading(reading.dead_end_Pa, reading.reading_Pa, gas)
    return pump_mass_flow(reading.reading_Pa, reading.dead_end_Pa, reading.free_flow_m3_s, reading.law, gas)[0]


def check_vacuum(name: str, value_Pa: float, gas: Gas) -> None:
    """Raise InputError, in kPa as the user wrote it, unless `value_Pa` is a gauge vacuum below the ambient pressure."""
    if not (math.isfinite(value_Pa) and 0 < value_Pa < gas.pressure_Pa):
        rule = f"a gauge vacuum above 0 and below the ambient {gas.pressure_Pa / KILO:g} kPa"
        raise InputError(must(f"{name}_kPa", rule, value_Pa / KILO, "give the vacuum as a positive number"))


def check_reading(dead_end_Pa: float, reading_Pa: float, gas: Gas) -> None:
    """Raise InputError unless 0 < reading < dead end < ambient pressure (gauge vacuums)."""
    check_vacuum("dead_end", dead_end_Pa, gas)
    check_vacuum("reading", reading_Pa, gas)
    if reading_Pa >= dead_end_Pa:
        rule = f"below the dead-end vacuum of {dead_end_Pa / KILO:g} kPa"
        fix = "read the dead end with the leg plugged, then open the leg"
        raise InputError(must("reading_kPa", rule, reading_Pa / KILO, fix))


@lru_cache(maxsize=256)
def square_for_flow(mass_flow_kg_s: float, p_up_Pa: float, p_down_Pa: float, gas: Gas) -> SquareDuct:
    """The square channel of 10 mm length that passes `mass_flow_kg_s` between two absolute pressures.

    Raises InputError if no side between 2 µm and 20 mm does.
    """

    def excess(log_side: float) -> float:
        duct = SquareDuct(math.exp(log_side), EQUIVALENT_LENGTH_M)
        return math.log(duct_flow(section_of(duct), p_up_Pa, p_down_Pa, gas).mass_flow_kg_s / mass_flow_kg_s)

    low, high = (math.log(side) for side in SIDE_RANGE_M)
    if not mass_flow_kg_s > 0 or excess(low) > 0 or excess(high) < 0:
        rule = "one that a 10 mm long square channel of 2 µm to 20 mm can pass"
        raise InputError(must("mass flow [kg/s]", rule, mass_flow_kg_s, "check the unit of the flow and the reading"))
    return SquareDuct(math.exp(brentq(excess, low, high, xtol=1e-12)), EQUIVALENT_LENGTH_M)


def equivalent_square(reading: BenchRestrictor, gas: Gas) -> SquareDuct:
    """The 10 mm long square channel that would have given the bench reading."""
    return square_for_flow(bench_mass_flow(reading, gas), gas.pressure_Pa, gas.pressure_Pa - reading.reading_Pa, gas)
