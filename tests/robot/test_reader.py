"""A robot file in, SI out: every unit, default and shorthand, checked by hand."""

from __future__ import annotations

import dataclasses
import json
import math
from pathlib import Path

import pytest

from gaitlab.errors import InputError, RobotFileError
from gaitlab.robot.checks import require_odd_ring
from gaitlab.robot.circuit import (
    BenchRestrictor,
    FixedVacuum,
    IsoPart,
    PumpTable,
    RectDuct,
    RoundDuct,
    Syringe,
    ValveGeometry,
)
from gaitlab.robot.reader import canonical_document, read_robot, robot_from_document
from gaitlab.robot.shorthand import standard_pressure_kPa
from gaitlab.robot.totals import mass_kg
from tests.robot.documents import ROBOTS, changed, row5, row5_with


@pytest.mark.parametrize("path", ROBOTS, ids=lambda p: p.stem)
def test_every_robot_that_ships_is_read(path: Path) -> None:
    file = read_robot(path)
    assert file.robot.name == path.stem
    assert len(set(file.robot.inlets())) == len(file.robot.inlets()) > 0
    require_odd_ring(file.robot)


def test_numbers_arrive_in_SI() -> None:
    robot = robot_from_document(row5())
    assert robot.ambient.temperature_K == pytest.approx(293.15)
    assert robot.supply.free_flow_m3_s == pytest.approx(0.009 / 60)
    assert robot.supply.dead_end_vacuum_Pa == pytest.approx(57_000)
    assert robot.ring.resistor.side_m == pytest.approx(0.5e-3)
    assert robot.ring.valve.travel_s == pytest.approx(8e-3)
    assert robot.bellows[0].measured_bend.free_bend_rad == pytest.approx(math.pi / 3)
    assert robot.bellows[0].rest_volume_m3 == pytest.approx(2.4e-6)
    assert robot.body.legs[0].at_m == pytest.approx((0.068, 0.0, -0.006))


def test_what_is_left_out_takes_the_documented_default() -> None:
    robot = robot_from_document(row5())
    assert robot.ground.friction_factor == 1.0
    assert robot.wiring.inlets_per_output_max == 1
    assert robot.wiring.every_output_used
    assert robot.numerics.inertia_factor == 60.0
    assert robot.tubes.inlet_loss == 0.5


def test_a_chain_of_one_bellows_is_written_short_or_in_full() -> None:
    full = row5()
    for leg in full["body"]["leg"]:
        leg["unit"] = [{"bellows": leg.pop("bellows"), "inlet": leg["name"]}]
    assert robot_from_document(full) == robot_from_document(row5())


def test_altitude_stands_for_the_pressure_of_the_standard_atmosphere() -> None:
    """ISO 2533:1975: 1000 m 89.8746 kPa, 5000 m 54.0199 kPa (table values, quoted from memory)."""
    assert standard_pressure_kPa(0.0) == pytest.approx(101.325)
    assert standard_pressure_kPa(1000.0) == pytest.approx(89.8746, abs=2e-3)
    assert standard_pressure_kPa(5000.0) == pytest.approx(54.0199, abs=5e-3)
    document = row5()
    document["ambient"] = {"altitude_m": 1000}
    assert robot_from_document(document).ambient.pressure_Pa == pytest.approx(89_874.6, abs=2)


def test_the_keys_present_choose_the_kind_of_part() -> None:
    kinds = [
        ({"width_mm": 0.4, "height_mm": 0.6, "length_mm": 10}, RectDuct),
        ({"bore_mm": 0.6, "length_mm": 10}, RoundDuct),
        ({"sonic_conductance_dm3_s_bar": 0.02, "critical_ratio": 0.3}, IsoPart),
        ({"dead_end_kPa": 57, "reading_kPa": 20, "free_flow_L_min": 9, "law": "mass"}, BenchRestrictor),
    ]
    for table, kind in kinds:
        assert isinstance(robot_from_document(row5_with(("ring", "resistor"), table)).ring.resistor, kind)
    iso = robot_from_document(row5_with(("ring", "resistor"), kinds[2][0])).ring.resistor
    assert iso.sonic_conductance_m3_s_Pa == pytest.approx(0.02e-3 / 1e5)


