"""gaitlab ring, inverter and supply: keys, exit codes, pictures and refusals."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from tests.cli.commands import gaitlab

TRAY = Path(__file__).resolve().parents[2] / "robots" / "tray_row5.toml"
WIRING = "a=1 b=3 c=5 d=2 e=4"
PNG = b"\x89PNG\r\n"
RING_KEYS = {
    "outcome", "period_s", "phase", "stage_lag_deg", "alternate_order", "duty", "peak_vacuum_kPa", "least_vacuum_kPa",
    "rise_s", "fall_s", "start_up_s", "supply_vacuum_kPa", "air_mg_per_period", "harmonic",
}  # fmt: skip
INVERTER_KEYS = {
    "input_kPa", "output_kPa", "low_kPa", "high_kPa", "switch_in_kPa", "gain_max", "margin_low_kPa", "margin_high_kPa",
    "gain_needed",
}  # fmt: skip
SYRINGE = "dead_mL = 20\nschedule_s = [0, 1]\nschedule_mL = [0, 300]\n"


def changed(folder: Path, **changes: str) -> str:
    """The row's file with lines replaced (`stages="stages = 4"`), or its supply by `supply`."""
    lines = TRAY.read_text().splitlines()
    if "supply" in changes:
        start = next(k for k, line in enumerate(lines) if line.startswith("[supply]"))
        lines[start + 1 : start + 5] = changes.pop("supply").splitlines()
    for key, line in changes.items():
        lines = [line if old.startswith(f"{key} =") else old for old in lines]
    path = folder / "robot.toml"
    path.write_text("\n".join([*lines, "[wiring]", "inlets_per_output_max = 2"]))
    return str(path)


def test_ring_prints_every_key_and_its_picture(tmp_path: Path) -> None:
    """One JSON object with the promised keys; lists over stages have N entries; the picture is a PNG and is not overwritten."""
    picture = tmp_path / "ring.png"
    done = gaitlab("ring", str(TRAY), "--wiring", WIRING, "--plot", str(picture), "--json")
    facts = json.loads(done.out)
    assert done.code == 0 and facts.keys() >= RING_KEYS
    assert facts["outcome"] == "oscillates" and facts["harmonic"] == 1
    assert facts["stage_lag_deg"] == pytest.approx(216.0, abs=1e-6)
    assert facts["alternate_order"] == [1, 3, 5, 2, 4]
    assert all(
        len(facts[key]) == 5 for key in ("phase", "duty", "peak_vacuum_kPa", "least_vacuum_kPa", "rise_s", "fall_s")
    )
    assert facts["supply_vacuum_kPa"]["min"] <= facts["supply_vacuum_kPa"]["mean"]
    assert facts["margins"]["gain"] > facts["margins"]["gain_needed"] == pytest.approx(1.236068, abs=1e-6)
    assert facts["margins"]["high_margin_kPa"] > 5.0 and facts["margins"]["low_margin_kPa"] > 5.0
    assert picture.read_bytes().startswith(PNG)
    assert gaitlab("ring", str(TRAY), "--plot", str(picture)).code == 2


def test_ring_for_people() -> None:
    """Without --json: words and a table, units said."""
    done = gaitlab("ring", str(TRAY))
    assert done.code == 0
    assert "oscillates" in done.out and "peak kPa" in done.out and "1 3 5 2 4" in done.out


def test_an_even_ring_exits_1_with_its_name(tmp_path: Path) -> None:
    """A failed run is a value: outcome, remedy, nothing where nothing repeats."""
    done = gaitlab("ring", changed(tmp_path, stages="stages = 4"), "--json")
    facts = json.loads(done.out)
    assert done.code == 1
    assert facts["outcome"] == "latches" and facts["remedy"]
    assert facts["period_s"] is None and len(facts["peak_vacuum_kPa"]) == 4


@pytest.mark.parametrize(
    ("sequence", "phases"),
    [
        ("natural", [0.0, 0.6, 0.2, 0.8, 0.4]),
        ("alternate", [0.0, 0.6, 0.2, 0.8, 0.4]),
        ("reverse-alternate", [0.0, 0.4, 0.8, 0.2, 0.6]),
        ("0,0.1,0.2,0.3,0.4", [0.0, 0.1, 0.2, 0.3, 0.4]),
    ],
)
def test_ideal_sequences(sequence: str, phases: list[float]) -> None:
    """Their phases by arithmetic, and an outcome that does not claim a ring."""
    facts = json.loads(gaitlab("ring", str(TRAY), "--sequence", sequence, "--period-s", "2", "--json").out)
    assert facts["phase"] == pytest.approx(phases, abs=1e-9)
    assert facts["outcome"] == "ideal" and facts["period_s"] == 2.0


