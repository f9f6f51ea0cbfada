"""What a search costs against walking everything: strategies replayed on tables of real walks, and how cost grows.

Run from the root; every command prints a Markdown table. Tables are kept in FOLDER, made once by ordinary searches:

    python tests/benchmarks/search_cost.py robots FOLDER            # writes the robots' files
    gaitlab search FOLDER/NAME.toml --out FOLDER/NAME --no-pictures --finalists 0      # once per robot; an hour, or minutes
    python tests/benchmarks/search_cost.py curves FOLDER            # strategies against the tables, 10 seeds [--strategy NAME]
    python tests/benchmarks/search_cost.py screening FOLDER         # how well short and coarse walks rank
    python tests/benchmarks/search_cost.py nine FOLDER              # nine legs, nine stages: gp and screen against random draws
    python tests/benchmarks/search_cost.py workers                  # two processes and a two-worker cluster against one
    python tests/benchmarks/search_cost.py growth                   # cost against the number of stages
"""

from __future__ import annotations

import argparse
import json
import math
import sqlite3
import statistics
import sys
import time
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from functools import cache
from pathlib import Path

import numpy as np
from scipy.stats import spearmanr

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))
sys.path.insert(0, str(Path(__file__).resolve().parents[1]))

from benchmarks.search_robots import robot_files

from gaitlab.gait.records import Walk
from gaitlab.robot.reader import read_robot
from gaitlab.robot.records import Robot
from gaitlab.search.coarse import coarse_walks_of
from gaitlab.search.evaluate import Job, evaluate
from gaitlab.search.schema import walk_from, wiring_from_ledger
from gaitlab.search.settings import BUNDLE, WalkSettings
from gaitlab.search.strategies.ask_tell import Ask, Reading, Strategy
from gaitlab.search.strategies.choice import StrategyChoice, strategy_of
from gaitlab.search.strategies.process_search import ProcessSearch, ProcessTuning
from gaitlab.search.strategies.race import Race
from gaitlab.search.strategies.random_draws import RandomDraws
from gaitlab.search.strategies.screen_search import ScreenSearch
from gaitlab.wiring.smooth import SmoothWaves
from gaitlab.wiring.space import WiringSpace
from gaitlab.wiring.wiring import Wiring

SEEDS = range(100, 110)  # not those that settings were chosen with
CLOSE = 0.03  # "within 3 % of the best"
TIMED = 8  # settled walks that are timed against coarse ones


