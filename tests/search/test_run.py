"""The search driver on made-up walks: the same ranking for any workers, any interruption, any repeat."""

from __future__ import annotations

import csv
import os
import sqlite3
from collections.abc import Callable, Sequence
from concurrent.futures import CancelledError, ThreadPoolExecutor
from contextlib import closing
from pathlib import Path

import pytest
from search.fakes import (
    by_formula,
    by_hash,
    dies_always,
    dies_once,
    kills_a_worker_once,
    kills_every_worker,
    slowly,
    task_of,
)

from gaitlab.errors import InputError
from gaitlab.search.evaluate import WORKER_LOST, Evaluate, Evaluation, Guarded, Job
from gaitlab.search.ledger_file import LEDGER_FILE, created, reopened
from gaitlab.search.ranking import Ranked, Ranking
from gaitlab.search.ranking_table import write_ranking
from gaitlab.search.run import SearchTask, Step, job_of, run_search
from gaitlab.search.settings import BUNDLE
from gaitlab.search.strategies.ask_tell import Ask, Reading
from gaitlab.search.strategies.choice import STRATEGIES, StrategyChoice, strategy_of
from gaitlab.search.workers import ExecutorWorkers, InProcess, Workers, WorkersGone, WorkKills, local_workers
from gaitlab.wiring.smooth import SmoothWaves
from gaitlab.wiring.wiring import Wiring

ROW = task_of()
WAVES = SmoothWaves.of(ROW.robot, ROW.space)


def quiet(step: Step) -> None:
    pass


def searched(
    folder: Path,
    workers: Workers,
    *,
    task: SearchTask = ROW,
    choice: StrategyChoice = StrategyChoice(),
    resume: bool = False,
) -> bytes:
    """Runs a search into `folder` and gives back the bytes of its ranking."""
    waves = SmoothWaves.of(task.robot, task.space)
    opened = reopened if resume else created
    with opened(folder / LEDGER_FILE, task.identity) as ledger:
        run_search(task, strategy_of(choice, task.space, waves), ledger, workers, quiet)
        workers.close()
        ranking = Ranking(ledger, waves, task.objective, task.settings)
        write_ranking(folder / "ranking.csv", ranking, task.objective)
    return (folder / "ranking.csv").read_bytes()


def places(folder: Path, task: SearchTask = ROW) -> list[Ranked]:
    with reopened(folder / LEDGER_FILE, task.identity) as ledger:
        return list(Ranking(ledger, SmoothWaves.of(task.robot, task.space), task.objective, task.settings))


def test_every_distinct_wiring_is_walked_once_and_ranked_best_first(tmp_path: Path) -> None:
    searched(tmp_path, InProcess(by_formula))
    ranked = places(tmp_path)
    assert [place.rank for place in ranked] == list(range(1, 25))
    assert {place.wiring for place in ranked} == set(ROW.space)
    travels = [place.walk.travel_m for place in ranked]
    assert travels == sorted(travels, reverse=True)


def test_each_wiring_stands_beside_its_reversed_wave(tmp_path: Path) -> None:
    searched(tmp_path, InProcess(by_formula))
    ranked = places(tmp_path)
    by_wiring = {place.wiring: place for place in ranked}
    for place in ranked:
        assert place.reversed_wiring == ROW.space.reversed(place.wiring)
        assert place.reversed_wiring is not None and place.reversed_walk is not None
        assert by_wiring[place.reversed_wiring].rank == place.reversed_rank
        assert by_wiring[place.reversed_wiring].walk.travel_m == place.reversed_walk.travel_m


def test_both_smooth_waves_are_named(tmp_path: Path) -> None:
    searched(tmp_path, InProcess(by_formula))
    assert sorted(place.smooth for place in places(tmp_path)) == [-1] + [0] * 22 + [1]


def test_ties_reach_as_far_as_the_scatters_together(tmp_path: Path) -> None:
    """Scatters of 3 and 4 µm bridge 5 µm and no more."""
    from search.fakes import walk_of

    order = {wiring: n for n, wiring in enumerate(ROW.space)}

    def stepped(job: Job) -> Evaluation:
        n = order[job.wiring]
        return Evaluation(walk_of(job, 0.01 - (0, 4.9e-6, 5.1e-6)[min(n, 2)], 3e-6 if n == 0 else 4e-6), 0.0)

    searched(tmp_path, InProcess(stepped))
    assert [place.tied_with_best for place in places(tmp_path)] == [True, True] + [False] * 22


