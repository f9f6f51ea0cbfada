"""The search itself: asks a strategy, looks in the ledger, has the rest walked, writes every walk down, tells the strategy."""

from __future__ import annotations

import json
import math
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, replace
from functools import cached_property
from typing import Any

from gaitlab.ring.pattern import load_pattern
from gaitlab.robot.records import Robot
from gaitlab.search.evaluate import Evaluation, Job
from gaitlab.search.identity import Identity
from gaitlab.search.ledger import Ledger
from gaitlab.search.objective import Score, score_of
from gaitlab.search.schema import SCORED, Row
from gaitlab.search.settings import WalkSettings
from gaitlab.search.strategies.ask_tell import Ask, Reading, Strategy
from gaitlab.search.workers import Workers, WorkersGone
from gaitlab.wiring.space import WiringSpace

NAN = math.nan


@dataclass(frozen=True)
class SearchTask:
    """What is searched: a robot by its document, the space of its wirings, how to walk and what to score on."""

    document: dict[str, Any]
    robot: Robot
    space: WiringSpace
    identity: Identity
    objective: str = "travel"
    settings: WalkSettings = WalkSettings()

    @cached_property
    def document_json(self) -> str:
        """The robot's document as workers get it."""
        return json.dumps(self.document, sort_keys=True)

    def lasting(self, periods: int | None) -> WalkSettings:
        """The walk settings with another length, the same object for the same length."""
        return self._lengths.setdefault(periods, self.settings.lasting(periods))

    @cached_property
    def _lengths(self) -> dict[int | None, WalkSettings]:
        return {self.settings.periods: self.settings}

    @classmethod
    def of(
        cls,
        document: dict[str, Any],
        robot: Robot,
        *,
        objective: str = "travel",
        settings: WalkSettings | None = None,
    ) -> SearchTask:
        """The search over all wirings of a robot. Raises InputError when its limits leave none."""
        space = WiringSpace.of(robot)
        return cls(document, robot, space, Identity.of(document), objective, settings or WalkSettings())


@dataclass(frozen=True)
class Step:
    """One more walk: how it was asked for, its score, and whether the ledger had it already."""

    ask: Ask
    score: Score
    outcome: str
    known: bool


Watch = Callable[[Step], None]


def run_search(task: SearchTask, strategy: Strategy, ledger: Ledger, workers: Workers, watch: Watch) -> bool:
    """Runs `strategy` to its end; every walk is in the ledger when `watch` hears of it. False after Ctrl-C
    and when no worker can be reached any more.

    What is asked for depends on the strategy and on earlier readings in the order of their asking, not on the order in which
    workers end: the same rows come out for any number of workers and after any interruption.
    """
    try:
        while asks := strategy.ask():
            jobs = [job_of(task, ask) for ask in asks]
            _walk_unknown(task, ledger, workers, list(zip(asks, jobs, strict=True)), watch)
            if strategy.listens:
                rows = ledger.known([job.key for job in jobs])
                strategy.tell(
                    [reading_of(ask, rows[job.key], task.objective) for ask, job in zip(asks, jobs, strict=True)]
                )
    except (KeyboardInterrupt, WorkersGone):
        workers.close()
        return False
    return True


def job_of(task: SearchTask, ask: Ask) -> Job:
    """The evaluation that an ask wants."""
    how = task.lasting(ask.periods)
    return Job(task.document_json, ask.wiring, how, task.identity.key(ask.wiring, how))


def _walk_unknown(
    task: SearchTask, ledger: Ledger, workers: Workers, asked: Sequence[tuple[Ask, Job]], watch: Watch
) -> None:
    there = ledger.there([job.key for _, job in asked])
    unknown = {job.key: ask for ask, job in asked if job.key not in there}
    for ask, job in asked:
        if job.key in there:
            watch(Step(ask, Score(NAN, NAN), "", known=True))
    rings = _Rings(task, ledger)
    for job, done in workers.evaluated(_still_unknown(ledger, rings, [job for _, job in asked if job.key in unknown])):
        rings.keep(job, done)
        ledger.add(job, done, task.space.reversed(job.wiring))
        watch(_step(unknown[job.key], done, task.objective))


@dataclass(frozen=True)
class _Rings:
    """Solved rings in the ledger by load pattern: bellows on equal tubes make equal waves, whichever legs they move."""

    task: SearchTask
    ledger: Ledger

    def with_ring(self, job: Job) -> Job:
        """The job with its ring's run, where another wiring of the same pattern or another length of walk has left it."""
        return replace(job, ring=self.ledger.ring(self._pattern(job)))

    def keep(self, job: Job, done: Evaluation) -> None:
        """Keeps a ring that was solved for this job."""
        if done.ring is not None:
            self.ledger.keep_ring(self._pattern(job), done.ring)

    def _pattern(self, job: Job) -> str:
        return load_pattern(self.task.robot, job.wiring).key()


def _still_unknown(ledger: Ledger, rings: _Rings, jobs: Sequence[Job]) -> Iterator[Job]:
    """The jobs that are still to be done when their turn comes: another search may share the ledger."""
    for job in jobs:
        if not ledger.there([job.key]):
            yield rings.with_ring(job)


def _step(ask: Ask, done: Evaluation, objective: str) -> Step:
    return Step(ask, score_of(done.walk, objective), done.walk.outcome, known=False)


def reading_of(ask: Ask, row: Row, objective: str) -> Reading:
    """What the ledger's row says to a strategy."""
    score = score_of(row.walk, objective) if row.status == SCORED else Score(NAN, NAN)
    return Reading(ask, score.value, score.scatter, row.outcome)
