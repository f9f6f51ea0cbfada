"""Air's properties against reference libraries."""

from __future__ import annotations

import math

import pytest
from CoolProp.CoolProp import PropsSI
from fluids.atmosphere import ATMOSPHERE_1976

from gaitlab.air.gas import Gas, absolute_pressure_Pa, gas_of
from gaitlab.errors import InputError
from gaitlab.robot.circuit import Ambient
from tests.air.parts import GAS


@pytest.mark.parametrize("celsius", [-20.0, 0.0, 20.0, 60.0])
def test_viscosity_against_fluids_standard_atmosphere(celsius: float) -> None:
    kelvin = celsius + 273.15
    assert Gas(temperature_K=kelvin).viscosity_Pa_s() == pytest.approx(ATMOSPHERE_1976.viscosity(kelvin), rel=1e-3)


def test_viscosity_at_20_degrees_against_coolprop_and_the_tabled_value() -> None:
    assert GAS.viscosity_Pa_s() == pytest.approx(1.8133e-5, rel=1e-4)  # Sutherland's law, printed digits
    assert GAS.viscosity_Pa_s() == pytest.approx(PropsSI("V", "T", 293.15, "P", 101_325.0, "Air"), rel=6e-3)


@pytest.mark.parametrize("pressure_Pa", [10e3, 44e3, 101_325.0, 200e3])
def test_density_and_gamma_against_coolprop(pressure_Pa: float) -> None:
    assert GAS.density_kg_m3(pressure_Pa) == pytest.approx(
        PropsSI("D", "T", 293.15, "P", pressure_Pa, "Air"), rel=1.5e-3
    )
    heats = [PropsSI(key, "T", 293.15, "P", pressure_Pa, "Air") for key in ("C", "O")]
    assert GAS.gamma == pytest.approx(heats[0] / heats[1], rel=4e-3)


def test_mean_free_path_of_air_at_20_degrees() -> None:
    # 66.5 nm at 101.325 kPa (Jennings, J. Aerosol Sci. 19(2) 159, 1988: 65.43 nm at 20 °C; the factors differ by 2 %).
    assert GAS.mean_free_path_m(101_325.0) == pytest.approx(66e-9, rel=0.03)


def test_gas_of_the_surroundings() -> None:
    assert gas_of(Ambient(89_875.0, 283.15)) == Gas(89_875.0, 283.15)


@pytest.mark.parametrize("value", [0.0, -1.0, math.nan, math.inf])
def test_pressures_below_zero_are_refused_by_name(value: float) -> None:
    with pytest.raises(InputError, match="pressure_Pa must be finite and above 0"):
        Gas(value, 293.15)
    with pytest.raises(InputError, match="p_up_Pa must be a finite absolute pressure above 0"):
        absolute_pressure_Pa("p_up_Pa", value)
    with pytest.raises(InputError, match="temperature_K must be finite and above 0"):
        Gas(101_325.0, value)
