"""gaitlab walk: keys of --json, exit codes, saved files, refused input."""

from __future__ import annotations

import json
from dataclasses import replace
from pathlib import Path

import pytest

from gaitlab.cli.walk_facts import walk_facts, walk_rows
from gaitlab.gait.trace_file import read_trace
from gaitlab.search.evaluate import Job, failed_walk
from gaitlab.search.settings import WalkSettings
from gaitlab.wiring.wiring import wiring_from_text
from tests.cli.commands import gaitlab

ROW5 = str(Path(__file__).resolve().parents[2] / "robots" / "tray_row5.toml")
WIRING = "a=1 b=3 c=5 d=2 e=4"
QUICK = ("walk", ROW5, "--wiring", WIRING, "--sequence", "alternate", "--period-s", "0.6", "--periods", "1")

KEYS = {
    "outcome", "travel_mm_per_period", "travel_scatter_mm", "speed_mm_s", "speed_body_lengths_s", "drift_mm_per_period",
    "turn_deg_per_period", "slip", "duty_factor", "stance", "wave", "period_s", "body_pitch_deg", "body_height_mm",
    "stability_margin_mm", "air_mg_per_m", "engine", "step_s", "wall_s",
}  # fmt: skip


def test_json_has_every_promised_key() -> None:
    done = gaitlab(*QUICK, "--json")
    facts = json.loads(done.out)
    assert done.code == 0
    assert set(facts) >= KEYS
    assert facts["outcome"] == "walked"
    assert facts["period_s"] == pytest.approx(0.6)
    assert facts["speed_mm_s"] == pytest.approx(facts["travel_mm_per_period"] / 0.6)
    assert set(facts["duty_factor"]) == set(facts["stance"]) == set("abcde")
    assert facts["travel_scatter_mm"] is None  # one period has no scatter
    assert facts["air_mg_per_m"] is None  # ideal waves take no air


def test_people_get_a_table_without_nan() -> None:
    done = gaitlab(*QUICK, "--engine", "mujoco", "--step-ms", "2")
    assert done.code == 0
    assert "travel" in done.out and "duty" in done.out
    assert "nan" not in done.out


def test_drift_turn_and_scatter_are_told_to_a_hundredth() -> None:
    """The engine's noise is not printed as if it were measured; JSON keeps what was computed."""
    job = Job("", wiring_from_text(WIRING, tuple("abcde"), 5), WalkSettings(), "")
    walk = replace(
        failed_walk(job, "walked", ""), travel_m=0.0082, travel_scatter_m=1.2e-7, drift_m=-1.23e-6, turn_rad=0.017238
    )
    rows = dict(walk_rows(walk_facts(walk)))
    assert walk_facts(walk)["drift_mm_per_period"] == pytest.approx(-0.00123)
    assert rows["drift"] == "0.00 mm per period to the left" and rows["turn"] == "0.99° per period to the left"
    assert str(rows["travel"]).endswith("± under 0.01 mm per period")


def test_save_writes_the_motion_and_does_not_overwrite_it(tmp_path: Path) -> None:
    done = gaitlab(*QUICK, "--save", str(tmp_path / "first"))
    assert done.code == 0
    trace = read_trace(tmp_path / "first" / "walk.npz")
    assert trace.inlets == tuple("abcde")
    assert trace.time_s[-1] == pytest.approx(0.6, abs=1 / 60)  # the last picture, at the 60 a second of a saved walk
    assert json.loads((tmp_path / "first" / "walk.json").read_text())["wiring"]["b"] == 3
    again = gaitlab(*QUICK, "--save", str(tmp_path / "first"))
    assert again.code == 2 and "--force" in again.err
    assert gaitlab(*QUICK, "--save", str(tmp_path / "first"), "--force").code == 0


def changed(folder: Path, old: str, new: str) -> str:
    text = Path(ROW5).read_text(encoding="utf-8")
    assert old in text
    (folder / "changed.toml").write_text(text.replace(old, new), encoding="utf-8")
    return str(folder / "changed.toml")


def test_a_walk_that_never_settles_exits_1_with_its_name_and_what_was_measured(tmp_path: Path) -> None:
    # Three periods in a row must agree and the first never counts, so three periods at the most are never enough.
    robot = changed(tmp_path, "[ring]\n", "[numerics]\nperiods_max = 3\n\n[ring]\n")
    done = gaitlab("walk", robot, "--wiring", WIRING, "--sequence", "alternate", "--period-s", "0.5", "--json")
    facts = json.loads(done.out)
    assert done.code == 1
    assert facts["outcome"] == "never_settled" and "periods_max" in facts["remedy"]
    assert len(facts["travels_mm"]) == 3


def test_a_ring_that_does_not_run_hands_on_its_outcome(tmp_path: Path) -> None:
    robot = changed(tmp_path, "threshold_kPa = ", "threshold_kPa = 58 # ")
    done = gaitlab("walk", robot, "--wiring", WIRING, "--json")
    facts = json.loads(done.out)
    assert done.code == 1
    assert facts["outcome"] in ("settles", "too_weak") and facts["remedy"]
    assert facts["travel_mm_per_period"] is None


@pytest.mark.parametrize(
    ("words", "message"),
    [
        (("--wiring", "a=1 b=3"), "missing c, d, e"),
        (("--wiring", WIRING, "--sequence", "backwards"), "sequence must be one of natural"),
        (("--wiring", WIRING, "--sequence", "0,0.6"), "a list of 5 phases"),
        (("--wiring", WIRING, "--period-s", "1"), "given with --sequence"),
        (("--wiring", WIRING, "--periods", "0"), "--periods"),
        (("--wiring", WIRING, "--step-ms", "nan"), "finite"),
        (("--wiring", WIRING, "--engine", "other"), "--engine"),
        (("--wiring", WIRING, "--sequence", "natural", "--period-s", "0.01"), "period must be at least 20 steps"),
    ],
)
def test_wrong_values_are_refused_by_name(words: tuple[str, ...], message: str) -> None:
    done = gaitlab("walk", ROW5, *words)
    assert done.code == 2
    assert message in done.err
    assert "Traceback" not in done.err


def test_people_see_what_a_walk_that_never_settled_did(tmp_path: Path) -> None:
    robot = changed(tmp_path, "[ring]\n", "[numerics]\nperiods_max = 2\n\n[ring]\n")
    done = gaitlab("walk", robot, "--wiring", WIRING, "--sequence", "alternate", "--period-s", "0.4")
    assert done.code == 1
    assert "mm per period" in done.out and "remedy: " in done.out
