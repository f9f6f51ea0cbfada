"""Nine legs on nine stages, 40 320 distinct wirings: what screen and the Gaussian process find, against 400 drawn at random.

The body that is walked in Bullet has one segment a leg (see `search_short_chain.py`) so that some three thousand walks are
affordable; every strategy is judged by the second period's travel of its engine walks. The random draws of all seeds
come out of one pool of 600. Coarse walks are those of the command, of the robot as it is.
"""

from __future__ import annotations

import json
import math
import statistics
import time
import tomllib
from collections.abc import Sequence
from pathlib import Path

import numpy as np
from benchmarks.search_robots import row_text
from benchmarks.search_short_chain import WORKERS, ShortChainWalks, short_robot

from gaitlab.search.evaluate import Job, evaluate
from gaitlab.search.settings import BUNDLE, SHORT_PERIODS, WalkSettings
from gaitlab.search.strategies.ask_tell import Ask, Reading, Strategy
from gaitlab.search.strategies.process_search import ProcessSearch
from gaitlab.search.strategies.random_draws import RandomDraws
from gaitlab.search.strategies.screen_search import ScreenSearch
from gaitlab.search.workers import local_workers
from gaitlab.wiring.smooth import SmoothWaves
from gaitlab.wiring.space import WiringSpace
from gaitlab.wiring.wiring import Wiring

LEGS = 9
SEGMENTS = 1
WALKS = 400
POOL = 600
SEEDS = range(5)


class Scores:
    """Travel [m] of the second period by engine or coarse walk; both kinds are counted."""

    def __init__(self, folder: Path, text: str) -> None:
        self._engine = ShortChainWalks(folder / "nine.jsonl", text, segments=SEGMENTS, periods=SHORT_PERIODS)
        self._document = json.dumps(tomllib.loads(text))
        self._workers = local_workers(evaluate, WORKERS)

    def of(self, asks: Sequence[Ask]) -> list[Reading]:
        coarse = dict(self._coarse([ask.wiring for ask in asks if ask.coarse]))
        plain = [ask.wiring for ask in asks if not ask.coarse]
        travels = dict(zip(plain, self._engine.travels(plain), strict=True))
        engine = {w: of[SHORT_PERIODS - 1] if of else math.nan for w, of in travels.items()}
        return [
            Reading(ask, coarse[ask.wiring] if ask.coarse else engine[ask.wiring], math.nan, "walked") for ask in asks
        ]

    def _coarse(self, wirings: Sequence[Wiring]) -> list[tuple[Wiring, float]]:
        bundles = [wirings[k : k + BUNDLE] for k in range(0, len(wirings), BUNDLE)]
        jobs = [Job(self._document, b[0], WalkSettings(coarse=True), b[0].text(), more=tuple(b[1:])) for b in bundles]
        return [
            (wiring, walk.travel_m)
            for job, done in self._workers.evaluated(jobs)
            for wiring, walk in zip((job.wiring, *job.more), (done.walk, *done.more), strict=True)
        ]

    def close(self) -> None:
        self._engine.close()
        self._workers.close()


def played(strategy: Strategy, scores: Scores, *, short_only: bool = False) -> list[Reading]:
    """Everything that a strategy was told; with `short_only` its settled walks are not walked."""
    told: list[Reading] = []
    while asks := [ask for ask in strategy.ask() if not (short_only and ask.settled)]:
        some = scores.of(asks)
        strategy.tell(some)
        told += some
    return told


def best(told: Sequence[Reading]) -> tuple[float, int]:
    """Best travel in an engine and how many engine walks there were."""
    engine = [reading.score for reading in told if not reading.ask.coarse]
    return float(np.nanmax(engine)), len(engine)


def nine(folder: Path) -> None:
    text = row_text(LEGS)
    robot = short_robot(text, SEGMENTS)
    space = WiringSpace.of(robot)
    smooth = SmoothWaves.of(robot, space).wirings()
    scores = Scores(folder, text)
    pool = np.array([r.score for r in played(RandomDraws(space, POOL, 0, SHORT_PERIODS), scores)])
    print("| seed | best of 400 at random | gp | over random | screen | over random |")
    print("|---|---|---|---|---|---|")
    leads = []
    for seed in SEEDS:
        drawn = float(np.nanmax(np.random.default_rng(seed).choice(pool, WALKS, replace=False)))
        gp, gp_walks = best(played(ProcessSearch(space, smooth, WALKS, seed), scores, short_only=True))
        begin = time.perf_counter()
        told = played(ScreenSearch(space, smooth, None, seed), scores)
        screen, walks = best(told)
        leads.append((gp / drawn - 1, screen / drawn - 1))
        print(
            f"| {seed} | {drawn * 1e3:.2f} mm | {gp * 1e3:.2f} mm ({gp_walks} walks) | {100 * leads[-1][0]:+.1f} % |"
            f" {screen * 1e3:.2f} mm ({walks} walks, {len(told) - walks} coarse ones, {time.perf_counter() - begin:.0f} s)"
            f" | {100 * leads[-1][1]:+.1f} % |",
            flush=True,
        )
    scores.close()
    for name, of in zip(("gp", "screen"), zip(*leads, strict=True), strict=True):
        print(f"\n{name}: worst {100 * min(of):+.1f} %, median {100 * statistics.median(of):+.1f} %")
