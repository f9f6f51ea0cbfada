"""Parts known by data-sheet numbers: sonic conductance and critical pressure ratio (ISO 6358-1)."""

from __future__ import annotations

import math
from dataclasses import dataclass

from gaitlab.air.gas import DENSITY_ANR_KG_M3, TEMPERATURE_ANR_K, Gas
from gaitlab.errors import InputError, must
from gaitlab.robot.circuit import IsoPart

# Reynolds number on the equivalent hole's diameter at which linear and square loss are equal. Real orifices leave the
# square law between about 10 and 100; without a linear part the flow's slope at zero would be infinite. Chosen by us.
LAMINAR_REYNOLDS = 10.0
# m √(R T0)/(A p0) of an ideal sonic nozzle, γ = 1.4 (White, Fluid Mechanics, eq. 9.46: 0.6847).
NOZZLE_FLOW_FACTOR = math.sqrt(1.4) * 1.2**-3


@dataclass(frozen=True)
class IsoLaw:
    """De = a m + c m² with De = p_u² (1 − b) (1 − ((r − b)/(1 − b))²): ISO 6358's ellipse with a linear start.

    `linear_Pa2_s_kg` is a, `square_Pa2_s2_kg2` is c; a = 0 would be the standard's law with exponent one half.
    """

    critical_ratio: float
    linear_Pa2_s_kg: float
    square_Pa2_s2_kg2: float

    def ellipse_Pa2(self, p_up_Pa: float, p_down_Pa: float) -> float:
        """De for p_up ≥ p_down; it stays constant once p_down is below b p_up."""
        b = self.critical_ratio
        lower = max(p_down_Pa, b * p_up_Pa)
        return (p_up_Pa - lower) * (p_up_Pa + lower - 2.0 * b * p_up_Pa) / (1.0 - b)

    def mass_flow_kg_s(self, p_up_Pa: float, p_down_Pa: float) -> float:
        """Mass flow for p_up ≥ p_down by the root that does not cancel at small De."""
        ellipse = self.ellipse_Pa2(p_up_Pa, p_down_Pa)
        a, c = self.linear_Pa2_s_kg, self.square_Pa2_s2_kg2
        return 2.0 * ellipse / (a + math.sqrt(a * a + 4.0 * c * ellipse))


def iso_law(part: IsoPart, gas: Gas, *, laminar_reynolds: float = LAMINAR_REYNOLDS) -> IsoLaw:
    """The law of a part by its C [m³/(s Pa) ANR] and b at the gas's temperature.

    Choked flow at ambient upstream pressure is exactly C ρ0 p √(T0/T). `laminar_reynolds` is where linear and square loss
    are equal; towards 0 the standard's own law. Raises InputError for b outside 0…1 or C ≤ 0.
    """
    _check(part)
    per_pressure = part.sonic_conductance_m3_s_Pa * DENSITY_ANR_KG_M3 * math.sqrt(TEMPERATURE_ANR_K / gas.temperature_K)
    small = laminar_reynolds * gas.viscosity_Pa_s() * math.pi * equivalent_hole_m(part) / 4.0
    # a m + c m² must give De = (1 − b) p² at m = per_pressure · p for p = ambient, and a = c · small.
    choked = per_pressure * gas.pressure_Pa
    square = (1.0 - part.critical_ratio) * gas.pressure_Pa**2 / (choked * (choked + small))
    return IsoLaw(part.critical_ratio, square * small, square)


def equivalent_hole_m(part: IsoPart) -> float:
    """Diameter of the ideal sonic nozzle with the same sonic conductance."""
    return math.sqrt(4.0 * equivalent_area_m2(part) / math.pi)


def equivalent_area_m2(part: IsoPart) -> float:
    """Area of the ideal sonic nozzle with the same sonic conductance: C ρ0 √(R T0)/0.6847."""
    flow = part.sonic_conductance_m3_s_Pa * DENSITY_ANR_KG_M3
    return flow * math.sqrt(Gas(temperature_K=TEMPERATURE_ANR_K).RT) / NOZZLE_FLOW_FACTOR


def _check(part: IsoPart) -> None:
    if not (math.isfinite(part.sonic_conductance_m3_s_Pa) and part.sonic_conductance_m3_s_Pa > 0):
        raise InputError(
            must(
                "sonic_conductance",
                "finite and above 0 dm³/(s bar)",
                part.sonic_conductance_m3_s_Pa,
                "read the data sheet",
            )
        )
    if not 0.0 < part.critical_ratio < 1.0:
        raise InputError(
            must("critical_ratio", "between 0 and 1 (both excluded)", part.critical_ratio, "0.2 to 0.5 for most parts")
        )
