"""The exact steady flow through any flow part, by whichever way the part is known."""

from __future__ import annotations

from gaitlab.air.fanno import DuctState, duct_flow
from gaitlab.air.gas import Gas, absolute_pressure_Pa
from gaitlab.air.iso import iso_law
from gaitlab.air.restrictor import equivalent_square
from gaitlab.air.section import SMOOTH_WALL_M, Duct, section_of
from gaitlab.robot.circuit import BenchRestrictor, FlowPart, IsoPart


def exact_mass_flow(part: FlowPart, p_up_Pa: float, p_down_Pa: float, gas: Gas) -> float:
    """Mass flow [kg/s] from the first to the second pressure [Pa absolute]; negative when the second is higher.

    Ducts by adiabatic flow with friction (`fanno.duct_flow`), data-sheet parts by ISO 6358, bench readings by the square
    channel that would give the reading. Slow: one root search a call. Raises InputError for a pressure that is not above 0.

    >>> from gaitlab.robot.circuit import SquareDuct
    >>> round(1e6 * exact_mass_flow(SquareDuct(0.5e-3, 10e-3), 101_325.0, 44_325.0, Gas()), 1)
    41.7
    """
    first, second = absolute_pressure_Pa("p_up_Pa", p_up_Pa), absolute_pressure_Pa("p_down_Pa", p_down_Pa)
    if second > first:
        return -exact_mass_flow(part, second, first, gas)
    if isinstance(part, IsoPart):
        return iso_law(part, gas).mass_flow_kg_s(first, second)
    return duct_flow(section_of(as_duct(part, gas)), first, second, gas).mass_flow_kg_s


def duct_state(
    duct: Duct, p_up_Pa: float, p_down_Pa: float, gas: Gas, *, roughness_m: float = SMOOTH_WALL_M
) -> DuctState:
    """Flow, Reynolds and Mach numbers of a duct, from the higher to the lower pressure [Pa absolute]."""
    first, second = absolute_pressure_Pa("p_up_Pa", p_up_Pa), absolute_pressure_Pa("p_down_Pa", p_down_Pa)
    return duct_flow(section_of(duct, roughness_m=roughness_m), max(first, second), min(first, second), gas)


def as_duct(part: Duct | BenchRestrictor, gas: Gas) -> Duct:
    """The duct itself, or the square channel that stands for a bench reading."""
    return equivalent_square(part, gas) if isinstance(part, BenchRestrictor) else part
