"""Engine walks of a shorter chain, for thousands of wirings that a laptop can walk.

Fewer segments a leg, a step of 2 ms, and every wiring driven with the waves of one solved ring, moved to the outputs that the
wiring says: the small differences that tube lengths make to the load are left out. Walks are kept in a file, one JSON line
each (wiring, travel of every period, outcome, period), and not run twice.
"""

from __future__ import annotations

import json
import tomllib
from collections.abc import Sequence
from dataclasses import replace
from functools import cache, partial
from pathlib import Path

import numpy as np

from gaitlab.gait.walk import walk_waves
from gaitlab.ring.solve import ring_run
from gaitlab.ring.waves import RingRun, Waves
from gaitlab.robot.reader import robot_from_document
from gaitlab.robot.records import Robot
from gaitlab.search.evaluate import Evaluation, Job
from gaitlab.search.settings import WalkSettings
from gaitlab.search.workers import local_workers
from gaitlab.wiring.smooth import SmoothWaves
from gaitlab.wiring.space import WiringSpace
from gaitlab.wiring.wiring import Source, Wiring

WORKERS = 2
WALKED = "walked"


@cache
def short_robot(text: str, segments: int) -> Robot:
    """The robot of a TOML text with so many segments a leg, at 2 ms, its slides damped half as long so that they bear the step."""
    text = text.replace("segments = 4", f"segments = {segments}").replace(
        "axial_damping_ms = 10", "axial_damping_ms = 5"
    )
    return robot_from_document({**tomllib.loads(text), "numerics": {"step_ms": 2.0}})


@cache
def one_ring(text: str, segments: int) -> tuple[dict[Source, int], RingRun]:
    """The ring under a smooth wave, and which row of its waves belongs to which output."""
    robot = short_robot(text, segments)
    wiring = SmoothWaves.of(robot, WiringSpace.of(robot)).wirings()[0]
    ring = ring_run(robot, wiring)
    return {source: ring.waves.inlets.index(inlet) for inlet, source in wiring.pairs}, ring


def waves_of(text: str, segments: int, wiring: Wiring) -> Waves:
    """The one ring's waves at the inlets of another wiring."""
    row, ring = one_ring(text, segments)
    return replace(ring.waves, vacuum_Pa=ring.waves.vacuum_Pa[np.array([row[source] for _, source in wiring.pairs])])


def short_chain_walk(job: Job, *, text: str, segments: int, periods: int) -> Evaluation:
    walk, _ = walk_waves(short_robot(text, segments), waves_of(text, segments, job.wiring), periods=periods)
    return Evaluation(walk, 0.0)


class ShortChainWalks:
    """Travels of every period by wiring [m], run when they are first asked for; an empty list for a walk that failed."""

    def __init__(self, path: Path, text: str, *, segments: int, periods: int) -> None:
        self._path = path
        run = partial(short_chain_walk, text=text, segments=segments, periods=periods)
        self._workers = local_workers(run, WORKERS)
        lines = path.read_text(encoding="utf-8").splitlines() if path.exists() else []
        self._known: dict[str, list[float]] = {}
        for wiring, travels, outcome, *_ in map(json.loads, lines):
            self._known[wiring] = travels if outcome == WALKED else []

    def travels(self, wirings: Sequence[Wiring]) -> list[list[float]]:
        """Travels of each wiring, in the order asked."""
        unknown = [Job("", w, WalkSettings(), w.text()) for w in wirings if w.text() not in self._known]
        with self._path.open("a", encoding="utf-8") as file:
            for job, done in self._workers.evaluated(unknown):
                walk = done.walk
                file.write(json.dumps([job.key, walk.travels_m, walk.outcome, walk.period_s]) + "\n")
                file.flush()
                self._known[job.key] = list(walk.travels_m) if walk.outcome == WALKED else []
        return [self._known[wiring.text()] for wiring in wirings]

    def close(self) -> None:
        self._workers.close()
