"""gaitlab divider on the command line, in all four ways."""

from __future__ import annotations

import json
from typing import Any

import pytest

from tests.cli.commands import gaitlab

ENDS = ("--dead-end-kPa", "57", "--reading-kPa", "41")
PUMP = ("divider", *ENDS, "--free-flow-L-min", "7", "--curve", "mass")
METER = ("divider", "--reading-kPa", "41", "--meter-L-min", "2")
KNOWN = ("divider", *ENDS, "--curve", "mass", "--known-square-mm", "0.6", "--known-reading-kPa", "33.5")
RISE = ("divider", *ENDS, "--volume-mL", "100", "--rise-s", "0.466", "--time-error-s", "0.01")
KEYS = {
    "mass_flow_mg_s",
    "flow_fraction",
    "laminar_kg_s_Pa2",
    "sonic_conductance_dm3_s_bar",
    "equivalent_square_mm",
    "relative_uncertainty",
}


def facts(*arguments: str) -> dict[str, Any]:
    """What --json prints."""
    done = gaitlab(*arguments, "--json")
    assert done.code == 0, done.err
    return dict(json.loads(done.out))


@pytest.mark.parametrize("way", [PUMP, METER, KNOWN, RISE])
def test_every_way_prints_the_same_keys(way: tuple[str, ...]) -> None:
    found = facts(*way)
    assert set(found) >= KEYS
    low, high = found["equivalent_square_range_mm"]
    assert low < found["equivalent_square_mm"] < high
    squares = sum(share**2 for share in found["uncertainty_by_input"].values())
    assert found["relative_uncertainty"] == pytest.approx(squares**0.5)
    assert found["equivalent_square_mm"] == pytest.approx(0.5, abs=0.02)


def test_pump_curve_linear_in_mass_or_volume() -> None:
    # Closed forms: 0.2807 and 0.167 of the free flow.
    assert facts(*PUMP)["flow_fraction"] == pytest.approx(0.2807, abs=1e-4)
    assert facts(*PUMP[:-1], "volume")["flow_fraction"] == pytest.approx(0.1671, abs=1e-4)


def test_what_enters_the_uncertainty() -> None:
    assert set(facts(*PUMP)["uncertainty_by_input"]) == {"dead_end_gauge", "reading_gauge", "free_flow"}
    assert set(facts(*METER)["uncertainty_by_input"]) == {"meter"}
    assert "known_size" in facts(*KNOWN)["uncertainty_by_input"]
    assert {"volume", "clock", "heat_exchange"} < set(facts(*RISE)["uncertainty_by_input"])


def test_a_perfect_pump_leaves_the_gauge_noise() -> None:
    # 1 kPa of gauge noise on both readings is 7.7 % of flow (closed form).
    assert facts(*PUMP, "--flow-error-percent", "0")["relative_uncertainty"] == pytest.approx(0.077, abs=5e-4)


def test_a_known_tube_and_thinner_air_are_understood() -> None:
    tube = ("--known-bore-mm", "1", "--known-length-mm", "200", "--known-reading-kPa", "33.5")
    assert facts("divider", *ENDS, "--curve", "mass", *tube)["mass_flow_mg_s"] > 0
    assert facts(*PUMP, "--ambient-kPa", "90")["mass_flow_mg_s"] == pytest.approx(
        facts(*PUMP)["mass_flow_mg_s"] * 90 / 101.325
    )


def test_people_read_the_caution() -> None:
    done = gaitlab(*PUMP)
    assert "implode" in done.out
    assert "estimates" in done.out
    assert "not known this way" in gaitlab(*METER).out


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        (("divider", "--reading-kPa", "41"), "give exactly one of --free-flow-L-min, --meter-L-min"),
        ((*PUMP, "--rise-s", "1"), "give exactly one of"),
        ((*PUMP, "--volume-mL", "10"), "makes no use of --volume-mL"),
        ((*METER, "--gauge-error-kPa", "1"), "makes no use of --gauge-error-kPa"),
        (("divider", "--reading-kPa", "41", "--rise-s", "1"), "needs --dead-end-kPa and --volume-mL too"),
        ((*KNOWN, "--known-bore-mm", "1"), "exactly one of --known-square-mm and --known-bore-mm"),
        (("divider", "--dead-end-kPa", "57", "--reading-kPa", "61", *PUMP[5:]), "below the dead-end vacuum of 57 kPa"),
        ((*PUMP, "--ambient-kPa", "50"), "below the ambient 50 kPa"),
        ((*PUMP, "--reading-kPa", "nan"), "must be a finite number"),
    ],
)
def test_bad_input_ends_with_exit_code_2(arguments: tuple[str, ...], message: str) -> None:
    done = gaitlab(*arguments)
    assert done.code == 2
    assert message in done.err
