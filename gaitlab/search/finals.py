"""The best wiring and its reversed wave, walked once more with their motion recorded for the pictures."""

from __future__ import annotations

from dataclasses import dataclass, replace
from pathlib import Path

from gaitlab.gait.records import Trace
from gaitlab.ring.waves import RingRun
from gaitlab.search.evaluate import Job, robot_of
from gaitlab.search.ranking import Ranked
from gaitlab.search.run import SearchTask, job_of
from gaitlab.search.strategies.ask_tell import Ask
from gaitlab.search.workers import Workers
from gaitlab.wiring.wiring import Wiring

TRACE_HZ = 100.0  # four times what a film shows; chosen by us
TRACE_FILES = ("best.npz", "reversed.npz")


@dataclass(frozen=True)
class Final:
    """Ring and recorded motion of one finalist; the motion is None where it was not recorded."""

    ring: RingRun
    trace: Trace | None


def traced(job: Job) -> Final:
    """Ring and motion of a job, as `evaluate` runs it; a walk that is refused leaves no motion."""
    from gaitlab.gait.walk import walk
    from gaitlab.ring.solve import ring_run

    robot = robot_of(job.document_json)
    ring = ring_run(robot, job.wiring)
    _, trace = walk(robot, job.wiring, ring, **job.settings.arguments(), trace_hz=TRACE_HZ)
    return Final(ring, trace)


def ring_only(job: Job) -> Final:
    """The ring alone, for a search that was cut short."""
    from gaitlab.ring.solve import ring_run

    return Final(ring_run(robot_of(job.document_json), job.wiring), None)


def finals_of(task: SearchTask, best: Ranked, workers: Workers) -> list[Final]:
    """The best wiring's final, and its reversed wave's where the limits allow one."""
    wirings = [best.wiring] if best.reversed_wiring is None else [best.wiring, best.reversed_wiring]
    return workers.each(traced, [_final_job(task, wiring, best) for wiring in wirings])


def best_ring(task: SearchTask, best: Ranked) -> list[Final]:
    """The best wiring's ring, found in this process."""
    return [ring_only(_final_job(task, best.wiring, best))]


def _final_job(task: SearchTask, wiring: Wiring, best: Ranked) -> Job:
    periods = None if best.settled else len(best.walk.travels_m)
    return replace(job_of(task, Ask(wiring, periods)), key="")


def write_traces(folder: Path, finals: list[Final]) -> None:
    """Writes traces/best.npz and traces/reversed.npz; one that does not belong to this ranking any more is taken away."""
    from gaitlab.gait.trace_file import write_trace

    (folder / "traces").mkdir(exist_ok=True)
    traces = [final.trace for final in finals] + [None, None]
    for name, trace in zip(TRACE_FILES, traces, strict=False):
        (folder / "traces" / name).unlink(missing_ok=True)
        if trace is not None:
            write_trace(folder / "traces" / name, trace)
