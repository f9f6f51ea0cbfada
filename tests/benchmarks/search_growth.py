"""How a search's cost grows with the stages of the ring, and what two processes or a cluster of two workers gain."""

from __future__ import annotations

import json
import math
import os
import subprocess
import sys
import tempfile
import time
import tomllib
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import replace
from pathlib import Path

import numpy as np
from benchmarks.search_robots import row_text

from gaitlab.robot.reader import read_robot, robot_from_document
from gaitlab.search.cluster import cluster_workers
from gaitlab.search.evaluate import Evaluate, Job, evaluate
from gaitlab.search.ledger_file import LEDGER_FILE, created
from gaitlab.search.run import SearchTask, Step, run_search
from gaitlab.search.settings import BUNDLE, WalkSettings
from gaitlab.search.strategies.candidates import LISTED_MAX
from gaitlab.search.strategies.choice import StrategyChoice, strategy_of
from gaitlab.search.strategies.coarse_look import MOST
from gaitlab.search.strategies.process_search import default_budget
from gaitlab.search.strategies.screen_search import default_budget as screen_budget
from gaitlab.search.workers import Workers, local_workers
from gaitlab.wiring.smooth import SmoothWaves
from gaitlab.wiring.space import WiringSpace

ROOT = Path(__file__).resolve().parents[2]
MEASURED = (3, 5, 7, 9)
ON_PAPER = (11, 13, 15)
CORES = (2, 1000)
DAY_s = 86_400.0
SHORT_SHARE = 0.55  # of a settled walk that a short one takes, by simulated time at periods of 1 to 2 s


def growth() -> None:
    """Distinct wirings exactly, seconds per walk measured up to nine and by fitted power laws beyond."""
    seconds = {legs: settled_walk_s(legs) for legs in MEASURED}
    coarse = {legs: coarse_walk_s(legs) for legs in MEASURED}
    slope, level = np.polyfit(np.log(list(seconds)), np.log(list(seconds.values())), 1)
    coarse_slope, coarse_level = np.polyfit(np.log(list(coarse)), np.log(list(coarse.values())), 1)
    print(
        "| stages = legs | distinct wirings | CPU s a walk | a coarse walk | walk all, 2 cores | walk all, 1000 cores | "
        "screen, walks | screen, 2 cores | gp, walks | gp, 2 cores |"
    )
    print("|---|---|---|---|---|---|---|---|---|---|")
    for legs in (*MEASURED, *ON_PAPER):
        each = seconds.get(legs) or math.exp(level + slope * math.log(legs))
        coarse_each = coarse.get(legs) or math.exp(coarse_level + coarse_slope * math.log(legs))
        space = WiringSpace.of(robot_from_document(tomllib.loads(row_text(legs))))
        times = [duration(space.distinct * each / cores) for cores in CORES]
        budget, settled = default_budget(space), screen_budget(space)
        looked_at = space.distinct if space.distinct <= LISTED_MAX else MOST
        screen_s = looked_at * coarse_each + settled * each
        mark = "" if legs in seconds else " (fit)"
        print(
            f"| {legs} | {space.distinct} | {each:.2f}{mark} | {coarse_each:.3f}{mark} | {times[0]} | {times[1]} | "
            f"{looked_at} + {settled} | {duration(screen_s / 2)} | {budget} | {duration(SHORT_SHARE * budget * each / 2)} |",
            flush=True,
        )
    print(
        f"\nCPU seconds a walk grow as stages^{slope:.2f}, of a coarse one as stages^{coarse_slope:.2f}; distinct wirings as (N − 1)!."
    )


def settled_walk_s(legs: int) -> float:
    """CPU time of one ring and settled walk of the smooth wave."""
    document = tomllib.loads(row_text(legs))
    robot = robot_from_document(document)
    wiring = SmoothWaves.of(robot, WiringSpace.of(robot)).wirings()[0]
    begin = time.process_time()
    evaluate(Job(json.dumps(document), wiring, WalkSettings(), ""))
    return time.process_time() - begin