def test_every_kind_of_supply_and_valve_is_read() -> None:
    supplies = [
        ({"fixed_vacuum_kPa": 40}, FixedVacuum),
        ({"table_vacuum_kPa": [0, 30, 57], "table_flow_L_min": [9, 4, 0], "buffer_mL": 60}, PumpTable),
        ({"dead_mL": 5, "schedule_s": [0, 20], "schedule_mL": [0, 60]}, Syringe),
    ]
    for table, kind in supplies:
        assert isinstance(robot_from_document(row5_with(("supply",), table)).supply, kind)
    drawn = {"membrane_mm": 0.5, "span_mm": 8, "gap_mm": 1, "shore_A": 30, "open": {"bore_mm": 1.2, "length_mm": 6}}
    assert isinstance(robot_from_document(row5_with(("ring", "valve"), drawn)).ring.valve, ValveGeometry)


def test_stage_overrides_and_wiring_limits_are_read() -> None:
    document = row5_with(("ring", "stage"), [{"number": 2, "port_mL": 0.9}])
    document["wiring"] = {
        "inlets_per_output_max": 2,
        "tied": [["a", "c"]],
        "fixed": {"e": 3},
        "every_output_used": False,
    }
    robot = robot_from_document(document)
    assert robot.ring.overrides[0].port_m3 == pytest.approx(0.9e-6)
    assert robot.wiring.tied == (("a", "c"),)
    assert robot.wiring.fixed == (("e", 3),)


def test_mass_counts_blocks_bellows_feet_and_load() -> None:
    assert mass_kg(robot_from_document(row5())) == pytest.approx((62 + 5 * 5.5 + 5 * 0.5 + 8) / 1e3)


def test_the_document_is_not_changed_by_reading() -> None:
    document = row5()
    robot_from_document(document)
    assert document == row5()


def test_the_canonical_text_says_only_what_decides_a_result() -> None:
    base = canonical_document(row5())
    assert canonical_document(row5_with(("name",), "other")) == base
    assert canonical_document(row5_with(("notes",), ["x"])) == base
    assert canonical_document(row5_with(("ambient", "temperature_C"), 20.0)) == base
    assert canonical_document(row5_with(("ambient", "temperature_C"), 21)) != base
    reordered = dict(reversed(row5().items()))
    assert canonical_document(reordered) == base
    again = {**json.loads(base), "name": "x"}
    assert dataclasses.replace(robot_from_document(again), notes=()) == dataclasses.replace(
        robot_from_document(row5()), name="x", notes=()
    )


@pytest.mark.parametrize("stages", [1, 2, 4, 6])
def test_an_even_ring_is_read_but_refused_where_it_must_oscillate(stages: int) -> None:
    document = row5_with(("ring", "stages"), stages)
    document["wiring"] = {"inlets_per_output_max": 5, "every_output_used": False}
    robot = robot_from_document(document)
    with pytest.raises(InputError, match=rf"ring.stages must be an odd number of 3 or more .* got {stages}"):
        require_odd_ring(robot)


def test_legal_but_unlikely_numbers_are_named_warnings(tmp_path: Path) -> None:
    from tests.robot.documents import ROW5

    text = (
        ROW5.replace("threshold_kPa = ", "threshold_kPa = 60 # ")
        .replace("friction = 0.6", "friction = 1.2")
        .replace("bend_damping_ms = 40", "bend_damping_ms = 5")
        .replace("rest_mL = 2.4", "rest_mL = 24")
        .replace("at_mm = [68, 0, -6]", "at_mm = [168, 0, -6]")
        .replace("spacing_mm = 30 ", "spacing_mm = 0 ")
    )
    path = tmp_path / "odd.toml"
    path.write_text(text, encoding="utf-8")
    names = [warning.split(":")[0] for warning in read_robot(path).warnings]
    assert names == [
        "valve_never_opens", "low_bend_damping", "volume_too_large", "high_friction", "single_point_foot", "leg_off_block",
    ]  # fmt: skip


def test_a_tolerance_may_name_one_leg_all_legs_or_a_list() -> None:
    for key in ("ring.resistor.square_mm", "body.leg.a.at_mm", "body.leg.at_mm", "bellows.leg.mass_g"):
        document = row5_with(("tolerance",), [{"key": key, "percent": 5}])
        assert robot_from_document(document).tolerances[0].key == key
    for key in ("ring.resistor.bore_mm", "body.leg.z.at_mm", "name", "ring.valve", "supply.law", ""):
        with pytest.raises(RobotFileError, match="key must"):
            robot_from_document(changed(row5(), ("tolerance",), [{"key": key, "percent": 5}]))
