"""gaitlab search: every distinct wiring walked and ranked, or the best found with a fraction of the walks."""

from __future__ import annotations

import os
import signal
import sys
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any

import click

from gaitlab.cli.options import (
    Number,
    WholeNumber,
    engine_option,
    json_option,
    out_option,
    robot_argument,
    seed_option,
    workers_option,
)
from gaitlab.cli.output import Progress, print_json, progress, warn
from gaitlab.cli.search_print import print_search
from gaitlab.cli.spread_facts import checked_facts
from gaitlab.errors import GaitlabError, InputError, must
from gaitlab.robot.checks import require_odd_ring
from gaitlab.robot.reader import RobotFile, read_robot
from gaitlab.search.cluster import Certificates, cluster_workers
from gaitlab.search.evaluate import Evaluate
from gaitlab.search.objective import OBJECTIVES, SCALE, UNITS
from gaitlab.search.run import SearchTask, Step
from gaitlab.search.settings import WalkSettings
from gaitlab.search.strategies.choice import STRATEGIES, StrategyChoice, strategy_of
from gaitlab.search.strategies.closing import BEST
from gaitlab.search.strategies.screen_search import default_budget
from gaitlab.search.summary import DONE, INTERRUPTED, SearchSummary
from gaitlab.search.whole import SearchPlan, search_robot
from gaitlab.search.workers import Workers, local_workers
from gaitlab.trust.finalists import FinalistPlan, walks_needed
from gaitlab.wiring.smooth import SmoothWaves

MANY = 2000  # distinct wirings above which walking all of them deserves a word; chosen by us
EXIT_FAILED = 1
EXIT_INTERRUPTED = 130


@click.command("search")
@robot_argument
@click.option("--strategy", type=click.Choice(list(STRATEGIES)), help="Default: the robot file's, else exhaustive.")
@click.option(
    "--objective", type=click.Choice(OBJECTIVES), help="What is ranked; default: the robot file's, else travel."
)
@click.option(
    "--budget",
    type=int,
    help="Walks that the strategy may spend (screen: besides its coarse ones); default: as many as it wants. On top, except with "
    f"exhaustive, come settled walks of the smooth waves and of the reversed waves of the {BEST} best where they are "
    "missing, and always those of --finalists.",
)
@workers_option
@click.option(
    "--cluster", metavar="ADDRESS", help="Scheduler of a dask.distributed cluster instead of local processes."
)
@click.option("--tls-ca", type=click.Path(path_type=Path), help="Certificate of the cluster's authority (PEM).")
@click.option("--tls-cert", type=click.Path(path_type=Path), help="Our certificate for the cluster (PEM).")
@click.option("--tls-key", type=click.Path(path_type=Path), help="Our key for the cluster (PEM).")
@click.option(
    "--resume", is_flag=True, help="Go on with the ledger in the folder; walks that are there are not run again."
)
@out_option("Folder for ledger, ranking and pictures; default: runs/NAME.")
@seed_option
@engine_option
@click.option(
    "--finalists",
    type=WholeNumber(0, 50),
    default=3,
    show_default=True,
    help="How many of the best walk again: half step, half inertia factor, moved start, second engine; 0: none.",
)
@click.option("--robust", is_flag=True, help="Rank the finalists again over the build tolerances.")
@click.option("--draws", type=WholeNumber(1, 10_000), default=32, show_default=True, help="Builds drawn with --robust.")
@click.option(
    "--quantile",
    type=Number(at_least=0, at_most=1),
    default=0.5,
    show_default=True,
    help="What --robust ranks on: 0.5 is the median build, 0.1 what nine builds of ten reach.",
)
@click.option(
    "--pictures/--no-pictures", default=True, show_default=True, help="Draw ranking, footfalls and film at the end."
)
@json_option
def command(robot_path: Path, as_json: bool, pictures: bool, **given: Any) -> None:
    """Find the wiring that walks best: which ring output goes to which leg.

    Every distinct wiring of the file's limits is walked until its travel per period has settled, and ranked beside its reversed
    wave. For large spaces: screen (coarse walks of all or thousands of wirings, settled ones for those that may be the best), gp
    (a Gaussian process over wirings picks short walks), race (short walks for all), random. Refused (exit 2): limits that
    leave no wiring, a budget under one, a folder that holds another search.

    \b
      gaitlab search robots/tray_row5.toml
      gaitlab search robots/tray_row7.toml --strategy screen --workers 2
    """
    file = read_robot(robot_path)
    require_odd_ring(file.robot)
    for text in file.warnings:
        warn(text)
    task = _task(file, given)
    choice = StrategyChoice(given["strategy"] or file.robot.search.strategy, given["budget"], given["seed"])
    plan = SearchPlan(
        choice,
        _folder(file, given["out"]),
        given["resume"],
        " ".join(["gaitlab", *sys.argv[1:]]),
        _finalists(given),
    )
    _warn_of_many(choice, task)
    again = walks_needed(plan.finalists, file.robot, task.settings, task.space.distinct)
    waves = SmoothWaves.of(file.robot, task.space)
    expected = strategy_of(choice, task.space, waves).expected()
    with _ended_like_ctrl_c(), progress(expected, "walks") as bar, progress(again, "finalists again") as second_bar:
        summary = search_robot(
            file,
            task,
            plan,
            start_workers=lambda evaluate: _workers(evaluate, given),
            watch=_Watcher(bar, task.objective),
            tell_check=second_bar.advance,
        )
    drawn = _drawn(plan.folder) if pictures and summary.best else ()
    _tell(summary, task, drawn, as_json)


