"""Parts by data-sheet numbers against ISO 6358's own formula and a catalogue example."""

from __future__ import annotations

import math

import pytest

from gaitlab.air.duct import exact_mass_flow
from gaitlab.air.gas import DENSITY_ANR_KG_M3, Gas
from gaitlab.air.iso import equivalent_area_m2, iso_law
from gaitlab.errors import InputError
from gaitlab.robot.circuit import IsoPart
from gaitlab.robot.fields import DM3_S_BAR
from tests.air.parts import GAS

CATALOGUE = IsoPart(2.0 * DM3_S_BAR, 0.3)


def iso_6358(part: IsoPart, up_Pa: float, down_Pa: float, kelvin: float) -> float:
    """ISO 6358-1: q_m = C ρ0 p1 √(T0/T1) √(1 − ((r − b)/(1 − b))²), constant for r below b."""
    ratio = max(down_Pa / up_Pa, part.critical_ratio)
    shape = 1.0 - ((ratio - part.critical_ratio) / (1.0 - part.critical_ratio)) ** 2
    return part.sonic_conductance_m3_s_Pa * 1.185 * up_Pa * math.sqrt(293.15 / kelvin * shape)


def test_catalogue_example() -> None:
    # C = 2 dm³/(s bar), b = 0.3, 500 → 400 kPa: 419.91 L/min ANR = 8.2933 g/s (a published catalogue rounds it to 420).
    flow = exact_mass_flow(CATALOGUE, 500e3, 400e3, GAS)
    assert 1e3 * flow == pytest.approx(8.2933, rel=1e-4)
    assert flow / DENSITY_ANR_KG_M3 * 60e3 == pytest.approx(419.91, rel=1e-4)


@pytest.mark.parametrize("ratio", [0.02, 0.29, 0.31, 0.6, 0.9, 0.99])
@pytest.mark.parametrize("kelvin", [263.15, 293.15, 333.15])
def test_the_standard_formula(ratio: float, kelvin: float) -> None:
    found = exact_mass_flow(CATALOGUE, 101_325.0, ratio * 101_325.0, Gas(temperature_K=kelvin))
    assert found == pytest.approx(iso_6358(CATALOGUE, 101_325.0, ratio * 101_325.0, kelvin), rel=3e-3)


def test_without_the_linear_start_it_is_the_standard_formula() -> None:
    law = iso_law(CATALOGUE, GAS, laminar_reynolds=1e-9)
    for ratio in (0.1, 0.5, 0.999):
        expected = iso_6358(CATALOGUE, 50e3, ratio * 50e3, 293.15)
        assert law.mass_flow_kg_s(50e3, ratio * 50e3) == pytest.approx(expected, rel=1e-9)


def test_small_differences_flow_in_proportion() -> None:
    law = iso_law(CATALOGUE, GAS)
    first, second = (law.mass_flow_kg_s(101_325.0, 101_325.0 - drop) for drop in (1e-6, 2e-6))
    assert second == pytest.approx(2 * first, rel=1e-3)


def test_equivalent_area_is_the_ideal_nozzle() -> None:
    # White, Fluid Mechanics: m = 0.6847 A p0/√(R T0).
    area = equivalent_area_m2(CATALOGUE)
    assert 0.6847 * area * 1e5 / math.sqrt(287.05 * 293.15) == pytest.approx(2.0e-3 * 1.185, rel=1e-4)


@pytest.mark.parametrize("ratio", [0.0, 1.0, -0.2, 1.3, math.nan])
def test_critical_ratios_outside_0_to_1_are_refused(ratio: float) -> None:
    with pytest.raises(InputError, match="critical_ratio must be between 0 and 1"):
        iso_law(IsoPart(1e-8, ratio), GAS)


@pytest.mark.parametrize("conductance", [0.0, -1e-9, math.inf])
def test_impossible_conductances_are_refused(conductance: float) -> None:
    with pytest.raises(InputError, match="sonic_conductance must be finite and above 0"):
        iso_law(IsoPart(conductance, 0.3), GAS)
