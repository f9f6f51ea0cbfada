"""A search with its finalists looked at again: what run.json keeps, what the report reads, and when it is left out."""

from __future__ import annotations

import dataclasses
import json
from pathlib import Path

import pytest

from gaitlab.errors import InputError
from gaitlab.report.run_folder import read_run
from gaitlab.robot.reader import read_robot
from gaitlab.robot.records import Tolerance
from gaitlab.search import whole
from gaitlab.search.evaluate import Evaluation, Job
from gaitlab.search.run import SearchTask
from gaitlab.search.settings import WalkSettings
from gaitlab.search.strategies.choice import StrategyChoice
from gaitlab.search.whole import SearchPlan, search_robot
from gaitlab.search.workers import InProcess
from gaitlab.trust.finalists import FinalistPlan, Task, checked_finalists, walks_needed
from tests.trust.test_spread import walked

ROW5 = Path(__file__).parents[2] / "robots" / "tray_row5.toml"


def by_formula(job: Job) -> Evaluation:
    """Travel from the wiring's text and the floor's friction: two wirings lead on grippy floors, others on slippery ones."""
    grip = json.loads(job.document_json).get("ground", {}).get("friction_factor", 1.0)
    order = sum(place * source for place, (_, source) in enumerate(job.wiring.pairs))
    travel = 1e-3 * (order + (20 - order) * (1 - grip))
    return Evaluation(walked(job, travel), 0.0)


@pytest.fixture
def searched(tmp_path: Path, monkeypatch: pytest.MonkeyPatch):
    monkeypatch.setattr(whole, "finals_of", lambda task, best, workers: whole.best_ring(task, best))

    def run(plan: FinalistPlan):
        file = read_robot(ROW5)
        task = SearchTask.of(file.document, file.robot)
        search = SearchPlan(StrategyChoice("exhaustive", None, 1), tmp_path / "run", finalists=plan)
        told: list[int] = []
        summary = search_robot(
            file,
            task,
            search,
            start_workers=InProcess,
            watch=lambda step: None,
            evaluating=by_formula,
            tell_check=told.append,
        )
        return summary, told, tmp_path / "run"

    return run


def test_rechecks_and_robust_ranking_are_kept_and_read_back(searched):
    summary, told, folder = searched(FinalistPlan(count=3, draws=16))
    assert summary.checked is not None
    assert summary.checked.rechecks[0].name == "half step"
    assert all(r.order_kept for r in summary.checked.rechecks)
    assert sum(told) == 3 * (len(summary.checked.rechecks) + 16)
    run = read_run(folder)
    assert [r.name for r in run.rechecks] == [r.name for r in summary.checked.rechecks]
    assert run.spread is not None and run.spread.draws == 16
    best = [p.wiring for p in summary.places[:3]]
    assert [w.wiring for w in run.spread.wirings] == best
    assert run.spread.sensitivities[0].name == "ground.friction_factor"
    assert {r.spread.wiring for r in summary.checked.robust} == set(best)


def test_without_draws_there_is_no_spread(searched):
    summary, _, folder = searched(FinalistPlan(count=2))
    assert summary.checked is not None and summary.checked.spread is None
    assert json.loads((folder / "run.json").read_text(encoding="utf-8"))["spread"] is None


def test_without_finalists_nothing_is_walked_again(searched):
    summary, told, folder = searched(FinalistPlan())
    assert summary.checked is None and told == []
    assert json.loads((folder / "run.json").read_text(encoding="utf-8"))["rechecks"] == []


def test_walks_needed_counts_every_walk():
    robot = read_robot(ROW5).robot
    assert walks_needed(FinalistPlan(count=3, draws=32), robot, WalkSettings(), 24) == 3 * (4 + 32)
    assert walks_needed(FinalistPlan(count=3), robot, WalkSettings(), 2) == 2 * 4


def test_what_cannot_be_drawn_is_refused_before_any_walk(tmp_path):
    def never(job: Job) -> Evaluation:
        raise AssertionError("walked")

    file = read_robot(ROW5)
    for key, size, says in (
        ("ring.port", 5.0, r"ring\.port"),
        ("foot.pad.friction", 150.0, r"draw \d+: foot\.pad\.friction"),
    ):
        robot = dataclasses.replace(file.robot, tolerances=(Tolerance(key, percent=size),))
        task = SearchTask.of(file.document, robot)
        plan = SearchPlan(StrategyChoice("exhaustive", None, 1), tmp_path / "run", finalists=FinalistPlan(2, 64))
        with pytest.raises(InputError, match=says):
            search_robot(file, task, plan, start_workers=InProcess, watch=lambda step: None, evaluating=never)
    assert not (tmp_path / "run").exists()


def test_a_quantile_outside_its_range_is_refused():
    file = read_robot(ROW5)
    task = Task(file.robot, file.document, WalkSettings(), "travel")
    with pytest.raises(InputError, match="quantile must be from 0 to 1"):
        checked_finalists(task, [], FinalistPlan(count=1, quantile=2.0), InProcess(by_formula))
