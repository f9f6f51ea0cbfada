"""Does the order of wirings hang on numerical choices? Travel at half the step, half the inertia factor, nudged, in MuJoCo.

    python tests/benchmarks/convergence.py [ROBOT.toml …] [--wirings N] [--periods N]

For every robot (default: all in robots/) up to N wirings, evenly picked from all distinct ones, are walked in each variant
for the same number of periods, the last of them read. Printed as a Markdown table: Spearman's rank correlation with the file's
own settings over the wirings, and the largest change of travel among the file's best five, as a part of the best travel.
"""

from __future__ import annotations

import argparse
import itertools
import sys
import time
from collections.abc import Iterable
from pathlib import Path
from typing import Any

import numpy as np
from scipy.stats import spearmanr

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from gaitlab.gait.outcomes import WALKED
from gaitlab.gait.walk import walk
from gaitlab.ring.solve import ring_run
from gaitlab.ring.waves import RingRun
from gaitlab.robot.reader import read_robot
from gaitlab.robot.records import Robot
from gaitlab.wiring.space import WiringSpace
from gaitlab.wiring.wiring import Wiring

ROBOTS = Path(__file__).resolve().parents[2] / "robots"
TOP = 5


def variants(robot: Robot) -> dict[str, dict[str, Any]]:
    """Named ways to walk the same wiring."""
    step, factor = robot.numerics.step_s, robot.numerics.inertia_factor
    return {
        "as in the file": {},
        "half the step": {"step_s": 0.5 * step},
        "half the inertia factor": {"inertia_factor": 0.5 * factor},
        "start moved by 10 µm": {"nudge_m": 1e-5},
        "MuJoCo": {"engine": "mujoco"},
    }


def picked(space: WiringSpace, count: int) -> list[Wiring]:
    """Up to `count` distinct wirings, evenly spaced in the order in which they are listed."""
    every = max(1, space.distinct // count)
    return list(itertools.islice(itertools.islice(iter(space), 0, None, every), count))


def travels_mm(robot: Robot, runs: Iterable[tuple[Wiring, RingRun]], how: dict[str, Any], periods: int) -> np.ndarray:
    """Travel of the last period of each wiring, nan where the walk failed."""
    found = []
    for wiring, ring in runs:
        walked, _ = walk(robot, wiring, ring, periods=periods, **how)
        found.append(walked.travels_m[-1] * 1e3 if walked.outcome == WALKED else np.nan)
    return np.array(found)


def compared(base: np.ndarray, other: np.ndarray) -> tuple[float, float, int]:
    """Spearman of the order, largest change among the best five over the best travel, wirings failed in either."""
    both = np.isfinite(base) & np.isfinite(other)
    order = float(spearmanr(base[both], other[both]).statistic)
    best = np.argsort(-np.where(both, base, -np.inf))[:TOP]
    best = best[both[best]]
    return order, float(np.max(np.abs(other[best] - base[best])) / np.max(np.abs(base[best]))), int(np.sum(~both))


def table_of(path: Path, wirings: int, periods: int) -> list[str]:
    """Rows of one robot."""
    robot = read_robot(path).robot
    space = WiringSpace.of(robot)
    runs = [(wiring, ring_run(robot, wiring)) for wiring in picked(space, wirings)]
    rows, base = [], np.array([])
    for name, how in variants(robot).items():
        started = time.perf_counter()
        found = travels_mm(robot, runs, how, periods)
        spent = time.perf_counter() - started
        base = found if not how else base
        order, change, failed = compared(base, found)
        rows.append(
            f"| {robot.name} | {len(runs)} of {space.distinct} | {name} | {order:.3f} | {100 * change:.1f} % | "
            f"{np.nanmax(found):.2f} mm | {failed} | {spent:.0f} s |"
        )
        print(rows[-1], flush=True)
    return rows


def main() -> None:
    """Reads the options and prints the table."""
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("robots", nargs="*", type=Path, default=sorted(ROBOTS.glob("*.toml")))
    parser.add_argument("--wirings", type=int, default=24)
    parser.add_argument("--periods", type=int, default=4)
    options = parser.parse_args()
    print("| robot | wirings | variant | Spearman | change in the best five | best | failed | time |")
    print("|---|---|---|---|---|---|---|---|")
    for path in options.robots:
        table_of(path, options.wirings, options.periods)


if __name__ == "__main__":
    main()