def test_failures_are_listed_by_name_and_take_no_place(tmp_path: Path) -> None:
    task = task_of(6, 5, inlets_per_output_max=2)
    searched(tmp_path, InProcess(by_hash), task=task)
    with reopened(tmp_path / LEDGER_FILE, task.identity) as ledger:
        ranking = Ranking(ledger, SmoothWaves.of(task.robot, task.space), "travel", task.settings)
        ranked, failures = list(ranking), list(ranking.failures())
        assert ranking.failed() == {"fell_over": len(failures)} and failures
        assert ranking.evaluated() == len(ranked) + len(failures) == task.space.distinct
        assert {p.wiring for p in ranked}.isdisjoint({f.wiring for f in failures})


@pytest.mark.parametrize("objective", ["travel", "speed", "straight", "air"])
def test_objectives_rank_one_ledger(tmp_path: Path, objective: str) -> None:
    searched(tmp_path, InProcess(by_formula))
    with reopened(tmp_path / LEDGER_FILE, ROW.identity) as ledger:
        scores = [place.score.value for place in Ranking(ledger, WAVES, objective, ROW.settings)]
    assert scores == sorted(scores, reverse=True) and len(scores) == 24


@pytest.mark.parametrize("name", STRATEGIES)
def test_contract_of_every_strategy(tmp_path: Path, name: str) -> None:
    """Asks only for allowed representatives, each length of each once, repeats with its seed, ends."""
    task = task_of(6, 5, inlets_per_output_max=2)
    choice = StrategyChoice(name, 40, 3)
    first = searched(tmp_path / "a", InProcess(Guarded(by_hash)), task=task, choice=choice)
    again = searched(tmp_path / "b", InProcess(Guarded(by_hash)), task=task, choice=choice)
    assert first == again
    with sqlite3.connect(tmp_path / "a" / LEDGER_FILE) as connection:
        rows = connection.execute("SELECT wiring, level FROM walks").fetchall()
    assert len(rows) == len(set(rows))
    assert {wiring for wiring, _ in rows} <= {wiring.text() for wiring in task.space}


@pytest.mark.parametrize("budget", [1, 2, 40])
@pytest.mark.parametrize("name", STRATEGIES)
def test_the_strategy_keeps_its_budget_and_closing_walks_come_on_top(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, name: str, budget: int
) -> None:
    """On top, and settled: the smooth waves that are missing, then the missing reversed waves of what is best by then."""
    task = task_of(6, 5, inlets_per_output_max=2)
    waves = SmoothWaves.of(task.robot, task.space)
    strategy, spent, heard = strategy_of(StrategyChoice(name, budget, 3), task.space, waves), list[Ask](), list[Step]()
    inner = getattr(strategy, "_inner", strategy)
    ask = inner.ask

    def noted() -> Sequence[Ask]:
        asks = list(ask())
        spent.extend(asks)
        return asks

    monkeypatch.setattr(inner, "ask", noted)
    with created(tmp_path / LEDGER_FILE, task.identity) as ledger:
        run_search(task, strategy, ledger, InProcess(Guarded(by_hash)), heard.append)
    engine = [ask for ask in spent if not ask.coarse]
    assert 1 <= len(engine) <= budget and [step.ask for step in heard[: len(spent)]] == spent
    assert len(engine) == budget or name in ("race", "gp", "screen"), "only these may end early"
    on_top = [] if name == "exhaustive" else owed(heard[: len(spent)], waves.wirings(), task)
    assert [step.ask for step in heard[len(spent) :]] == on_top


def owed(steps: list[Step], smooth: Sequence[Wiring], task: SearchTask) -> list[Ask]:
    """What has to come after these steps, worked out anew."""
    settled = {step.ask.wiring: step.score.value for step in steps if step.ask.settled}
    missing = [wiring for wiring in smooth if wiring not in settled]
    for wiring in missing:
        done = by_hash(job_of(task, Ask(wiring)))
        settled[wiring] = done.walk.travel_m
    walked = [wiring for wiring, value in settled.items() if value == value]
    best = sorted(walked, key=lambda wiring: (-settled[wiring], wiring.text()))[:5]
    backwards = [task.space.reversed(wiring) for wiring in best]
    return [Ask(w) for w in missing] + [Ask(w) for w in dict.fromkeys(backwards) if w is not None and w not in settled]


@pytest.mark.parametrize("name", STRATEGIES)
def test_same_bytes_for_one_and_two_workers(tmp_path: Path, name: str) -> None:
    choice = StrategyChoice(name, 20, 1)
    alone = searched(tmp_path / "a", InProcess(Guarded(by_hash)), choice=choice)
    two = searched(tmp_path / "b", local_workers(Guarded(by_hash), 2), choice=choice)
    assert alone == two


