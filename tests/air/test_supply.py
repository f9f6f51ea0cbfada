"""Pumps, tables, house vacuum and syringes: published ratios, derivatives and refused curves."""

from __future__ import annotations

import math

import numpy as np
import pytest

from gaitlab.air.gas import Gas
from gaitlab.air.supply import FixedLaw, PumpLaw, PumpTableLaw, SyringeLaw, pump_mass_flow, supply_law
from gaitlab.errors import InputError
from gaitlab.robot.circuit import FixedVacuum, Pump, PumpTable, Syringe
from tests.air.parts import GAS, ATMOSPHERE_Pa

L_MIN = 1e-3 / 60.0
TABLE = PumpTable((0.0, 20e3, 40e3, 57e3), (7 * L_MIN, 5 * L_MIN, 2 * L_MIN, 0.0), 60e-6)


@pytest.mark.parametrize(("law", "share"), [("mass", 0.2807), ("volume", 0.167)])
def test_the_two_curve_laws_are_far_apart_in_mid_curve(law: str, share: float) -> None:
    # Dead end 57 kPa, reading 41 kPa: 0.2807 or 0.167 of the free flow (closed forms), 40 % apart.
    flow, _ = pump_mass_flow(41e3, 57e3, 7 * L_MIN, law, GAS)
    assert flow / (GAS.density_kg_m3(ATMOSPHERE_Pa) * 7 * L_MIN) == pytest.approx(share, abs=2e-4)


def test_a_clearance_volume_pump_is_linear_in_mass() -> None:
    # Independent route: a piston of swept volume S and clearance C. Gas left in the clearance re-expands from ambient to
    # the inlet pressure at constant temperature; what is drawn in per stroke is p (S + C)/(RT) − p_atm C/(RT).
    swept, clearance, rate = 10e-6, 7.78e-6, 12.0
    pressures = np.array([ATMOSPHERE_Pa, 80e3, 60e3, 50e3])
    drawn = rate * (pressures * (swept + clearance) - ATMOSPHERE_Pa * clearance) / GAS.RT
    dead_end = ATMOSPHERE_Pa * swept / (swept + clearance)
    found = [pump_mass_flow(ATMOSPHERE_Pa - p, dead_end, rate * swept, "mass", GAS)[0] for p in pressures]
    assert found == pytest.approx(drawn, rel=1e-12)


@pytest.mark.parametrize("law", ["mass", "volume"])
@pytest.mark.parametrize("pressure_Pa", [45e3, 60e3, 90e3, 101_325.0])
def test_pump_slope_against_central_differences(law: str, pressure_Pa: float) -> None:
    pump = supply_law(Pump(57e3, 9 * L_MIN, law, 60e-6), GAS)
    assert isinstance(pump, PumpLaw)
    near = (pump.mass_flow(pressure_Pa + 1)[0] - pump.mass_flow(pressure_Pa - 1)[0]) / 2
    assert pump.mass_flow(pressure_Pa)[1] == pytest.approx(near, rel=1e-6)


def test_pumps_do_not_blow_back() -> None:
    pump = supply_law(Pump(57e3, 9 * L_MIN, "mass", 60e-6), GAS)
    assert isinstance(pump, PumpLaw)
    assert pump.mass_flow(pump.rest_Pa) == (0.0, 0.0)
    assert pump.mass_flow(pump.rest_Pa - 5e3) == (0.0, 0.0)
    assert pump.volume_m3 == 60e-6


def test_a_pump_table_goes_through_its_points_without_overshoot() -> None:
    law = supply_law(TABLE, GAS)
    assert isinstance(law, PumpTableLaw)
    for vacuum, flow in zip(TABLE.table_vacuum_Pa, TABLE.table_flow_m3_s, strict=True):
        assert law.mass_flow(ATMOSPHERE_Pa - vacuum)[0] == pytest.approx(1.185 * flow, abs=1e-12)
    flows = [law.mass_flow(float(p))[0] for p in np.linspace(ATMOSPHERE_Pa - 57e3, ATMOSPHERE_Pa, 400)]
    assert np.all(np.diff(flows) > 0)
    assert law.rest_Pa == pytest.approx(ATMOSPHERE_Pa - 57e3)


