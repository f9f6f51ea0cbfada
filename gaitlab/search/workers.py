"""Runs evaluations on local processes or on a cluster: whatever dies costs its own walks, and those are run again."""

from __future__ import annotations

import multiprocessing
import os
import signal
import threading
from collections import deque
from collections.abc import Callable, Iterable, Iterator, Sequence
from concurrent.futures import FIRST_COMPLETED, Executor, Future, ProcessPoolExecutor, wait
from concurrent.futures.process import BrokenProcessPool
from dataclasses import dataclass, field
from itertools import islice
from typing import Protocol, TypeVar

from gaitlab.errors import GaitlabError
from gaitlab.search.evaluate import WORKER_LOST, Evaluate, Evaluation, Job, failed_walk
from gaitlab.search.guard import follow_parent

IN_FLIGHT_PER_WORKER = 2  # one running and one waiting, so that no worker idles; chosen by us
LOSSES_MAX = 3  # a walk during which a worker died this often is given up; chosen by us
REMEDY = "walk this wiring alone with `gaitlab walk`: it ends the process (memory, or a fault of the engine); --resume tries it again"
GONE = "the cluster's scheduler is gone; usual fix: start it again and go on with --resume"
ONE_THREAD = ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS")


LOOK_EVERY_s = 5.0  # how often it is looked whether the executor is there at all; chosen by us

Result = TypeVar("Result")


class WorkersGone(GaitlabError):
    """No worker can be reached any more: the search ends with what it has, as after Ctrl-C."""


class WorkKills(GaitlabError):
    """Every worker that took up this piece of work died at it."""


class Workers(Protocol):
    """What a search needs: finished walks in any order, and an end."""

    def evaluated(self, jobs: Iterable[Job]) -> Iterator[tuple[Job, Evaluation]]:
        """Each job with its evaluation, in the order in which they end."""

    def each(self, function: Callable[[Job], Result], jobs: Sequence[Job]) -> list[Result]:
        """What `function` makes of each job, side by side and in their order."""

    def close(self) -> None:
        """Ends every process that was started, without waiting for what they are at."""


@dataclass
class InProcess:
    """Evaluates one job after the other in this process."""

    evaluate: Evaluate

    def evaluated(self, jobs: Iterable[Job]) -> Iterator[tuple[Job, Evaluation]]:
        """Each job with its evaluation, in order."""
        for job in jobs:
            yield job, self.evaluate(job)

    def each(self, function: Callable[[Job], Result], jobs: Sequence[Job]) -> list[Result]:
        """What `function` makes of each job, in their order."""
        return [function(job) for job in jobs]

    def close(self) -> None:
        """Nothing was started."""


