"""gaitlab spread, compare and match: keys of --json, words for people, exit codes; walks by formula, once for real."""

from __future__ import annotations

import dataclasses
import json
from pathlib import Path
from typing import Any

import pytest

from gaitlab.cli import compare_command, match_command, spread_command
from gaitlab.search.evaluate import Evaluation, Job, failed_walk
from gaitlab.search.workers import InProcess
from tests.cli.commands import Finished, gaitlab
from tests.trust.bench import logged_csv
from tests.trust.test_match import TRUTH, WIRING, built_robot, formula_ring, read_robot
from tests.trust.test_spread import walked

ROW5 = str(Path(__file__).parents[2] / "robots" / "tray_row5.toml")
FORWARD, BACKWARD = "a=1 b=3 c=5 d=2 e=4", "a=1 b=4 c=2 d=5 e=3"


def by_formula(job: Job) -> Evaluation:
    """Travel by floor friction; the backward wave makes a tenth of it."""
    document = json.loads(job.document_json)
    grip = document.get("ground", {}).get("friction_factor", 1.0)
    backward = job.wiring.text() == BACKWARD
    walk = walked(job, 0.008 * grip * (0.1 if backward else 1.0))
    return Evaluation(dataclasses.replace(walk, duty_factor=(("a", 0.6),), stance=(("a", ((0.0, 0.6),)),)), 0.25)


def everybody_falls(job: Job) -> Evaluation:
    return Evaluation(failed_walk(job, "fell_over", "widen the stance"), 0.0)


@pytest.fixture
def run(monkeypatch: pytest.MonkeyPatch) -> Any:
    def running(*words: str, evaluating: Any = by_formula) -> Finished:
        for module in (spread_command, compare_command):
            monkeypatch.setattr(module, "local_workers", lambda evaluate, number: InProcess(evaluating))
        return gaitlab(*words)

    return running


def test_spread_as_json(run: Any) -> None:
    shown = run("spread", ROW5, "--wiring", FORWARD, "--wiring", BACKWARD, "--json")
    facts = json.loads(shown.out)
    assert shown.code == 0 and facts["draws"] == 64
    first, second = facts["wirings"]
    assert first["wiring"] == {"a": 1, "b": 3, "c": 5, "d": 2, "e": 4}
    travel = first["travel"]
    assert travel["p50"] == pytest.approx(8.0, rel=0.03)
    assert travel["p05"] < travel["p50"] < travel["p95"]
    assert {"p05", "p50", "p95"} <= first["speed"].keys()
    assert (first["chance_best"], second["chance_best"], first["chance_forward"]) == (1.0, 0.0, 1.0)
    assert facts["sensitivities"][0]["name"] == "ground.friction_factor"
    assert facts["sensitivities"][0]["share"] == pytest.approx(1.0, abs=0.02)
    assert all(t["source"] for t in facts["tolerances"])


def test_spread_for_people_prints_what_was_assumed(run: Any) -> None:
    shown = run("spread", ROW5, "--wiring", FORWARD, "--draws", "32")
    assert shown.code == 0
    for words in (
        "tolerance on", "common practice, no source", "32 draws, seed 1", "Measure first at the bench: ground.friction_factor",
        "body lengths/s", "All figures are estimates",
    ):  # fmt: skip
        assert words in shown.out


def test_spread_repeats_its_bytes(run: Any) -> None:
    once, twice = (run("spread", ROW5, "--wiring", FORWARD, "--draws", "16", "--seed", "7", "--json") for _ in range(2))
    assert once.out == twice.out


def test_spread_draws_its_pictures(run: Any, tmp_path: Path) -> None:
    plot = str(tmp_path / "spread.png")
    words = ("spread", ROW5, "--wiring", FORWARD, "--draws", "16", "--plot", plot)
    assert run(*words).code == 0
    assert sorted(p.name for p in tmp_path.iterdir()) == ["spread.png", "spread_sensitivities.png"]
    again = run(*words)
    assert again.code == 2 and "--force" in again.err
    assert run(*words, "--force").code == 0