def _warn_of_many(choice: StrategyChoice, task: SearchTask) -> None:
    if choice.name == "exhaustive" and choice.budget is None and task.space.distinct > MANY:
        few = default_budget(task.space)
        warn(
            f"{task.space.distinct} wirings will be walked; --strategy screen looks for the best with coarse walks and about {few} "
            "settled ones"
        )


@contextmanager
def _ended_like_ctrl_c() -> Iterator[None]:
    """A polite `kill` (SIGTERM) ends a search as Ctrl-C does: with a ranking of what is known."""
    before = signal.signal(signal.SIGTERM, signal.default_int_handler)
    try:
        yield
    finally:
        signal.signal(signal.SIGTERM, before)


def _task(file: RobotFile, given: dict[str, Any]) -> SearchTask:
    objective = given["objective"] or file.robot.search.objective
    return SearchTask.of(file.document, file.robot, objective=objective, settings=WalkSettings(engine=given["engine"]))


def _finalists(given: dict[str, Any]) -> FinalistPlan:
    if given["robust"] and given["finalists"] == 0:
        raise InputError(must("--finalists", "at least 1 with --robust", 0))
    draws = given["draws"] if given["robust"] else 0
    return FinalistPlan(given["finalists"], draws, given["quantile"], given["seed"])


def _folder(file: RobotFile, out: Path | None) -> Path:
    return out or Path("runs") / file.robot.name


def _workers(evaluate: Evaluate, given: dict[str, Any]) -> Workers:
    if given["cluster"] is None:
        return local_workers(evaluate, given["workers"] or _cores())
    if given["workers"] is not None:
        raise InputError(must("--workers", "left out with --cluster (the cluster has its own)", given["workers"]))
    return cluster_workers(evaluate, given["cluster"], _certificates(given))


def _cores() -> int:
    return len(os.sched_getaffinity(0)) if hasattr(os, "sched_getaffinity") else os.cpu_count() or 1


def _certificates(given: dict[str, Any]) -> Certificates | None:
    files = [given[name] for name in ("tls_ca", "tls_cert", "tls_key")]
    if not any(files):
        return None
    if not all(files):
        raise InputError(must("--tls-ca, --tls-cert and --tls-key", "given together", [str(f) for f in files if f]))
    missing = [str(file) for file in files if not file.is_file()]
    if missing:
        raise InputError(must("TLS files", "readable files", missing))
    return Certificates(*files)


class _Watcher:
    """Moves the bar and keeps the best so far in its note; coarse walks only change the note, their pace is another."""

    def __init__(self, bar: Progress, objective: str) -> None:
        self._bar, self._objective = bar, objective
        self._best: float | None = None
        self._coarse = 0
        self._begun = False

    def __call__(self, step: Step) -> None:
        if step.ask.coarse:
            self._coarse += 1
            self._bar.note(f"coarse walks: {self._coarse}")
            return
        if self._coarse and not self._begun:
            self._bar.advance(0)
        self._begun = True
        note = None
        if step.score.value == step.score.value and (self._best is None or step.score.value > self._best):
            self._best = step.score.value
            shown = self._best * SCALE[self._objective]
            note = f"best so far {shown:.3g} {UNITS[self._objective]} by {step.ask.wiring.text()}"
        self._bar.advance(1, note, already_done=step.known)


def _drawn(folder: Path) -> tuple[str, ...]:
    """Draws the pictures; what cannot be drawn is told and does not spoil the search."""
    from gaitlab.report.run_pictures import draw_run

    try:
        drawn = draw_run(folder)
    except GaitlabError as error:
        warn(str(error))
        return ()
    for reason in drawn.left_out:
        warn(reason)
    return tuple(str(path) for path in drawn.files)


def _tell(summary: SearchSummary, task: SearchTask, drawn: tuple[str, ...], as_json: bool) -> None:
    if as_json:
        checked = {} if summary.checked is None else checked_facts(summary.checked, task.objective)
        print_json({**summary.facts, **checked, "files": list(drawn)})
    else:
        print_search(summary, task)
    if summary.outcome != DONE:
        raise click.exceptions.Exit(EXIT_INTERRUPTED if summary.outcome == INTERRUPTED else EXIT_FAILED)
