"""Nine legs on nine stages, 40 320 distinct wirings: 400 walks placed by the Gaussian process against 400 drawn at random.

The body is coarse (one segment a leg, see `search_coarse.py`) so that some three thousand walks are affordable. Both strategies
are judged by the second period's travel of the same walks. The random draws of all seeds come out of one pool of 600.
"""

from __future__ import annotations

import math
import statistics
from collections.abc import Sequence
from pathlib import Path

import numpy as np
from benchmarks.search_coarse import CoarseWalks, coarse_robot
from benchmarks.search_robots import row_text

from gaitlab.search.settings import SHORT_PERIODS
from gaitlab.search.strategies.ask_tell import Ask, Reading, Strategy
from gaitlab.search.strategies.process_search import ProcessSearch
from gaitlab.search.strategies.random_draws import RandomDraws
from gaitlab.wiring.smooth import SmoothWaves
from gaitlab.wiring.space import WiringSpace

LEGS = 9
SEGMENTS = 1
WALKS = 400
POOL = 600
SEEDS = range(5)


def readings(asks: Sequence[Ask], walks: CoarseWalks) -> list[Reading]:
    found = walks.travels([ask.wiring for ask in asks])
    scores = [travels[SHORT_PERIODS - 1] if travels else math.nan for travels in found]
    return [Reading(ask, score, math.nan, "") for ask, score in zip(asks, scores, strict=True)]


def short_scores(strategy: Strategy, walks: CoarseWalks) -> list[float]:
    """Scores of the short walks that a strategy asks for; its settled ones are not walked."""
    told: list[Reading] = []
    while asks := [ask for ask in strategy.ask() if ask.periods is not None]:
        some = readings(asks, walks)
        strategy.tell(some)
        told += some
    return [reading.score for reading in told]


def nine(folder: Path) -> None:
    text = row_text(LEGS)
    robot = coarse_robot(text, SEGMENTS)
    space = WiringSpace.of(robot)
    smooth = SmoothWaves.of(robot, space).wirings()
    walks = CoarseWalks(folder / "nine.jsonl", text, segments=SEGMENTS, periods=SHORT_PERIODS)
    pool = np.array(short_scores(RandomDraws(space, POOL, 0, SHORT_PERIODS), walks))
    print("| seed | best of 400 at random | best of 400 by gp | gp over random |")
    print("|---|---|---|---|")
    leads = []
    for seed in SEEDS:
        drawn = float(np.nanmax(np.random.default_rng(seed).choice(pool, WALKS, replace=False)))
        scores = short_scores(ProcessSearch(space, smooth, WALKS, seed), walks)
        found = float(np.nanmax(scores))
        leads.append(found / drawn - 1)
        print(
            f"| {seed} | {drawn * 1e3:.2f} mm | {found * 1e3:.2f} mm ({len(scores)}) | {100 * leads[-1]:+.1f} % |",
            flush=True,
        )
    walks.close()
    print(f"\nworst {100 * min(leads):+.1f} %, median {100 * statistics.median(leads):+.1f} %")