@pytest.mark.parametrize("vacuum_Pa", [10e3, 33e3, 50e3])
def test_pump_table_slope_against_central_differences(vacuum_Pa: float) -> None:
    law = supply_law(TABLE, GAS)
    assert isinstance(law, PumpTableLaw)
    at = ATMOSPHERE_Pa - vacuum_Pa
    near = (law.mass_flow(at + 1)[0] - law.mass_flow(at - 1)[0]) / 2
    assert law.mass_flow(at)[1] == pytest.approx(near, rel=1e-5)


def test_pump_tables_end_flat() -> None:
    law = supply_law(TABLE, GAS)
    assert isinstance(law, PumpTableLaw)
    assert law.mass_flow(ATMOSPHERE_Pa + 5e3) == (pytest.approx(1.185 * 7 * L_MIN), 0.0)
    assert law.mass_flow(ATMOSPHERE_Pa - 60e3) == (0.0, 0.0)


def test_fixed_vacuum_rests_at_its_pressure() -> None:
    law = supply_law(FixedVacuum(60e3), GAS)
    assert isinstance(law, FixedLaw)
    assert law.rest_Pa == pytest.approx(ATMOSPHERE_Pa - 60e3)


def test_syringe_follows_its_schedule_and_boyle() -> None:
    # 10 mL dead volume and a 10 mL stroke, sealed: half of atmosphere, 50.66 kPa (Boyle).
    law = supply_law(Syringe(10e-6, (0.0, 1.0, 2.0), (0.0, 10e-6, 10e-6)), GAS)
    assert isinstance(law, SyringeLaw)
    assert [law.volume(t) for t in (-1.0, 0.0, 0.25, 1.0, 3.0)] == [
        pytest.approx(pair) for pair in [(10e-6, 0.0), (10e-6, 10e-6), (12.5e-6, 10e-6), (20e-6, 0.0), (20e-6, 0.0)]
    ]
    assert law.rest_Pa * law.volume(0.0)[0] / law.volume(2.0)[0] == pytest.approx(50.66e3, rel=1e-4)


def test_dead_ends_beyond_the_surroundings_are_refused() -> None:
    high = Gas(54e3, 273.15)  # about 5000 m up
    with pytest.raises(InputError, match="dead_end_vacuum_Pa must be above 0 and below the ambient pressure of 54 kPa"):
        supply_law(Pump(57e3, 9 * L_MIN, "mass", 60e-6), high)
    with pytest.raises(InputError, match="fixed_vacuum_Pa must be above 0"):
        supply_law(FixedVacuum(57e3), high)


@pytest.mark.parametrize(
    ("vacuums", "flows", "message"),
    [
        ((0.0, 20e3, 10e3), (3.0, 2.0, 0.0), "table_vacuum must be at least two values, each above the one before"),
        ((0.0, 20e3), (3.0, 2.0, 0.0), "table_flow must be as long as table_vacuum"),
        ((0.0, 20e3, 57e3), (3.0, 3.5, 0.0), "table_flow must be falling all the way"),
        ((0.0, 20e3, 57e3), (3.0, 2.5, 0.1), "table_flow must be falling all the way and ending at 0"),
        ((0.0, 20e3, 57e3), (math.nan, 2.5, 0.0), "table_flow must be falling all the way"),
    ],
)
def test_impossible_pump_tables_are_refused(vacuums: tuple[float, ...], flows: tuple[float, ...], message: str) -> None:
    with pytest.raises(InputError, match=message):
        supply_law(PumpTable(vacuums, flows, 60e-6), GAS)


def test_syringe_schedules_must_rise_in_time() -> None:
    with pytest.raises(InputError, match="schedule_s must be at least two values"):
        supply_law(Syringe(10e-6, (0.0, 0.0), (0.0, 1e-6)), GAS)
