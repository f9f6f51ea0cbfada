"""A whole search: opens the folder, runs the strategy, ranks, walks the winner once more for the pictures, writes the record."""

from __future__ import annotations

import os
import time
from collections.abc import Callable
from contextlib import closing
from dataclasses import dataclass, replace
from pathlib import Path

from gaitlab.errors import RunFolderError
from gaitlab.robot.reader import RobotFile
from gaitlab.search.evaluate import Evaluate, Guarded, evaluate
from gaitlab.search.finals import Final, best_ring, finals_of, write_traces
from gaitlab.search.ledger import Ledger
from gaitlab.search.ledger_file import LEDGER_FILE, created, reopened
from gaitlab.search.ranking import Ranking
from gaitlab.search.ranking_table import write_ranking
from gaitlab.search.run import SearchTask, Watch, run_search
from gaitlab.search.run_record import FinalRings, RunFacts, write_run
from gaitlab.search.strategies.choice import StrategyChoice, strategy_of
from gaitlab.search.summary import SearchSummary, summary_of
from gaitlab.search.workers import Workers, WorkersGone, WorkKills
from gaitlab.trust.finalists import Checked, FinalistPlan, Task, check_plan, checked_finalists, checked_record
from gaitlab.wiring.smooth import SmoothWaves

RANKING_FILE = "ranking.csv"
EQUALS_NOTED_MAX = 10_000  # up to this many wirings the ledger also names every equal one; chosen by us


@dataclass(frozen=True)
class SearchPlan:
    """How to search: strategy, folder, whether to go on with what is there, the command line for the record, and how the
    finalists are looked at again."""

    choice: StrategyChoice
    folder: Path
    resume: bool = False
    command: str = ""
    finalists: FinalistPlan = FinalistPlan()


def search_robot(
    file: RobotFile,
    task: SearchTask,
    plan: SearchPlan,
    *,
    start_workers: Callable[[Evaluate], Workers],
    watch: Watch,
    evaluating: Evaluate = evaluate,
    tell_check: Callable[[int], None] = lambda done: None,
) -> SearchSummary:
    """Searches the wirings of a robot and leaves ledger, ranking.csv, run.json and traces in the plan's folder.

    Raises RunFolderError, with nothing overwritten, for a folder that is taken or belongs to another robot; InputError for a
    body that cannot be built and for tolerances that cannot be drawn.
    """
    begin = time.perf_counter()
    refuse_unbuildable(task)
    check_plan(plan.finalists, task.robot, task.document)
    waves = SmoothWaves.of(task.robot, task.space)
    strategy = strategy_of(plan.choice, task.space, waves)
    # Workers first: a cluster that does not answer must not leave an empty ledger behind.
    with closing(start_workers(Guarded(evaluating))) as workers, open_ledger(plan, task) as ledger:
        finished = run_search(task, strategy, ledger, workers, watch)
        _note_equals(task, ledger)
        ranking = Ranking(ledger, waves, task.objective, task.settings)
        finals, finished, notes = _finals(task, ranking, workers, finished)
        checked, finished = _checked(task, plan, ranking, workers, finished, tell_check)
        facts = RunFacts(
            robot_path=file.path.name,
            robot_text=file.text,
            command=plan.command,
            finished=finished,
            strategy=plan.choice.name,
            seed=plan.choice.seed,
            wall_s=time.perf_counter() - begin,
        )
        _write(plan.folder, task, facts, ranking, finals, checked)
        summary = summary_of(task, facts, ranking, ledger, plan.folder)
        return replace(summary, checked=checked, facts={**summary.facts, "notes": [*summary.facts["notes"], *notes]})


def refuse_unbuildable(task: SearchTask) -> None:
    """Builds the body once, so that what no wiring can cure is said before any is walked.

    Raises InputError for a body or a step that the engine refuses, MissingExtraError for an engine that is not installed.
    """
    from gaitlab.body.engine import EngineSettings
    from gaitlab.body.engines import open_engine
    from gaitlab.body.model import body_model

    how, numerics = task.settings, task.robot.numerics
    settings = EngineSettings(how.step_s or numerics.step_s, how.inertia_factor or numerics.inertia_factor, 0.0)
    open_engine(how.engine, body_model(task.robot), settings).close()


def open_ledger(plan: SearchPlan, task: SearchTask) -> Ledger:
    """A new ledger in the plan's folder, or with `resume` the one that is there. Raises RunFolderError."""
    path = plan.folder / LEDGER_FILE
    if not plan.resume:
        if os.path.exists(plan.folder) and not plan.folder.is_dir():
            raise RunFolderError(f"{plan.folder} is a file, not a folder; usual fix: choose another folder with --out")
        return created(path, task.identity)
    ledger = reopened(path, task.identity)
    ledger.forget_lost()
    return ledger


def _note_equals(task: SearchTask, ledger: Ledger) -> None:
    """In a small space every wiring gets its fate: those that a symmetry makes equal are noted with the one they equal."""
    space = task.space
    if space.raw <= EQUALS_NOTED_MAX:
        walked = {text for (text,) in ledger.select("SELECT DISTINCT wiring FROM walks")}
        pairs = ((other, w) for w in space if w.text() in walked for other in space.orbit(w) if other != w)
        ledger.note_equals(pairs)


def _finals(
    task: SearchTask, ranking: Ranking, workers: Workers, finished: bool
) -> tuple[list[Final], bool, tuple[str, ...]]:
    """The finals, whether the search still counts as finished, and what is to say.

    After Ctrl-C only the ring is solved; Ctrl-C during the last walks and a walk that ends its worker leave out the films.
    """
    best = ranking.first(1)
    if not best:
        return [], finished, ()
    try:
        return (finals_of(task, best[0], workers) if finished else best_ring(task, best[0])), finished, ()
    except (KeyboardInterrupt, WorkersGone):
        workers.close()
        return best_ring(task, best[0]), False, ()
    except WorkKills as error:
        return best_ring(task, best[0]), finished, (f"no film: {error}",)


def _checked(
    task: SearchTask,
    plan: SearchPlan,
    ranking: Ranking,
    workers: Workers,
    finished: bool,
    tell: Callable[[int], None],
) -> tuple[Checked | None, bool]:
    """The finalists looked at again, where the plan asks for it; Ctrl-C leaves it out."""
    best = [(p.wiring, p.walk) for p in ranking.first(plan.finalists.count) if p.settled]
    if not finished or not best:
        return None, finished
    whose = Task(task.robot, task.document, task.settings, task.objective)
    tell(0)
    try:
        return checked_finalists(whose, best, plan.finalists, workers, tell=tell), finished
    except (KeyboardInterrupt, WorkersGone):
        return None, False


def _write(
    folder: Path, task: SearchTask, facts: RunFacts, ranking: Ranking, finals: list[Final], checked: Checked | None
) -> None:
    write_ranking(folder / RANKING_FILE, ranking, task.objective)
    rings = [final.ring for final in finals] + [None, None]
    write_traces(folder, finals)
    write_run(folder, task, facts, ranking, FinalRings(rings[0], rings[1]), checked_record(checked))