@dataclass
class ExecutorWorkers:
    """Evaluates on an executor that `start` makes; a broken one is replaced.

    `lost` are the exceptions by which the executor says that the process at work died. Then every job in flight may be the
    culprit: those are run again one at a time, so that the next loss names it, and one that costs `LOSSES_MAX` workers
    is given up as ``worker_lost``. `reachable` says whether there is an executor to wait for at all.
    """

    evaluate: Evaluate
    start: Callable[[], Executor]
    in_flight: int
    lost: tuple[type[BaseException], ...]
    stop: Callable[[Executor], None]
    reachable: Callable[[], bool] = lambda: True
    _executor: Executor | None = None
    _losses: dict[str, int] = field(default_factory=dict)

    def evaluated(self, jobs: Iterable[Job]) -> Iterator[tuple[Job, Evaluation]]:
        """Each job with its evaluation, in the order in which they end."""
        waiting, suspects = iter(jobs), deque[Job]()
        running: dict[Future[Evaluation], Job] = {}
        while True:
            self._fill(running, waiting, suspects)
            if not running:
                return
            done, _ = wait(running, timeout=LOOK_EVERY_s, return_when=FIRST_COMPLETED)
            gone, lost = not self.reachable(), list[Job]()
            for future in done:
                job = running.pop(future)
                try:
                    yield job, future.result()
                except self.lost:
                    lost.append(job)
            if gone:
                raise WorkersGone(GONE)
            if any(_broken(future) for future in done):
                lost.extend(running.values())
                running.clear()
                self.close()
            yield from self._judged(lost, suspects)

    def each(self, function: Callable[[Job], Result], jobs: Sequence[Job]) -> list[Result]:
        """What `function` makes of each job, side by side and in their order.

        What a dying worker took along is done again by a fresh one, never in this process. Raises WorkKills for a job at which
        `LOSSES_MAX` workers died, WorkersGone when there is nothing to start one on.
        """
        found: dict[int, Result] = {}
        try:
            for number, future in enumerate([self._started().submit(function, job) for job in jobs]):
                found[number] = future.result()
        except BrokenProcessPool:
            self.close()
        except self.lost:
            pass  # the executor itself still stands
        return [found[k] if k in found else self._alone(function, job) for k, job in enumerate(jobs)]

    def _alone(self, function: Callable[[Job], Result], job: Job) -> Result:
        for _ in range(LOSSES_MAX - 1):
            if not self.reachable():
                raise WorkersGone(GONE)
            try:
                return self._started().submit(function, job).result()
            except BrokenProcessPool:
                self.close()
            except self.lost:
                continue
        raise WorkKills(f"{LOSSES_MAX} workers died at {job.wiring.text()}; usual fix: {REMEDY.partition(';')[0]}")

    def close(self) -> None:
        """Ends the executor without waiting for what it is at."""
        if self._executor is not None:
            self.stop(self._executor)
            self._executor = None

    def _fill(self, running: dict[Future[Evaluation], Job], waiting: Iterator[Job], suspects: deque[Job]) -> None:
        """Suspects go alone; otherwise as many as keep the workers busy."""
        if suspects:
            if not running:
                self._begin(suspects.popleft(), running, suspects)
            return
        for job in islice(waiting, self.in_flight - len(running)):
            if not self._begin(job, running, suspects):
                return

    def _begin(self, job: Job, running: dict[Future[Evaluation], Job], suspects: deque[Job]) -> bool:
        """Submits a job; an executor that is found broken takes none, which is not the job's fault."""
        try:
            running[self._started().submit(self.evaluate, job)] = job
        except self.lost:
            suspects.append(job)
            if not running:
                self.close()
                self._begin(suspects.pop(), running, suspects)
            return False
        return True

    def _started(self) -> Executor:
        if self._executor is None:
            self._executor = self.start()
        return self._executor

    def _judged(self, lost: list[Job], suspects: deque[Job]) -> Iterator[tuple[Job, Evaluation]]:
        """Each lost job is tried again, or given up if it was at work too often when a worker died."""
        for job in lost:
            self._losses[job.key] = self._losses.get(job.key, 0) + 1
            if self._losses[job.key] >= LOSSES_MAX:
                yield job, Evaluation(failed_walk(job, WORKER_LOST, REMEDY), 0.0)
            else:
                suspects.append(job)


def _broken(future: Future[Evaluation]) -> bool:
    return not future.cancelled() and isinstance(future.exception(), BrokenProcessPool)


def local_workers(evaluate: Evaluate, number: int) -> ExecutorWorkers:
    """`number` processes, started afresh (spawn) so that each has its own physics client and no inherited state."""
    return ExecutorWorkers(
        evaluate=evaluate,
        start=lambda: _SpawnPool(number),
        in_flight=IN_FLIGHT_PER_WORKER * number,
        lost=(BrokenProcessPool,),
        stop=_stopped,
    )


class _SpawnPool(ProcessPoolExecutor):
    """A process pool whose workers never see Ctrl-C, not even while they start: the search alone decides what it means."""

    def __init__(self, number: int) -> None:
        for name in ONE_THREAD:
            os.environ.setdefault(name, "1")  # the walks run side by side: threads inside one would only fight
        super().__init__(
            number,
            mp_context=multiprocessing.get_context("spawn"),
            initializer=follow_parent,
            initargs=(os.getpid(),),
        )

    def submit(self, fn, /, *args, **kwargs):  # type: ignore[no-untyped-def]
        """As in the base class, with SIGINT held back: a process started meanwhile inherits that, ours gets it afterwards."""
        with _interrupts_held():
            return super().submit(fn, *args, **kwargs)


class _interrupts_held:
    """Holds SIGINT back in the main thread where the platform can."""

    def __enter__(self) -> None:
        self._can = hasattr(signal, "pthread_sigmask") and threading.current_thread() is threading.main_thread()
        if self._can:
            self._before = signal.pthread_sigmask(signal.SIG_BLOCK, {signal.SIGINT})

    def __exit__(self, *_: object) -> None:
        if self._can:
            signal.pthread_sigmask(signal.SIG_SETMASK, self._before)


def _stopped(executor: Executor) -> None:
    """Ends a process pool at once, walks in progress included."""
    processes = list((getattr(executor, "_processes", None) or {}).values())
    executor.shutdown(wait=False, cancel_futures=True)
    for process in processes:
        process.kill()
    for process in processes:
        process.join()