@dataclass(frozen=True)
class Table:
    """Every distinct wiring of one robot, walked until settled."""

    label: str
    robot: Robot
    space: WiringSpace
    walks: dict[Wiring, Walk]
    coarse_m: dict[Wiring, float]
    coarse_share: float  # processor time of a coarse walk, rings included, over that of a settled walk

    @classmethod
    def of(cls, folder: Path, name: str) -> Table:
        robot = read_robot(folder / f"{name}.toml").robot
        with sqlite3.connect(folder / name / "ledger.sqlite") as connection:
            rows = connection.execute("SELECT wiring, walk FROM walks WHERE level = 'settled'").fetchall()
        walks = {wiring_from_ledger(wiring): walk_from(walk) for wiring, walk in rows}
        space = WiringSpace.of(robot)
        document_json = json.dumps(read_robot(folder / f"{name}.toml").document)
        coarse_m, coarse_s = coarse_walks(document_json, robot, list(space))
        settled_s = settled_time(document_json, list(space)[:: max(1, space.distinct // TIMED)][:TIMED])
        return cls(name, robot, space, walks, coarse_m, coarse_s / settled_s)

    @property
    def complete(self) -> bool:
        return len(self.walks) == self.space.distinct

    def reading(self, ask: Ask) -> Reading:
        """What the ask would have read: a walk of few periods is the beginning of the settled one."""
        walk = self.walks[ask.wiring]
        if ask.coarse:
            return Reading(ask, self.coarse_m[ask.wiring], math.nan, walk.outcome)
        if ask.settled:
            return Reading(ask, walk.travel_m, walk.travel_scatter_m, walk.outcome)
        long_enough = len(walk.travels_m) >= ask.periods
        score = walk.travels_m[ask.periods - 1] if long_enough else math.nan
        return Reading(ask, score, math.nan, walk.outcome)

    def cost_s(self, ask: Ask) -> float:
        """Simulated seconds of the ask; of a coarse walk, those that its processor time would pay for in the engine."""
        walk = self.walks[ask.wiring]
        if ask.coarse:
            return self.coarse_share * self.total_s / len(self.walks)
        if ask.settled:
            return walk.simulated_s
        return min(walk.simulated_s, self.robot.numerics.settle_s + ask.periods * walk.period_s)

    @property
    def best_m(self) -> float:
        return max(walk.travel_m for walk in self.walks.values() if walk.travel_m == walk.travel_m)

    @property
    def total_s(self) -> float:
        return sum(walk.simulated_s for walk in self.walks.values())


def coarse_walks(document_json: str, robot: Robot, wirings: list[Wiring]) -> tuple[dict[Wiring, float], float]:
    """Travel by coarse walk [m], and processor time of one [s]."""
    begin, found = time.process_time(), dict[Wiring, float]()
    for k in range(0, len(wirings), BUNDLE):
        bundle = wirings[k : k + BUNDLE]
        walks = coarse_walks_of(document_json, robot, bundle)
        found |= zip(bundle, (walk.travel_m for walk in walks), strict=True)
    return found, (time.process_time() - begin) / len(wirings)


def settled_time(document_json: str, wirings: list[Wiring]) -> float:
    """Processor time of a settled walk [s]."""
    begin = time.process_time()
    for wiring in wirings:
        evaluate(Job(document_json, wiring, WalkSettings(), ""))
    return (time.process_time() - begin) / len(wirings)


@dataclass(frozen=True)
class Played:
    """One replayed search: share of the exhaustive cost, engine walks, and its best settled travel over the true best."""

    share: float
    walks: int
    found: float


def played(table: Table, strategy: Strategy) -> Played:
    told: list[Reading] = []
    while asks := strategy.ask():
        readings = [table.reading(ask) for ask in asks]
        strategy.tell(readings)
        told += readings
    settled = [r.score for r in told if r.ask.settled and not r.failed]
    cost = sum(table.cost_s(r.ask) for r in told)
    engine = sum(not r.ask.coarse for r in told)
    return Played(cost / table.total_s, engine, max(settled, default=math.nan) / table.best_m)


Maker = Callable[[Table, int, int], Strategy]


def whole(name: str) -> Maker:
    """The strategy as the command runs it, with the walks that the ranking is owed (smooth and reversed waves)."""

    def made(table: Table, budget: int, seed: int) -> Strategy:
        waves = SmoothWaves.of(table.robot, table.space)
        return strategy_of(StrategyChoice(name, budget, seed), table.space, waves)

    return made


def gp_alone(tuning: ProcessTuning) -> Maker:
    def made(table: Table, budget: int, seed: int) -> Strategy:
        smooth = SmoothWaves.of(table.robot, table.space).wirings()
        return ProcessSearch(table.space, smooth, budget, seed, tuning)

    return made


def screen_alone(table: Table, budget: int, seed: int) -> Strategy:
    return ScreenSearch(table.space, SmoothWaves.of(table.robot, table.space).wirings(), budget, seed)


MAKERS: dict[str, Maker] = {
    "screen": screen_alone,
    "gp": gp_alone(ProcessTuning()),
    "gp and closing walks": whole("gp"),
    "race": lambda table, budget, seed: Race(table.space, budget, seed),
    "random, settled": lambda table, budget, seed: RandomDraws(table.space, budget, seed),
}
BUDGETS = (
    0.002,
    0.01,
    0.02,
    0.04,
    0.06,
    0.08,
    0.10,
    0.12,
    0.145,
    0.17,
    0.20,
    0.25,
    0.35,
    0.5,
    0.75,
    1.0,
)  # walks as a share of the wirings


def curve(table: Table, maker: Maker, least: int) -> Iterator[str]:
    """Lines of a budget curve, until all seeds are close."""
    for budget in sorted({max(least, round(share * table.space.distinct)) for share in BUDGETS}):
        games = [played(table, maker(table, budget, seed)) for seed in SEEDS]
        close = sum(game.found >= 1 - CLOSE for game in games)
        cost, found = (statistics.median(values) for values in zip(*((g.share, g.found) for g in games), strict=True))
        walks = statistics.median(game.walks for game in games)
        yield f"{walks:.0f} | {100 * cost:.1f} % | {100 * found:.1f} % | {close} of {len(games)}"
        if close == len(games):
            return


def curves(folder: Path, wanted: str) -> None:
    print("| robot | strategy | walks | simulated s of exhaustive | best found (median) | within 3 % |")
    print("|---|---|---|---|---|---|")
    for table in tables(folder):
        for label, maker in MAKERS.items():
            if wanted not in (label, "all"):
                continue
            for line in curve(table, maker, 1 if label == "screen" else 2):
                print(f"| {table.label} ({table.space.distinct}) | {label} | {line} |", flush=True)


@cache
def tables(folder: Path) -> list[Table]:
    """Every complete table in the folder."""
    names = sorted(path.stem for path in folder.glob("*.toml"))
    found = [Table.of(folder, name) for name in names if (folder / name / "ledger.sqlite").exists()]
    return [table for table in found if table.complete]


def screening(folder: Path) -> None:
    print("| robot | short walk | rank correlation with settled | rank of the true best |")
    print("|---|---|---|---|")
    for table in tables(folder):
        measured = [w for w in table.walks.values() if w.travel_m == w.travel_m]
        settled = np.array([walk.travel_m for walk in measured])
        for periods in (1, 2, 3):
            short = np.array([walk.travels_m[min(periods, len(walk.travels_m)) - 1] for walk in measured])
            place = int(np.sum(short > short[int(np.argmax(settled))])) + 1
            print(f"| {table.label} | period {periods} | {spearmanr(short, settled).statistic:.4f} | {place} |")
        coarse = np.array([table.coarse_m[wiring] for wiring in table.walks])
        both = np.isfinite(coarse) & np.array([w.travel_m == w.travel_m for w in table.walks.values()])
        full = np.array([w.travel_m for w in table.walks.values()])
        place = int(np.sum(coarse > coarse[int(np.nanargmax(full))])) + 1
        rank = spearmanr(coarse[both], full[both]).statistic
        print(f"| {table.label} | coarse, {100 * table.coarse_share:.1f} % of the time | {rank:.4f} | {place} |")


def tune(folder: Path, name: str) -> None:
    """Settings of the process search on one table, at the cost that the promise allows."""
    table = Table.of(folder, name)
    print("| first | batch | daring | settled share | walks | cost | worst | mean | within 3 % |")
    print("|---|---|---|---|---|---|---|---|---|")
    for first in (8, 16, 24):
        for batch in (2, 4, 8):
            for daring in (0.5, 1.0, 1.5, 2.0, 3.0):
                for settled in (0.04, 0.06, 0.1):
                    tuning = ProcessTuning(first, batch, daring, settled)
                    games = [played(table, gp_alone(tuning)(table, round(table.space.distinct / 8), s)) for s in SEEDS]
                    found = [game.found for game in games]
                    close = sum(value >= 1 - CLOSE for value in found)
                    cost = statistics.median(game.share for game in games)
                    print(
                        f"| {first} | {batch} | {daring} | {settled} | {games[0].walks} | {100 * cost:.1f} % | {min(found):.3f} |"
                        f" {statistics.mean(found):.3f} | {close} |",
                        flush=True,
                    )


@cache
def arguments() -> argparse.Namespace:
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("command", choices=["robots", "curves", "screening", "tune", "nine", "workers", "growth"])
    parser.add_argument("folder", nargs="?", type=Path)
    parser.add_argument("--robot", default="tray_row7")
    parser.add_argument("--strategy", default="all", choices=[*MAKERS, "all"])
    return parser.parse_args()


def main() -> None:
    given = arguments()
    if given.command in ("workers", "growth"):
        from benchmarks import search_growth

        {"workers": search_growth.workers, "growth": search_growth.growth}[given.command]()
        return
    if given.folder is None:
        raise SystemExit(f"{given.command} needs FOLDER")
    given.folder.mkdir(parents=True, exist_ok=True)
    if given.command == "robots":
        for name, text in robot_files().items():
            (given.folder / f"{name}.toml").write_text(text, encoding="utf-8")
            print(f"gaitlab search {given.folder / name}.toml --out {given.folder / name} --no-pictures --finalists 0")
    elif given.command == "nine":
        from benchmarks.search_nine import nine

        nine(given.folder)
    elif given.command == "tune":
        tune(given.folder, given.robot)
    elif given.command == "curves":
        curves(given.folder, given.strategy)
    else:
        screening(given.folder)


if __name__ == "__main__":
    main()