@pytest.mark.parametrize(
    "arguments",
    [
        ("ring", "--wiring", "a=1 b=9 c=5 d=2 e=4"),
        ("ring", "--wiring", "a=1"),
        ("ring", "--sequence", "sideways"),
        ("ring", "--sequence", "0,0.5"),
        ("ring", "--sequence", "natural", "--starts"),
        ("ring", "--period-s", "1"),
        ("ring", "--sequence", "natural", "--vacuum-kPa", "0"),
        ("inverter", "--stage", "6"),
        ("inverter", "--supply-kPa", "nan"),
        ("supply", "--wiring", "f=1"),
    ],
)
def test_bad_input_exits_2(arguments: tuple[str, ...]) -> None:
    """Refused with a message on stderr, no traceback, nothing on stdout."""
    done = gaitlab(arguments[0], str(TRAY), *arguments[1:], "--json")
    assert done.code == 2 and not done.out
    assert "Traceback" not in done.err and done.err


def test_inverter_keys_and_levels(tmp_path: Path) -> None:
    """Levels straddle the switch, margins add up, gain is compared with sec(π/5)."""
    picture = tmp_path / "inverter.png"
    facts = json.loads(gaitlab("inverter", str(TRAY), "--stage", "2", "--plot", str(picture), "--json").out)
    assert facts.keys() >= INVERTER_KEYS
    assert facts["low_kPa"] < facts["switch_in_kPa"] < facts["high_kPa"]
    assert facts["margin_high_kPa"] == pytest.approx(facts["high_kPa"] - facts["switch_in_kPa"])
    assert facts["gain_needed"] == pytest.approx(1.236068, abs=1e-6) and facts["gain_max"] > facts["gain_needed"]
    assert len(facts["input_kPa"]) == len(facts["output_kPa"])
    assert picture.read_bytes().startswith(PNG)


def test_supply_of_a_pump(tmp_path: Path) -> None:
    """Working point, the least pump below the file's, and the picture."""
    picture = tmp_path / "pump.png"
    facts = json.loads(gaitlab("supply", str(TRAY), "--plot", str(picture), "--json").out)
    assert facts["pump_ok"] is True
    assert 0.0 < facts["smallest_free_flow_L_min"] < 9.0
    assert 0.0 < facts["mean_flow_L_min_ANR"] < 9.0 and 20.0 < facts["working_vacuum_kPa"] < 60.0
    assert picture.read_bytes().startswith(PNG)


def test_supply_of_a_syringe(tmp_path: Path) -> None:
    """Periods in the pull and where it dies; without a wiring nothing walks."""
    robot, picture = changed(tmp_path, supply=SYRINGE), tmp_path / "stroke.png"
    facts = json.loads(gaitlab("supply", robot, "--plot", str(picture), "--json").out)
    assert facts["periods_per_stroke"] >= 3 and facts["dies_at_vacuum_kPa"] < 40.0
    assert facts["travel_mm_per_stroke"] is None and facts["smallest_free_flow_L_min"] is None
    assert picture.read_bytes().startswith(PNG)


def test_a_dead_supply_exits_1(tmp_path: Path) -> None:
    """A dead end below what lifts a valve: the ring's own outcome."""
    robot = changed(tmp_path, dead_end_vacuum_kPa="dead_end_vacuum_kPa = 18")
    done = gaitlab("ring", robot, "--json")
    assert done.code == 1 and json.loads(done.out)["outcome"] == "too_weak"


def test_a_starved_ring_is_told_its_smallest_pump(tmp_path: Path) -> None:
    """The remedy points to the smallest free flow: both it and the vacuum left are printed, in words as in JSON."""
    robot = changed(tmp_path, free_flow_L_min="free_flow_L_min = 0.6")
    done = gaitlab("supply", robot)
    facts = json.loads(gaitlab("supply", robot, "--json").out)
    assert done.code == 1 and facts["outcome"] == "starves" and facts["pump_ok"] is False
    assert f"{facts['smallest_free_flow_L_min']:.3g} L/min free flow" in done.out
    assert f"{facts['working_vacuum_kPa']:.4g} kPa mean" in done.out and "dead end       60 kPa" in done.out
    assert (
        done.out.index("smallest pump")
        < done.out.index("vacuum vessels can implode")
        < done.out.index("outcome: starves")
    )


@pytest.mark.parametrize("command", ["ring", "supply"])
def test_a_ring_below_its_margin_is_said_to_be(command: str, tmp_path: Path) -> None:
    """It oscillates, yet the pump is not enough: named in words and in JSON, and not where the margin is wide."""
    robot = changed(tmp_path, free_flow_L_min="free_flow_L_min = 1.8")
    facts = json.loads(gaitlab(command, robot, "--json").out)
    assert facts["outcome"] == "oscillates" and "below the margin" in facts["notes"][0]
    assert facts.get("pump_ok", False) is False
    assert "below the margin" in gaitlab(command, robot).out
    assert json.loads(gaitlab(command, str(TRAY), "--json").out)["notes"] == []