@pytest.mark.parametrize("name", STRATEGIES)
def test_interrupted_and_resumed_gives_the_same_bytes(tmp_path: Path, name: str) -> None:
    task, choice = task_of(6, 5, inlets_per_output_max=2), StrategyChoice(name, 40, 2)
    after = 7 * BUNDLE + 17 if name == "screen" else 17
    whole = searched(tmp_path / "a", InProcess(Guarded(by_hash)), task=task, choice=choice)
    searched(tmp_path / "b", InProcess(Guarded(interrupting(by_hash, after=after))), task=task, choice=choice)
    with sqlite3.connect(tmp_path / "b" / LEDGER_FILE) as connection:
        (rows,) = connection.execute("SELECT count(*) FROM walks").fetchone()
    assert rows == (7 * BUNDLE if name == "screen" else 17), "coarse walks are written down bundle by bundle"
    assert searched(tmp_path / "b", InProcess(Guarded(by_hash)), task=task, choice=choice, resume=True) == whole


def test_a_bundle_that_is_not_known_whole_is_walked_whole_and_doubles_nothing(tmp_path: Path) -> None:
    """Coarse numbers may hang on what is walked together: the bundle after a loss is the bundle before it."""
    asks = [Ask(wiring, coarse=True) for wiring in ROW.space]
    bundles: list[tuple[Wiring, ...]] = []

    def noted(job: Job) -> Evaluation:
        bundles.append((job.wiring, *job.more))
        return Guarded(by_hash)(job)

    with created(tmp_path / LEDGER_FILE, ROW.identity) as ledger:
        run_search(ROW, Scripted([asks]), ledger, InProcess(noted), quiet)
        with ledger.told_plainly() as connection:
            connection.execute("DELETE FROM walks WHERE wiring = ?", (asks[3].wiring.text(),))
        run_search(ROW, Scripted([asks]), ledger, InProcess(noted), quiet)
        assert bundles == [tuple(ask.wiring for ask in asks)] * 2
        assert ledger.number_of_walks() == len(asks)
        run_search(ROW, Scripted([asks]), ledger, InProcess(noted), quiet)
        assert len(bundles) == 2


