"""`check` says what a robot will be, `new` writes a file that passes it."""

from __future__ import annotations

import json
import math
import re
from pathlib import Path

import pytest

from gaitlab.robot.reader import read_robot
from tests.cli.commands import gaitlab
from tests.robot.documents import ROBOTS, ROOT, ROW5


def test_five_legs_on_five_stages_have_24_distinct_wirings() -> None:
    """5!/5: a row of equal stages makes a turned ring the same wiring (closed form)."""
    facts = json.loads(gaitlab("check", str(ROOT / "robots" / "tray_row5.toml"), "--json").out)
    assert facts["wirings"] == {"raw": math.factorial(5), "distinct": math.factorial(4)}
    assert facts["inlets"] == ["a", "b", "c", "d", "e"]
    assert facts["mass_g"] == pytest.approx(100.0)
    assert facts["ok"] is True and facts["warnings"] == [] and facts["blocks"] == ["trunk"]


def test_an_even_ring_ends_with_one_message(tmp_path: Path) -> None:
    path = tmp_path / "even.toml"
    path.write_text(ROW5.replace("stages = 5", "stages = 4") + "\n[wiring]\ninlets_per_output_max = 2\n")
    shown = gaitlab("check", str(path), "--json")
    assert (shown.code, shown.out) == (2, "")
    assert "ring.stages must be an odd number of 3 or more" in shown.err


def test_warnings_go_to_stderr_and_into_the_json(tmp_path: Path) -> None:
    path = tmp_path / "odd.toml"
    path.write_text(ROW5.replace("friction = 0.6", "friction = 1.6"), encoding="utf-8")
    assert "warning: high_friction" in gaitlab("check", str(path)).err
    assert json.loads(gaitlab("check", str(path), "--json").out)["warnings"][0].startswith("high_friction")


@pytest.mark.parametrize("legs", [3, 5, 7, 15])
def test_the_starter_file_passes_check(tmp_path: Path, legs: int) -> None:
    path = tmp_path / "mine.toml"
    assert gaitlab("new", str(path), "--legs", str(legs)).code == 0
    facts = json.loads(gaitlab("check", str(path), "--json").out)
    assert facts["ok"] and facts["stages"] == legs and facts["warnings"] == [] and facts["name"] == "mine"
    assert facts["wirings"]["distinct"] == math.factorial(legs - 1)


@pytest.mark.parametrize("legs", [3, 7])
def test_the_ring_of_the_starter_file_runs(tmp_path: Path, legs: int) -> None:
    path = tmp_path / "mine.toml"
    gaitlab("new", str(path), "--legs", str(legs))
    facts = json.loads(gaitlab("ring", str(path), "--json").out)
    assert facts["outcome"] == "oscillates"
    assert facts["supply_vacuum_kPa"]["min"] > 40
    # A ring of N equal inverters: half a period and 1/(2N) from stage to stage (closed form).
    assert facts["stage_lag_deg"] == pytest.approx(180 + 180 / legs, abs=1.0)


def test_the_starter_file_explains_every_section_it_holds(tmp_path: Path) -> None:
    path = tmp_path / "mine.toml"
    gaitlab("new", str(path))
    text = path.read_text(encoding="utf-8")
    assert text.count("#") > 25
    assert "implode" in text and "estimates" in text


def test_lines_that_are_commented_out_work_when_they_are_put_in(tmp_path: Path) -> None:
    path = tmp_path / "mine.toml"
    gaitlab("new", str(path))
    # A commented line of TOML: a header or a key = value after "# ".
    active = re.sub(r"(?m)^# (\[\[?[a-z.]+\]\]?|\w+ = .*)$", r"\1", path.read_text(encoding="utf-8"))
    active = active.replace("inlets_per_output_max = 1", "inlets_per_output_max = 3").replace(
        "every_output_used = true", "every_output_used = false"
    )
    path.write_text(active, encoding="utf-8")
    robot = read_robot(path).robot
    assert robot.tolerances and robot.ring.overrides and robot.wiring.tied and robot.wiring.fixed
    assert gaitlab("check", str(path)).code == 0


def test_an_existing_file_is_kept_unless_forced(tmp_path: Path) -> None:
    path = tmp_path / "mine.toml"
    path.write_text("mine", encoding="utf-8")
    refused = gaitlab("new", str(path))
    assert refused.code == 2 and "add --force" in refused.err
    assert path.read_text(encoding="utf-8") == "mine"
    assert gaitlab("new", str(path), "--force").code == 0
    assert read_robot(path).robot.name == "mine"


@pytest.mark.parametrize("legs", ["4", "1", "17", "five", "nan", "-3"])
def test_legs_that_make_no_ring_are_refused(tmp_path: Path, legs: str) -> None:
    path = tmp_path / "mine.toml"
    assert gaitlab("new", str(path), "--legs", legs).code == 2
    assert not list(tmp_path.iterdir())


def test_any_file_name_gives_a_legal_robot_name(tmp_path: Path) -> None:
    for stem in ("my robot", "..x", "größe", "-x", "a" * 120):
        path = tmp_path / f"{stem}.toml"
        assert gaitlab("new", str(path)).code == 0
        assert gaitlab("check", str(path)).code == 0


def test_json_of_new_names_the_file(tmp_path: Path) -> None:
    path = tmp_path / "mine.toml"
    assert json.loads(gaitlab("new", str(path), "--json").out) == {"path": str(path), "name": "mine", "legs": 5}


def test_robots_of_the_readme_exist() -> None:
    assert {"tray_row5", "hex6_ring3"} <= {path.stem for path in ROBOTS}


def test_check_passes_on_what_the_file_says_of_itself() -> None:
    path = ROOT / "robots" / "quad_spine.toml"
    notes = read_robot(path).robot.notes
    assert any("engines" in note for note in notes)
    assert json.loads(gaitlab("check", str(path), "--json").out)["notes"] == list(notes)
    assert all(note in gaitlab("check", str(path)).out for note in notes)
