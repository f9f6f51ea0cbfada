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
from gaitlab.search.settings import BUNDLE, WalkSettings
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

    def how(self, ask: Ask) -> WalkSettings:
        """The walk settings of an ask, the same object for the same length."""
        wanted = self.settings.lasting(ask.periods, coarse=ask.coarse)
        return self._levels.setdefault(wanted.level, wanted)

    @cached_property
    def _levels(self) -> dict[str, WalkSettings]:
        return {self.settings.level: self.settings}

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
            asked = list(zip(asks, jobs, strict=True))
            _walk_unknown(task, ledger, workers, [pair for pair in asked if not pair[0].coarse], watch)
            _walk_coarse(task, ledger, workers, [pair for pair in asked if pair[0].coarse], watch)
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
    how = task.how(ask)
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


def _walk_coarse(
    task: SearchTask, ledger: Ledger, workers: Workers, asked: Sequence[tuple[Ask, Job]], watch: Watch
) -> None:
    """Coarse walks in bundles of the order of asking. One that is not known whole is walked whole: its numbers may hang, in their
    last digits, on what is walked together, and must not hang on where an earlier search was interrupted."""
    there = ledger.there([job.key for _, job in asked])
    bundles: dict[str, Sequence[tuple[Ask, Job]]] = {}
    for begin in range(0, len(asked), BUNDLE):
        bundle = asked[begin : begin + BUNDLE]
        if all(job.key in there for _, job in bundle):
            for ask, _ in bundle:
                watch(Step(ask, Score(NAN, NAN), "", known=True))
        else:
            bundles[bundle[0][1].key] = bundle
    jobs = [replace(first, more=tuple(job.wiring for _, job in rest)) for (_, first), *rest in bundles.values()]
    for job, done in workers.evaluated(jobs):
        walks = (done.walk, *done.more) if len(done.more) == len(job.more) else [done.walk] * (1 + len(job.more))
        share_s = done.wall_s / len(walks)
        with ledger.at_once():
            for (_, single), walk in zip(bundles[job.key], walks, strict=True):
                ledger.add(single, Evaluation(walk, share_s), task.space.reversed(single.wiring))
        for (ask, _), walk in zip(bundles[job.key], walks, strict=True):
            watch(_step(ask, Evaluation(walk, share_s), task.objective))


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