def coarse_walk_s(legs: int) -> float:
    """CPU time of one coarse walk in a bundle of wirings drawn at random, its one ring left out."""
    document = tomllib.loads(row_text(legs))
    space, rng = WiringSpace.of(robot_from_document(document)), np.random.default_rng(1)
    first, *rest = (space.sampled(rng) for _ in range(BUNDLE))
    job = Job(json.dumps(document), first, WalkSettings(coarse=True), "")
    evaluate(job)
    begin = time.process_time()
    evaluate(replace(job, more=tuple(rest)))
    return (time.process_time() - begin) / BUNDLE


def duration(seconds: float) -> str:
    for limit, unit, size in (
        (90, "s", 1),
        (5400, "min", 60),
        (48 * 3600, "h", 3600),
        (2 * 365 * DAY_s, "days", DAY_s),
    ):
        if seconds < limit:
            return f"{two_digits(seconds / size)} {unit}"
    return f"{two_digits(seconds / (365 * DAY_s))} years"


def two_digits(value: float) -> str:
    """A number to two digits, without an exponent."""
    return f"{float(f'{value:.2g}'):.6g}"


def workers() -> None:
    """Wall time of the whole of tray_row5 by one process, by two, and by a cluster of two workers on loopback."""
    times = {
        "1 process": timed(lambda run: local_workers(run, 1)),
        "2 processes": timed(lambda run: local_workers(run, 2)),
    }
    with tempfile.TemporaryDirectory() as folder, cluster(Path(folder)) as address:
        times["cluster of 2 workers"] = timed(lambda run: cluster_workers(run, address))
    print("| workers | wall s for 24 walks | speed-up |")
    print("|---|---|---|")
    for name, seconds in times.items():
        print(f"| {name} | {seconds:.1f} | {times['1 process'] / seconds:.2f} |")


def timed(start: Callable[[Evaluate], Workers]) -> float:
    """Wall time of an exhaustive search from the first walk's submission to the last row; processes start within it."""
    file = read_robot(ROOT / "robots" / "tray_row5.toml")
    task = SearchTask.of(file.document, file.robot)
    strategy = strategy_of(StrategyChoice(), task.space, SmoothWaves.of(task.robot, task.space))
    with tempfile.TemporaryDirectory() as folder, created(Path(folder) / LEDGER_FILE, task.identity) as ledger:
        some = start(evaluate)
        begin = time.perf_counter()
        run_search(task, strategy, ledger, some, ignore)
        seconds = time.perf_counter() - begin
        some.close()
    return seconds


def ignore(step: Step) -> None:
    """Nobody watches."""


@contextmanager
def cluster(folder: Path) -> Iterator[str]:
    """A scheduler and two workers of one thread each on loopback, ended by their own ids."""
    environment = {**os.environ, "PYTHONPATH": str(ROOT), "OMP_NUM_THREADS": "1"}
    file = folder / "scheduler.json"
    words = [["scheduler", "--host", "127.0.0.1", "--port", "0", "--no-dashboard", "--scheduler-file", str(file)]]
    one = ["worker", "--scheduler-file", str(file), "--nthreads", "1", "--no-nanny", "--no-dashboard"]
    words += [[*one, "--local-directory", str(folder)]] * 2
    running = []
    try:
        for command in words:
            with (folder / "log").open("ab") as log:
                running.append(
                    subprocess.Popen(
                        [sys.executable, "-m", "dask", *command], env=environment, cwd=folder, stdout=log, stderr=log
                    )
                )
            while not file.is_file() or not file.read_text():
                time.sleep(0.1)
        address = json.loads(file.read_text())["address"]
        wait_for_workers(address)
        yield address
    finally:
        for process in reversed(running):
            process.terminate()
            process.wait(20)


def wait_for_workers(address: str) -> None:
    import distributed

    client = distributed.Client(address, timeout=30, set_as_default=False)
    client.wait_for_workers(2, timeout=60)
    client.close()
