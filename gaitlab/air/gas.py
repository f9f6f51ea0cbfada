"""The air in the circuit: one gas at one temperature, in surroundings of one pressure."""

from __future__ import annotations

import math
from dataclasses import dataclass

from gaitlab.errors import InputError, must
from gaitlab.robot.circuit import Ambient

AIR_R = 287.05  # J/(kg K), dry air, US Standard Atmosphere 1976 (287.053)
AIR_GAMMA = 1.4  # diatomic gas
DENSITY_ANR_KG_M3 = 1.185  # ISO 8778 reference atmosphere: 20 °C, 100 kPa, 65 % relative humidity
TEMPERATURE_ANR_K = 293.15  # ISO 8778
# Sutherland's law for air: viscosity at the reference temperature and Sutherland temperature (White, Viscous Fluid Flow, table 1-2).
SUTHERLAND_VISCOSITY_PA_S = 1.716e-5
SUTHERLAND_REFERENCE_K = 273.15
SUTHERLAND_K = 110.4


@dataclass(frozen=True)
class Gas:
    """Air at `temperature_K` [K] in surroundings of `pressure_Pa` [Pa absolute]; an ideal gas, isothermal at rest.

    >>> round(Gas(101_325.0, 293.15).density_kg_m3(101_325.0), 4)
    1.2041
    """

    pressure_Pa: float = 101_325.0
    temperature_K: float = 293.15

    def __post_init__(self) -> None:
        for name in ("pressure_Pa", "temperature_K"):
            value = getattr(self, name)
            if not (math.isfinite(value) and value > 0):
                raise InputError(
                    must(name, "finite and above 0 (absolute)", value, "add the ambient value to a gauge one")
                )

    @property
    def R(self) -> float:
        """Specific gas constant [J/(kg K)]."""
        return AIR_R

    @property
    def gamma(self) -> float:
        """Ratio of specific heats."""
        return AIR_GAMMA

    @property
    def RT(self) -> float:
        """R T [J/kg]: pressure over density."""
        return AIR_R * self.temperature_K

    def viscosity_Pa_s(self) -> float:
        """Dynamic viscosity by Sutherland's law, μ = μ0 (T/T0)^1.5 (T0 + S)/(T + S)."""
        ratio = self.temperature_K / SUTHERLAND_REFERENCE_K
        spread = (SUTHERLAND_REFERENCE_K + SUTHERLAND_K) / (self.temperature_K + SUTHERLAND_K)
        return SUTHERLAND_VISCOSITY_PA_S * ratio * math.sqrt(ratio) * spread

    def density_kg_m3(self, pressure_Pa: float) -> float:
        """Density p/(R T) at an absolute pressure."""
        return pressure_Pa / self.RT

    def mean_free_path_m(self, pressure_Pa: float) -> float:
        """Mean free path λ = μ/p √(π R T/2) (kinetic theory, Maxwell's viscosity-based form)."""
        return self.viscosity_Pa_s() / pressure_Pa * math.sqrt(math.pi * self.RT / 2.0)


def gas_of(ambient: Ambient) -> Gas:
    """The gas of a robot file's surroundings."""
    return Gas(ambient.pressure_Pa, ambient.temperature_K)


def absolute_pressure_Pa(name: str, value: float) -> float:
    """`value` if it is a usable absolute pressure; raises InputError naming it otherwise."""
    if not (math.isfinite(value) and value > 0):
        raise InputError(
            must(name, "a finite absolute pressure above 0", value, "add the ambient pressure to a gauge value")
        )
    return float(value)
