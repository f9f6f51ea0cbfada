"""Cost of a spread: wall time of draws × wirings, one worker against two, and the parent's memory against the number of draws.

Run from the root: python tests/benchmarks/spread_speed.py [--draws 64] [--pair-draws 8]
"""

from __future__ import annotations

import argparse
import os
import resource
import sys
import time
import tracemalloc
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from gaitlab.robot.reader import read_robot
from gaitlab.search.evaluate import Evaluation, Job, evaluate, failed_walk
from gaitlab.search.workers import InProcess, local_workers
from gaitlab.trust.spread import Request, Spread, spread
from gaitlab.trust.tolerances import tolerances_of
from gaitlab.wiring.wiring import wiring_from_text

ROOT = Path(__file__).resolve().parents[2]
WIRINGS = ("a=1 b=3 c=5 d=2 e=4", "a=1 b=4 c=2 d=5 e=3", "a=1 b=2 c=4 d=3 e=5")
WALL_MOST_S = 240.0
RATIO_LEAST = 1.8
GROWTH_MOST_KB = 1.5  # per draw of three wirings: its outcomes and its point; a document alone takes 12 kB


def request(draws: int) -> Request:
    """The three wirings of the five-legged demo robot under the default tolerances."""
    file = read_robot(ROOT / "robots" / "tray_row5.toml")
    wirings = tuple(wiring_from_text(text, file.robot.inlets(), 5) for text in WIRINGS)
    return Request(tolerances_of(file.document, file.robot.tolerances), wirings, draws, 1)


def timed(draws: int, workers: int) -> tuple[Spread, float]:
    """A spread and its wall seconds, start of the workers included."""
    pool = local_workers(evaluate, workers)
    begin = time.perf_counter()
    try:
        return spread(request(draws), pool), time.perf_counter() - begin
    finally:
        pool.close()


def nothing(job: Job) -> Evaluation:
    """Stands in for a walk where only the bookkeeping is measured."""
    return Evaluation(failed_walk(job, "fell_over", ""), 0.0)


def peak_kB(draws: int) -> float:
    """Peak memory of the parent's bookkeeping over this many draws."""
    tracemalloc.start()
    spread(request(draws), InProcess(nothing))
    peak = tracemalloc.get_traced_memory()[1]
    tracemalloc.stop()
    return peak / 1e3


def main() -> int:
    """Measures and prints; exit code 1 where a limit is missed."""
    options = argparse.ArgumentParser(description=__doc__)
    options.add_argument("--draws", type=int, default=64)
    options.add_argument("--pair-draws", type=int, default=8, help="draws of the comparison of one worker with two")
    given = options.parse_args()
    before = resource.getrusage(resource.RUSAGE_CHILDREN)
    found, wall_s = timed(given.draws, 2)
    after = resource.getrusage(resource.RUSAGE_CHILDREN)
    cpu_s = after.ru_utime - before.ru_utime
    walks = given.draws * len(WIRINGS)
    print(f"{walks} walks, two workers: {wall_s:.1f} s wall, {cpu_s:.1f} s of processor, {cpu_s / walks:.2f} s a walk")
    for w in found.wirings:
        q = w.summary.travel_m
        print(
            f"  {w.wiring.text()}: {q.p05 * 1e3:.2f} / {q.p50 * 1e3:.2f} / {q.p95 * 1e3:.2f} mm per period, {dict(w.summary.outcomes)}"
        )
    one_s, two_s = timed(given.pair_draws, 1)[1], timed(given.pair_draws, 2)[1]
    print(f"two workers against one: {one_s / two_s:.2f} times as fast (load of the machine {os.getloadavg()[0]:.1f})")
    peak_kB(64)  # imports and caches are made once
    few, many = peak_kB(256), peak_kB(2048)
    growth = (many - few) / (2048 - 256)
    print(f"parent's memory: {few:.0f} kB at 256 draws, {many:.0f} kB at 2048: {growth:.2f} kB a draw of three wirings")
    quiet_s = cpu_s / 2
    print(f"on two quiet cores: {quiet_s:.0f} s (limit {WALL_MOST_S:.0f} s)")
    missed = [quiet_s > WALL_MOST_S, one_s / two_s < RATIO_LEAST, growth > GROWTH_MOST_KB]
    return int(any(missed))


if __name__ == "__main__":
    sys.exit(main())