def test_a_picture_that_cannot_be_is_refused_before_the_walks(run: Any, tmp_path: Path) -> None:
    def never(job: Job) -> Evaluation:
        raise AssertionError("walked")

    for name, says in (("spread.txt", "ends in .png"), ("absent/spread.png", "in a folder that exists")):
        shown = run("spread", ROW5, "--wiring", FORWARD, "--plot", str(tmp_path / name), evaluating=never)
        assert shown.code == 2 and says in shown.err


def test_spread_of_falls_is_a_failed_run(run: Any) -> None:
    shown = run("spread", ROW5, "--wiring", FORWARD, "--draws", "4", "--json", evaluating=everybody_falls)
    facts = json.loads(shown.out)
    assert (shown.code, facts["outcome"]) == (1, "nothing_walked")
    assert facts["wirings"][0]["outcomes"] == {"fell_over": 4}
    told = run("spread", ROW5, "--wiring", FORWARD, "--draws", "4", evaluating=everybody_falls)
    assert told.code == 1 and f"{FORWARD}: 4 × fell_over" in told.out and "nothing_walked" in told.out


def test_spread_says_how_many_draws_lost_their_worker(run: Any) -> None:
    def losing(job: Job) -> Evaluation:
        lost = job.key.startswith("3 ")
        return Evaluation(failed_walk(job, "worker_lost", ""), 0.0) if lost else by_formula(job)

    words = ("spread", ROW5, "--wiring", FORWARD, "--draws", "8")
    facts = json.loads(run(*words, "--json", evaluating=losing).out)
    assert (facts["draws"], facts["lost_draws"], facts["wirings"][0]["chance_walks"]) == (7, 1, 1.0)
    assert "7 draws, seed 1 (1 more lost their worker and are left out)" in run(*words, evaluating=losing).out


def test_spread_of_few_draws_and_of_one_wiring_claims_less(run: Any) -> None:
    """Rough quantiles are said to be; a wiring alone is best of nothing, two are compared."""
    one = run("spread", ROW5, "--wiring", FORWARD, "--draws", "16").out
    two = run("spread", ROW5, "--wiring", FORWARD, "--wiring", BACKWARD, "--draws", "32").out
    assert "fewer than 32 draws are rough" in one and "rough" not in two
    row = next(line for line in one.splitlines() if line.startswith(FORWARD) and "100" in line)
    assert row.split()[-4:] == ["100", "–", "0", "100"]
    row = next(line for line in two.splitlines() if line.startswith(FORWARD) and "100" in line)
    assert row.split()[-4:] == ["100", "100", "0", "100"]


def test_spread_warns_of_an_unlikely_speed(run: Any) -> None:
    def flying(job: Job) -> Evaluation:
        return Evaluation(walked(job, 0.05), 0.0)

    shown = run("spread", ROW5, "--wiring", FORWARD, "--draws", "4", evaluating=flying)
    assert "more than published walkers reach" in shown.err


@pytest.mark.parametrize(
    ("words", "says"),
    [
        (["--wiring", FORWARD, "--wiring", FORWARD], "wiring must be given once"),
        (["--wiring", "a=1 b=3"], "complete (missing"),
        (["--wiring", FORWARD, "--draws", "0"], "--draws"),
        (["--wiring", FORWARD, "--seed", "seven"], "--seed"),
        ([], "--wiring"),
    ],
)
def test_spread_refuses(run: Any, words: list[str], says: str) -> None:
    shown = run("spread", ROW5, *words)
    assert shown.code == 2 and says in shown.err and shown.out == ""


def test_a_tolerance_below_zero_names_draw_and_key(run: Any, tmp_path: Path) -> None:
    text = Path(ROW5).read_text(encoding="utf-8")
    wide = '\n[[tolerance]]\nkey = "ring.resistor.square_mm"\nplus_minus = 0.9\neach = "stage"\n'
    (tmp_path / "wide.toml").write_text(text + wide, encoding="utf-8")
    shown = run("spread", str(tmp_path / "wide.toml"), "--wiring", FORWARD)
    assert shown.code == 2
    assert "draw " in shown.err and "resistor.square_mm must be above 0" in shown.err and "truncate = true" in shown.err
    (tmp_path / "cut.toml").write_text(text + wide + "truncate = true\n", encoding="utf-8")
    assert run("spread", str(tmp_path / "cut.toml"), "--wiring", FORWARD, "--draws", "8").code == 0


