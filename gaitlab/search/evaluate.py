"""One evaluation: a wiring's ring and its walk. The same function runs in this process, in workers and on a cluster."""

from __future__ import annotations

import json
import math
import time
from collections.abc import Callable
from dataclasses import dataclass, replace
from functools import lru_cache
from typing import TypeAlias

from gaitlab.errors import InputError
from gaitlab.gait.records import Walk, WaveReading
from gaitlab.ring.waves import RingRun
from gaitlab.robot.reader import robot_from_document
from gaitlab.robot.records import Robot
from gaitlab.search.settings import WalkSettings
from gaitlab.wiring.wiring import Wiring

WORKER_LOST = "worker_lost"
REFUSED = "refused"
BROKE_DOWN = "broke_down"


@dataclass(frozen=True)
class Job:
    """What an evaluation needs: the robot's document as JSON, a wiring, how to walk it, and the ledger's key for it.

    `ring` are the bytes of the ring's run under the wiring's load pattern where it has been solved before. `more` are the
    wirings that coarse bodies walk in one go with it.
    """

    document_json: str
    wiring: Wiring
    settings: WalkSettings
    key: str
    ring: bytes | None = None
    more: tuple[Wiring, ...] = ()

    def alone(self) -> tuple[Job, ...]:
        """One job for each of its wirings."""
        return tuple(replace(self, wiring=wiring, more=()) for wiring in (self.wiring, *self.more))


@dataclass(frozen=True)
class Evaluation:
    """The walk that a job came to, the wall time it took, and the ring's run as bytes where it was solved for it.

    `more` are the walks of the job's further wirings.
    """

    walk: Walk
    wall_s: float
    ring: bytes | None = None
    more: tuple[Walk, ...] = ()


Evaluate: TypeAlias = Callable[[Job], Evaluation]


def evaluate(job: Job) -> Evaluation:
    """Solves the ring under the job's wiring and walks the robot on its waves.

    A combination that a model refuses ends as the outcome ``refused`` with the refusal as remedy, so that one wiring
    cannot end a search. A coarse job is walked by coarse bodies.
    """
    from gaitlab.gait.walk import walk

    begin = time.perf_counter()
    robot = robot_of(job.document_json)
    if job.settings.coarse:
        from gaitlab.search.coarse import coarse_walks_of

        first, *rest = coarse_walks_of(job.document_json, robot, (job.wiring, *job.more))
        return Evaluation(first, time.perf_counter() - begin, more=tuple(rest))
    solved = None
    try:
        ring, solved = _ring_of(job, robot)
        done, _ = walk(robot, job.wiring, ring, **job.settings.arguments())
    except InputError as error:
        done = failed_walk(job, REFUSED, str(error))
    return Evaluation(done, time.perf_counter() - begin, solved)


def _ring_of(job: Job, robot: Robot) -> tuple[RingRun, bytes | None]:
    """The ring under the job's wiring, and its bytes where it was solved here: bytes that cannot be used are solved anew."""
    from gaitlab.ring.pattern import load_pattern
    from gaitlab.ring.solve import ring_run
    from gaitlab.ring.store import RunStore

    if job.ring is not None:
        try:
            return ring_run(robot, job.wiring, runs=RunStore({load_pattern(robot, job.wiring).key(): job.ring})), None
        except Exception:  # a kept ring only saves time: the solve says what is wrong with the wiring itself
            pass
    shelf: dict[str, bytes] = {}
    ring = ring_run(robot, job.wiring, runs=RunStore(shelf))
    return ring, next(iter(shelf.values()), None)


@dataclass(frozen=True)
class Guarded:
    """An evaluation that always ends as a walk: what goes wrong inside becomes an outcome, so that one wiring cannot end a search.

    No memory is nobody's fault: such a walk counts as ``worker_lost`` and --resume tries it again. Anything else is ``broke_down``.
    Of several wirings that cannot be walked in one go, each is tried by itself.
    """

    evaluate: Evaluate

    def __call__(self, job: Job) -> Evaluation:
        """The job's evaluation, or its failure by name."""
        done = self._one(job)
        if len(done.more) == len(job.more):
            return done
        first, *rest = (self._one(single) for single in job.alone())
        wall_s = done.wall_s + first.wall_s + sum(one.wall_s for one in rest)
        return Evaluation(first.walk, wall_s, more=tuple(one.walk for one in rest))

    def _one(self, job: Job) -> Evaluation:
        begin = time.perf_counter()
        try:
            return self.evaluate(job)
        except MemoryError:
            done = failed_walk(
                job, WORKER_LOST, "out of memory: close other programs or use fewer --workers, then --resume"
            )
        except Exception as error:
            said = (str(error).splitlines() or [""])[0][:200]
            remedy = f"{type(error).__name__}: {said}; `gaitlab walk --debug` with this wiring shows where"
            done = failed_walk(job, BROKE_DOWN, remedy)
        return Evaluation(done, time.perf_counter() - begin)


@lru_cache(maxsize=4)
def robot_of(document_json: str) -> Robot:
    """The robot of a document, read once per process."""
    return robot_from_document(json.loads(document_json))


def failed_walk(job: Job, outcome: str, remedy: str) -> Walk:
    """A walk that never began, by name."""
    nan = math.nan
    return Walk(
        outcome=outcome,
        remedy=remedy,
        engine=job.settings.engine,
        step_s=job.settings.step_s or nan,
        period_s=nan,
        travel_m=nan,
        travel_scatter_m=nan,
        travels_m=(),
        drift_m=nan,
        turn_rad=nan,
        slip=nan,
        duty_factor=(),
        stance=(),
        wave=WaveReading("none", nan, 0.0),
        body_length_m=nan,
        pitch_rad=nan,
        height_mean_m=nan,
        height_min_m=nan,
        stability_margin_m=nan,
        air_kg_per_m=nan,
        simulated_s=0.0,
    )
