"""gaitlab search: keys of --json, exit codes, folders that are left alone; once with real walks from end to end."""

from __future__ import annotations

import json
import sqlite3
from functools import partial
from pathlib import Path
from typing import Any

import pytest
from search.fakes import by_formula, by_hash, dies_always
from wiring.robots import ROBOTS

from gaitlab.cli import search_command
from gaitlab.search import whole
from gaitlab.search.evaluate import Evaluation, Job, failed_walk
from gaitlab.search.finals import Final
from gaitlab.search.workers import WorkKills
from tests.cli.commands import Finished, gaitlab

ROW5 = str(ROBOTS / "tray_row5.toml")
KEYS = {"raw", "distinct", "evaluated", "failed", "best", "ranking", "simulated_s", "wall_s", "outcome"}
PLACE_KEYS = {
    "wiring", "travel_mm_per_period", "scatter_mm", "speed_mm_s", "rank", "tied_with_best", "wave", "reversed_rank",
    "reversed_travel_mm_per_period",
}  # fmt: skip


def everybody_falls(job: Job) -> Evaluation:
    return Evaluation(failed_walk(job, "fell_over", "widen the stance"), 0.0)


@pytest.fixture
def search(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> Any:
    """The command on made-up walks, without the last two walks for the film."""

    def searching(*words: str, robot: str = ROW5, evaluating: Any = by_formula, out: str = "run") -> Finished:
        monkeypatch.setattr(search_command, "search_robot", partial(whole.search_robot, evaluating=evaluating))
        monkeypatch.setattr(whole, "finals_of", lambda task, best, workers: [])
        return gaitlab("search", robot, "--no-pictures", "--finalists", "0", "--out", str(tmp_path / out), *words)

    return searching


def test_json_has_every_promised_key(search: Any, tmp_path: Path) -> None:
    done = search("--json")
    facts = json.loads(done.out)
    assert done.code == 0
    assert set(facts) >= KEYS
    assert (facts["raw"], facts["distinct"], facts["evaluated"], facts["failed"]) == (120, 24, 24, {})
    assert len(facts["ranking"]) == 24 and set(facts["ranking"][0]) >= PLACE_KEYS
    assert facts["best"] == facts["ranking"][0]
    assert sorted(place["smooth"] for place in facts["smooth_waves"]) == ["head to tail", "tail to head"]
    better = max(place["travel_mm_per_period"] for place in facts["smooth_waves"])
    lead = 100 * (facts["best"]["travel_mm_per_period"] / better - 1)
    assert facts["best_over_smooth_percent"] == pytest.approx(lead)
    assert {path.name for path in (tmp_path / "run").iterdir()} >= {
        "ledger.sqlite",
        "ranking.csv",
        "run.json",
        "traces",
    }


def test_walks_are_counted_beside_wirings(search: Any, tmp_path: Path) -> None:
    """A race walks some wirings short and then until they settle."""
    facts = json.loads(search("--strategy", "race", "--json").out)
    with sqlite3.connect(tmp_path / "run" / "ledger.sqlite") as connection:
        walks, wirings = connection.execute("SELECT count(*), count(DISTINCT wiring) FROM walks").fetchone()
    assert (facts["walks"], facts["evaluated"]) == (walks, wirings) and walks > wirings
    again = search("--strategy", "race", "--resume")
    assert f"24 distinct, {wirings} walked in {walks} walks" in again.out


def test_screening_is_told_with_how_well_it_ranked(search: Any, tmp_path: Path) -> None:
    facts = json.loads(search("--strategy", "screen", "--json").out)
    assert facts["coarse_walks"] == facts["evaluated"] == 24 < facts["walks"]
    (screening,) = facts["screening"]
    assert screening["level"] == "coarse" and screening["pairs"] == facts["walks"] - 24
    assert screening["rank_correlation"] == pytest.approx(1.0)
    assert {place["level"] for place in facts["ranking"]} == {"settled", "coarse"}
    said = search("--strategy", "screen", "--resume").out
    assert "24 of them coarse" in said and "rank correlation of walks (coarse) with settled ones" in said
    header, *lines = (tmp_path / "run" / "ranking.csv").read_text(encoding="utf-8").splitlines()
    assert header.endswith(",walk") and [line.rsplit(",", 1)[1] for line in lines][-1] == "coarse"


def test_help_says_what_comes_on_top_of_a_budget() -> None:
    said = " ".join(gaitlab("search", "--help").out.split())
    assert "Walks that the strategy may spend" in said
    assert "smooth waves and of the reversed waves of the 5 best" in said and "those of --finalists" in said


def test_a_last_walk_that_ends_its_worker_is_told_and_spoils_nothing(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def killing(*_: object) -> list[Final]:
        raise WorkKills("3 workers died at a=1")

    monkeypatch.setattr(search_command, "search_robot", partial(whole.search_robot, evaluating=by_formula))
    monkeypatch.setattr(whole, "finals_of", killing)
    monkeypatch.setattr(whole, "best_ring", lambda task, best: [])
    done = gaitlab("search", ROW5, "--no-pictures", "--finalists", "0", "--out", str(tmp_path / "run"), "--json")
    facts = json.loads(done.out)
    assert done.code == 0 and facts["notes"][-1] == "no film: 3 workers died at a=1"
    assert json.loads((tmp_path / "run" / "run.json").read_text())["finished"] is True


def test_people_get_a_table_that_names_the_smooth_waves(search: Any) -> None:
    done = search()
    assert done.code == 0
    assert "24 distinct" in done.out and "smooth wave, head to tail" in done.out and "tied" in done.out
    assert "nan" not in done.out
    assert " 0.57 " in done.out and "0.573" not in done.out  # every made-up walk turns by 0.01 rad


def test_every_wiring_has_one_fate(search: Any, tmp_path: Path) -> None:
    search(evaluating=by_hash)
    with sqlite3.connect(tmp_path / "run" / "ledger.sqlite") as connection:
        fates = dict(connection.execute("SELECT fate, count(*) FROM fates GROUP BY fate"))
        (wirings,) = connection.execute("SELECT count(DISTINCT wiring) FROM fates").fetchone()
        answered = "SELECT count(*) FROM equals WHERE equal_to NOT IN (SELECT wiring FROM walks)"
        assert connection.execute(answered).fetchone() == (0,)
    assert fates["equal by symmetry"] == 96 and sum(fates.values()) == wirings == 120


def test_a_folder_with_a_search_is_left_alone(search: Any, tmp_path: Path) -> None:
    search()
    before = {path.name: path.read_bytes() for path in (tmp_path / "run").iterdir() if path.is_file()}
    done = search()
    assert done.code == 2 and "go on with --resume" in done.err
    assert before == {path.name: path.read_bytes() for path in (tmp_path / "run").iterdir() if path.is_file()}


def test_resume_gives_the_same_ranking(search: Any, tmp_path: Path) -> None:
    search("--budget", "9")
    assert len((tmp_path / "run" / "ranking.csv").read_text().splitlines()) == 10
    assert search("--resume").code == 0
    search(out="other")
    assert (tmp_path / "run" / "ranking.csv").read_bytes() == (tmp_path / "other" / "ranking.csv").read_bytes()


def test_another_robot_does_not_mix(search: Any, tmp_path: Path) -> None:
    search()
    changed = tmp_path / "changed.toml"
    changed.write_text(
        Path(ROW5).read_text(encoding="utf-8").replace("friction = 0.6", "friction = 0.5"), encoding="utf-8"
    )
    done = search("--resume", robot=str(changed))
    assert done.code == 2 and "another robot or of a changed robot file" in done.err


@pytest.mark.parametrize(
    ("words", "message"),
    [
        (("--budget", "0"), "budget must be at least 1 walk, got 0"),
        (("--strategy", "guess"), "guess"),
        (("--workers", "0"), "0"),
        (("--resume",), "nothing can be resumed"),
        (("--cluster", "tcp://127.0.0.1:9", "--workers", "2"), "--workers must be left out with --cluster"),
        (("--cluster", "tcp://127.0.0.1:9", "--tls-ca", "ca.pem"), "given together"),
    ],
)
def test_bad_input_says_the_rule_and_writes_nothing_to_rank(
    search: Any, tmp_path: Path, words: tuple[str, ...], message: str
) -> None:
    done = search(*words)
    assert done.code == 2 and message in done.err
    assert not (tmp_path / "run" / "ranking.csv").exists() and not (tmp_path / "run" / "run.json").exists()


def test_a_refused_cluster_leaves_a_folder_that_can_be_searched(search: Any) -> None:
    assert search("--cluster", "nonsense://x").code == 2
    assert search().code == 0


def test_limits_that_leave_no_wiring_are_refused(search: Any, tmp_path: Path) -> None:
    tight = tmp_path / "tight.toml"
    text = Path(ROW5).read_text(encoding="utf-8")
    tight.write_text(text.replace("[foot.pad]", "[wiring]\nfixed = { a = 1, b = 1 }\n\n[foot.pad]"), encoding="utf-8")
    done = search(robot=str(tight))
    assert done.code == 2 and "fixed" in done.err


def test_a_body_that_no_wiring_can_cure_is_refused_before_any_walk(search: Any, tmp_path: Path) -> None:
    """The middle leg mounted 10 mm higher than the others never reaches the floor."""
    short = tmp_path / "short.toml"
    text = Path(ROW5).read_text(encoding="utf-8")
    short.write_text(text.replace("at_mm = [0, 0, -6]", "at_mm = [0, 0, 4]"), encoding="utf-8")
    done = search(robot=str(short))
    assert done.code == 2 and "leg c: gap to the ground" in done.err
    assert not (tmp_path / "run").exists()


def test_nothing_that_walks_is_a_failed_run(search: Any) -> None:
    done = search("--json", evaluating=everybody_falls)
    facts = json.loads(done.out)
    assert done.code == 1
    assert (facts["outcome"], facts["failed"], facts["best"]) == ("nothing_walked", {"fell_over": 24}, None)
    assert facts["remedy"]


def test_a_lost_wiring_is_listed_and_walked_again_on_resume(search: Any) -> None:
    first = json.loads(search("--json", evaluating=dies_always).out)
    assert first["failed"]["worker_lost"] == 1
    second = json.loads(search("--json", "--resume", evaluating=by_hash).out)
    assert "worker_lost" not in second["failed"]


@pytest.mark.slow
def test_tray_row5_from_file_to_film(tmp_path: Path) -> None:
    """Real rings and walks: 24 distinct wirings, both smooth waves named, the pictures drawn, identical bytes on repeat."""
    done = gaitlab("search", ROW5, "--out", str(tmp_path / "run"), "--json")
    facts = json.loads(done.out)
    assert done.code == 0
    assert (facts["distinct"], facts["evaluated"], facts["failed"]) == (24, 24, {})
    assert len(facts["smooth_waves"]) == 2 and facts["best_over_smooth_percent"] > 0
    names = {path.name for path in (tmp_path / "run").iterdir()}
    assert names >= {"ledger.sqlite", "ranking.csv", "run.json", "ranking.png", "footfall.png", "best.gif"}
    ranking = (tmp_path / "run" / "ranking.csv").read_bytes()
    with sqlite3.connect(tmp_path / "run" / "ledger.sqlite") as connection:
        connection.execute("DELETE FROM walks WHERE rowid % 4 = 0")
    again = gaitlab("search", ROW5, "--out", str(tmp_path / "run"), "--resume", "--no-pictures", "--workers", "1")
    assert again.code == 0
    assert (tmp_path / "run" / "ranking.csv").read_bytes() == ranking