def test_compare_as_json_says_which_direction(run: Any) -> None:
    shown = run("compare", ROW5, "--wiring", FORWARD, "--json")
    facts = json.loads(shown.out)
    (pair,) = facts["compared"]
    assert shown.code == 0
    assert pair["reversed"]["wiring"] == {"a": 1, "b": 4, "c": 2, "d": 5, "e": 3}
    assert {
        "travel_mm_per_period",
        "drift_mm_per_period",
        "turn_deg_per_period",
        "slip",
        "duty_factor",
        "wave",
        "air_mg_per_m",
    } <= (pair.keys() & pair["reversed"].keys())
    assert (pair["advice"]["direction"], pair["advice"]["chance_as_given"]) == ("as given", 1.0)
    assert "walks on the spot" in pair["advice"]["words"]
    assert (pair["wall_s"], pair["reversed"]["wall_s"]) == (0.25, 0.25)
    assert pair["speed_estimate"]["speed_mm_s"] == pytest.approx([12.0, 16.0, 20.0])


def test_people_get_no_digits_that_mean_nothing(run: Any) -> None:
    """Drift to 0.01 mm and turn to 0.01° (JSON keeps all), chances to 0.1 %."""

    def crooked(job: Job) -> Evaluation:
        walk = dataclasses.replace(by_formula(job).walk, drift_m=1.23456e-4, turn_rad=0.0012345)
        falls = job.key.split()[0] in ("0", "3", "6")  # three draws
        return Evaluation(failed_walk(job, "fell_over", "") if falls else walk, 0.0)

    shown = run("compare", ROW5, "--wiring", FORWARD, "--draws", "0", evaluating=crooked).out
    assert " 0.12 " in shown and " 0.07 " in shown and "0.1235" not in shown and "0.0707" not in shown
    facts = json.loads(run("compare", ROW5, "--wiring", FORWARD, "--draws", "0", "--json", evaluating=crooked).out)
    assert facts["compared"][0]["drift_mm_per_period"] == pytest.approx(0.123456)
    told = run("spread", ROW5, "--wiring", FORWARD, "--draws", "16", evaluating=crooked).out
    assert " 81.2" in told and "81.25" not in told  # 13 of 16


def test_compare_for_people(run: Any) -> None:
    shown = run("compare", ROW5, "--wiring", BACKWARD, "--draws", "32")
    assert shown.code == 0
    assert "Run the wave reversed: sure (as given it is the better one in 0 % of 32 draws" in shown.out
    assert "turning the ring block end for end" in shown.out and "estimates" in shown.out


def test_compare_says_when_stages_are_not_equal(run: Any, tmp_path: Path) -> None:
    text = Path(ROW5).read_text(encoding="utf-8")
    unequal = tmp_path / "unequal.toml"
    unequal.write_text(text + "\n[[ring.stage]]\nnumber = 2\nport_mL = 0.9\n", encoding="utf-8")
    shown = run("compare", str(unequal), "--wiring", FORWARD, "--draws", "0")
    assert "not the exact mirror in time" in shown.out


def test_compare_of_falls_is_a_failed_run(run: Any) -> None:
    shown = run("compare", ROW5, "--wiring", FORWARD, "--draws", "0", evaluating=everybody_falls)
    assert shown.code == 1 and "nothing_walked" in shown.out
    assert f"{FORWARD}: fell_over; widen the stance" in shown.out and f"{BACKWARD}: fell_over" in shown.out


def test_compare_refuses_a_wiring_given_twice(run: Any) -> None:
    shown = run("compare", ROW5, "--wiring", FORWARD, "--wiring", FORWARD)
    assert shown.code == 2 and "wiring must be given once" in shown.err


@pytest.fixture
def matching(monkeypatch: pytest.MonkeyPatch) -> None:
    """The command on an analytic ring."""
    monkeypatch.setattr(match_command, "ring_run", formula_ring)
    quick = match_command.matched
    monkeypatch.setattr(match_command, "matched", lambda *given, tell: quick(*given, solve=formula_ring, tell=tell))