def test_a_lost_bundle_is_a_loss_of_every_wiring_in_it(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("GAITLAB_TEST_PARENT", str(os.getpid()))
    asks = [Ask(wiring, coarse=True) for wiring in ROW.space]
    with created(tmp_path / LEDGER_FILE, ROW.identity) as ledger:
        run_search(ROW, Scripted([asks]), ledger, local_workers(kills_every_worker, 1), quiet)
        failures = list(Ranking(ledger, WAVES, "travel", ROW.settings).failures())
        assert [failure.outcome for failure in failures] == [WORKER_LOST] * 24
        assert ledger.forget_lost() == 24


def test_coarse_walks_take_their_places_after_all_others(tmp_path: Path) -> None:
    wirings = list(ROW.space)
    script: list[list[Ask]] = [
        [Ask(wiring, coarse=True) for wiring in wirings],
        [Ask(wiring, 2) for wiring in wirings[:6]],
        [Ask(wiring) for wiring in wirings[:2]],
    ]
    with created(tmp_path / LEDGER_FILE, ROW.identity) as ledger:
        run_search(ROW, Scripted(script), ledger, InProcess(Guarded(by_formula)), quiet)
        ranking = Ranking(ledger, WAVES, "travel", ROW.settings)
        levels = [place.level for place in ranking]
        assert levels == ["settled"] * 2 + ["2 periods"] * 4 + ["coarse"] * 18
        assert (ranking.walks(), ranking.coarse()) == (32, 24)
        assert not any(place.tied_with_best for place in ranking if not place.settled)


class Scripted:
    """Asks for what it was given, batch by batch."""

    listens = False

    def __init__(self, batches: Sequence[Sequence[Ask]]) -> None:
        self._batches = iter(batches)

    def expected(self) -> int:
        return 0

    def ask(self) -> Sequence[Ask]:
        return next(self._batches, ())

    def tell(self, readings: Sequence[Reading]) -> None:
        raise AssertionError("it does not listen")


def interrupting(evaluate: Evaluate, *, after: int) -> Evaluate:
    """Behaves as if Ctrl-C came after so many walks."""
    left = [after]

    def evaluated(job: Job) -> Evaluation:
        if left[0] == 0:
            raise KeyboardInterrupt
        left[0] -= 1
        return evaluate(job)

    return evaluated


def test_a_resumed_search_walks_nothing_twice(tmp_path: Path) -> None:
    searched(tmp_path, InProcess(by_hash))

    def never(job: Job) -> Evaluation:
        raise AssertionError(f"{job.wiring.text()} was walked again")

    searched(tmp_path, InProcess(never), resume=True)


def test_two_searches_share_one_ledger(tmp_path: Path) -> None:
    """Walks that the other search adds meanwhile are used, not doubled."""
    walked: list[str] = []
    with created(tmp_path / LEDGER_FILE, ROW.identity) as one, reopened(tmp_path / LEDGER_FILE, ROW.identity) as other:

        def both(job: Job) -> Evaluation:
            walked.append(job.wiring.text())
            if len(walked) == 5:
                run_search(ROW, strategy_of(StrategyChoice(), ROW.space, WAVES), other, InProcess(by_hash), quiet)
            return by_hash(job)

        run_search(ROW, strategy_of(StrategyChoice(), ROW.space, WAVES), one, InProcess(both), quiet)
        assert one.number_of_walks() == 24
    assert len(walked) == 5


def test_a_dying_worker_costs_its_walk_only(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("GAITLAB_TEST_FLAG", str(tmp_path / "flag"))
    whole = searched(tmp_path / "a", InProcess(by_hash))
    assert searched(tmp_path / "b", local_workers(dies_once, 2)) == whole
    assert (tmp_path / "flag").exists()


def test_a_wiring_that_kills_every_worker_is_given_up_by_name(tmp_path: Path) -> None:
    searched(tmp_path, local_workers(dies_always, 2))
    with reopened(tmp_path / LEDGER_FILE, ROW.identity) as ledger:
        lost = [row for row in Ranking(ledger, WAVES, "travel", ROW.settings).failures() if row.outcome == WORKER_LOST]
        assert [failure.wiring.text() for failure in lost] == ["a=1 b=4 c=2 d=5 e=3"]
        assert "--resume tries it again" in lost[0].remedy
        assert ledger.number_of_walks() == 24


def test_a_last_walk_that_kills_its_worker_is_done_again_by_another(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("GAITLAB_TEST_FLAG", str(tmp_path / "flag"))
    monkeypatch.setenv("GAITLAB_TEST_PARENT", str(os.getpid()))
    jobs = [job_of(ROW, Ask(wiring)) for wiring in ROW.space]
    with closing(local_workers(by_hash, 2)) as workers:
        assert repr(workers.each(kills_a_worker_once, jobs)) == repr([by_hash(job) for job in jobs])
    assert (tmp_path / "flag").exists()


def test_a_last_walk_that_kills_every_worker_is_given_up_by_name(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("GAITLAB_TEST_PARENT", str(os.getpid()))
    jobs = [job_of(ROW, Ask(wiring)) for wiring in ROW.space][:6]
    with closing(local_workers(by_hash, 2)) as workers, pytest.raises(WorkKills, match="3 workers died at a=1"):
        workers.each(kills_every_worker, jobs)


def test_walks_that_are_finished_when_the_scheduler_goes_are_kept() -> None:
    there = iter([True, False])
    workers = ExecutorWorkers(
        evaluate=by_hash,
        start=lambda: ThreadPoolExecutor(1),
        in_flight=1,
        lost=(CancelledError,),
        stop=lambda executor: executor.shutdown(),
        reachable=lambda: next(there),
    )
    jobs, known = [job_of(ROW, Ask(wiring)) for wiring in ROW.space][:3], []
    with closing(workers), pytest.raises(WorkersGone, match="scheduler is gone"):
        for job, _ in workers.evaluated(jobs):
            known.append(job)
    assert known == jobs[:2]


def test_workers_end_with_their_search(tmp_path: Path) -> None:
    workers = local_workers(slowly, 2)
    with created(tmp_path / LEDGER_FILE, ROW.identity) as ledger:
        run_search(ROW, strategy_of(StrategyChoice(budget=4), ROW.space, WAVES), ledger, workers, quiet)
    processes = list(workers._executor._processes.values())  # type: ignore[union-attr]
    workers.close()
    assert processes and not any(process.is_alive() for process in processes)


@pytest.mark.parametrize(
    ("choice", "words"),
    [
        (StrategyChoice(budget=0), "budget must be at least 1 walk, got 0"),
        (StrategyChoice("best"), "strategy must be one of"),
    ],
)
def test_bad_choices_say_the_rule(choice: StrategyChoice, words: str) -> None:
    with pytest.raises(InputError, match=words):
        strategy_of(choice, ROW.space, WAVES)


def test_ranking_file_has_one_line_per_wiring_and_no_times(tmp_path: Path) -> None:
    searched(tmp_path, InProcess(by_formula))
    with (tmp_path / "ranking.csv").open(newline="") as file:
        lines = list(csv.DictReader(file))
    assert len(lines) == 24
    assert not any("wall" in name or "time" in name for name in lines[0])
    assert {line["smooth"] for line in lines} == {"", "head to tail", "tail to head"}


def recorded(log: list[Step]) -> Callable[[Step], None]:
    return log.append


def test_watch_hears_of_every_walk(tmp_path: Path) -> None:
    heard: list[Step] = []
    with created(tmp_path / LEDGER_FILE, ROW.identity) as ledger:
        for _ in range(2):
            run_search(
                ROW, strategy_of(StrategyChoice(), ROW.space, WAVES), ledger, InProcess(by_hash), recorded(heard)
            )
    assert [step.known for step in heard] == [False] * 24 + [True] * 24
