"""Nine legs on nine stages, 40 320 distinct wirings: 400 walks placed by the Gaussian process against 400 drawn at random.

To be affordable the body is coarser than the shipped one (one segment a leg, 2 ms) and every wiring is driven with the waves of one
solved ring, moved to the outputs that the wiring says: the tubes' small differences in load are left out. Both strategies are
judged by the second period's travel of the same walks. The random draws of all seeds come out of one pool of 1000. Walks are
kept in FOLDER/nine.jsonl and not run twice.
"""

from __future__ import annotations

import json
import statistics
import sys
import tomllib
from collections.abc import Sequence
from dataclasses import replace
from functools import cache
from pathlib import Path

import numpy as np
from benchmarks.search_robots import row_text

from gaitlab.gait.records import Walk
from gaitlab.gait.walk import walk_waves
from gaitlab.ring.solve import ring_run
from gaitlab.ring.waves import RingRun, Waves
from gaitlab.robot.reader import robot_from_document
from gaitlab.robot.records import Robot
from gaitlab.search.evaluate import Evaluation, Job
from gaitlab.search.settings import SHORT_PERIODS, WalkSettings
from gaitlab.search.strategies.ask_tell import Ask, Reading, Strategy
from gaitlab.search.strategies.process_search import ProcessSearch
from gaitlab.search.strategies.random_draws import RandomDraws
from gaitlab.search.workers import Workers, local_workers
from gaitlab.wiring.smooth import SmoothWaves
from gaitlab.wiring.space import WiringSpace
from gaitlab.wiring.wiring import Wiring, wiring_from_text

LEGS = 9
WALKS = 400
POOL = 1000
SEEDS = range(5)
WORKERS = 2


@cache
def nine_legs() -> Robot:
    text = (
        row_text(LEGS).replace("segments = 4", "segments = 1").replace("axial_damping_ms = 10", "axial_damping_ms = 5")
    )
    document = tomllib.loads(text)
    document["numerics"] = {"step_ms": 2.0}
    return robot_from_document(document)


@cache
def one_ring() -> tuple[Wiring, RingRun]:
    robot = nine_legs()
    wiring = SmoothWaves.of(robot, WiringSpace.of(robot)).wirings()[0]
    return wiring, ring_run(robot, wiring)


def waves_of(wiring: Wiring) -> Waves:
    """The one ring's waves at the inlets of another wiring."""
    solved, ring = one_ring()
    row_of_output = {source: ring.waves.inlets.index(inlet) for inlet, source in solved.pairs}
    rows = [row_of_output[source] for _, source in wiring.pairs]
    return replace(ring.waves, vacuum_Pa=ring.waves.vacuum_Pa[np.array(rows)])


def short_walk(job: Job) -> Evaluation:
    walk, _ = walk_waves(nine_legs(), waves_of(job.wiring), periods=SHORT_PERIODS)
    return Evaluation(walk, 0.0)


class Walks:
    """Second-period travels by wiring, kept in a file."""

    def __init__(self, path: Path, workers: Workers) -> None:
        self._path, self._workers = path, workers
        lines = path.read_text(encoding="utf-8").splitlines() if path.exists() else []
        self._known: dict[str, float | None] = dict(json.loads(line) for line in lines)

    def readings(self, asks: Sequence[Ask]) -> list[Reading]:
        unknown = [
            Job("", ask.wiring, WalkSettings(), ask.wiring.text())
            for ask in asks
            if ask.wiring.text() not in self._known
        ]
        with self._path.open("a", encoding="utf-8") as file:
            for job, done in self._workers.evaluated(unknown):
                self._known[job.key] = travel_of(done.walk)
                file.write(json.dumps([job.key, self._known[job.key]]) + "\n")
        values = [self._known[ask.wiring.text()] for ask in asks]
        return [
            Reading(a, float("nan") if v is None else v, float("nan"), "") for a, v in zip(asks, values, strict=True)
        ]


def travel_of(walk: Walk) -> float | None:
    return walk.travel_m if walk.travel_m == walk.travel_m else None


def best_of(strategy: Strategy, walks: Walks) -> tuple[float, int]:
    """Best travel among the short walks that a strategy asks for, and how many there were."""
    told: list[Reading] = []
    while asks := [ask for ask in strategy.ask() if ask.periods is not None]:
        readings = walks.readings(asks)
        strategy.tell(readings)
        told += readings
    return max(r.score for r in told if not r.failed), len(told)


def pool_of(space: WiringSpace, walks: Walks) -> np.ndarray:
    """Travels of `POOL` different wirings drawn at random."""
    strategy = RandomDraws(space, POOL, 0, SHORT_PERIODS)
    readings: list[Reading] = []
    while asks := strategy.ask():
        readings += walks.readings(asks)
    return np.array([reading.score for reading in readings])


def nine(folder: Path) -> None:
    robot = nine_legs()
    space = WiringSpace.of(robot)
    smooth = SmoothWaves.of(robot, space).wirings()
    workers = local_workers(short_walk, WORKERS)
    walks = Walks(folder / "nine.jsonl", workers)
    print("| seed | best of 400 at random | best of 400 by gp | gp over random |")
    print("|---|---|---|---|")
    leads = []
    pool = pool_of(space, walks)
    for seed in SEEDS:
        drawn = float(np.nanmax(np.random.default_rng(seed).choice(pool, WALKS, replace=False)))
        found, number = best_of(ProcessSearch(space, smooth, WALKS, seed), walks)
        leads.append(found / drawn - 1)
        print(
            f"| {seed} | {drawn * 1e3:.2f} mm | {found * 1e3:.2f} mm ({number}) | {100 * leads[-1]:+.1f} % |",
            flush=True,
        )
    workers.close()
    for wiring in smooth:
        travel = walks.readings([Ask(wiring_from_text(wiring.text(), space.inlets, LEGS), SHORT_PERIODS)])[0].score
        print(f"\nsmooth wave {wiring.text()}: {travel * 1e3:.2f} mm", file=sys.stderr)
    print(f"\nworst {100 * min(leads):+.1f} %, median {100 * statistics.median(leads):+.1f} %")