def log(tmp_path: Path) -> str:
    truth = formula_ring(built_robot(read_robot(ROW5).robot, TRUTH), WIRING)
    return str(logged_csv(tmp_path / "log.csv", truth, rate_hz=200 / truth.period_s))


def test_match_as_json(matching: None, tmp_path: Path) -> None:
    shown = gaitlab("match", ROW5, log(tmp_path), "--wiring", FORWARD, "--json")
    facts = json.loads(shown.out)
    assert (shown.code, facts["outcome"]) == (0, "matched")
    third = facts["as_built"]["stages"][2]
    assert third["resistor_opening_factor"] == pytest.approx(0.92, abs=0.015)
    assert third["resistor_conductance_factor"] < 0.87
    assert facts["as_built"]["supply_flow_factor"] == pytest.approx(0.85, abs=0.02)
    assert {f["where"] for f in facts["diagnosis"]} >= {"opening of stage 3", "supply flow"}
    third_opening = next(f for f in facts["errors"] if f["name"] == "opening of stage 3")
    assert third_opening["written"] is True and third_opening["unit"] == "× drawn side or bore"
    assert abs(facts["period_error"]["after"]) < 0.01 < abs(facts["period_error"]["before"])
    assert facts["as_built_toml"].startswith("# not decided (within one standard error")
    assert facts["cannot_tell"] and facts["cautions"] and "[[ring.stage]]" in facts["as_built_toml"]


def test_match_for_people(matching: None, tmp_path: Path) -> None:
    shown = gaitlab("match", ROW5, log(tmp_path), "--wiring", FORWARD)
    for words in (
        "stage 3 evacuates slowly",
        "it sags",
        "Such traces cannot tell",
        "clamp the tube",
        "implode",
        "estimates",
        "× drawn side or bore",
        "of the open valve",
        "the period's error is not in these",
        "left as drawn:",
    ):
        assert words in shown.out
    assert shown.code == 0


def test_match_of_a_resting_ring_points_to_the_stage(tmp_path: Path) -> None:
    names = ",".join(["time_s", *(f"stage_{k}_kPa" for k in range(1, 6))])
    rows = "\n".join(f"{0.1 * i:.1f},3,45,3,45,3" for i in range(40))
    (tmp_path / "still.csv").write_text(f"{names}\n{rows}\n", encoding="utf-8")
    shown = gaitlab("match", ROW5, str(tmp_path / "still.csv"), "--json")
    facts = json.loads(shown.out)
    assert (shown.code, facts["outcome"]) == (1, "rests")
    assert "stage 1" in facts["diagnosis"][0] and "resistor blocked" in facts["diagnosis"][0]
    assert facts["remedy"].startswith(facts["diagnosis"][0] + "; ")


@pytest.mark.parametrize("text", ["", "time_s,stage_9_kPa\n" + "1,2\n" * 30, "\x00\x01"])
def test_match_refuses_what_is_no_log(tmp_path: Path, text: str) -> None:
    (tmp_path / "bad.csv").write_text(text, encoding="utf-8")
    shown = gaitlab("match", ROW5, str(tmp_path / "bad.csv"))
    assert shown.code == 2 and "bad.csv" in shown.err and shown.out == ""


def test_match_of_a_missing_file_says_what_helps(tmp_path: Path) -> None:
    shown = gaitlab("match", ROW5, str(tmp_path / "absent.csv"))
    assert shown.code == 2
    assert "absent.csv': no such file or directory; usual fix: check the name" in shown.err and "Errno" not in shown.err


@pytest.mark.slow
def test_spread_and_compare_with_real_walks() -> None:
    """Two builds of two wirings through rings, bodies and worker processes; the same seed gives the same bytes."""
    words = ("--wiring", FORWARD, "--draws", "2", "--json")
    once, twice = (gaitlab("spread", ROW5, *words, "--workers", number) for number in ("1", "2"))
    assert once.code == 0 and once.out == twice.out
    assert sum(json.loads(once.out)["wirings"][0]["outcomes"].values()) == 2
    shown = gaitlab("compare", ROW5, "--wiring", FORWARD, "--draws", "0", "--json")
    assert shown.code == 0 and json.loads(shown.out)["compared"][0]["outcome"] == "walked"
