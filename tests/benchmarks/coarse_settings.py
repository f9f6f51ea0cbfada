"""Does the order of coarse walks hang on their settings? Every wiring of some robots, coarse and settled in Bullet.

Run from the root; prints a Markdown table (minutes):

    python tests/benchmarks/coarse_settings.py [ROBOT.toml ...]
"""

from __future__ import annotations

import sys
import time
from collections.abc import Iterator
from contextlib import ExitStack, contextmanager
from dataclasses import dataclass
from pathlib import Path
from unittest.mock import patch

import numpy as np
from scipy.stats import spearmanr

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from gaitlab.body import coarse
from gaitlab.gait import coarse_walk
from gaitlab.gait.walk import walk
from gaitlab.ring.solve import ring_run
from gaitlab.ring.waves import RingRun
from gaitlab.robot.reader import read_robot
from gaitlab.robot.records import Robot
from gaitlab.wiring.space import WiringSpace

ROBOTS = Path(__file__).resolve().parents[2] / "robots"
NAMES = ("tray_row5", "hex6_ring3", "quad_spine")
SETTINGS: dict[str, dict[tuple[object, str], float]] = {
    "as shipped": {},
    "1 segment": {(coarse_walk, "SEGMENTS"): 1},
    "4 segments": {(coarse_walk, "SEGMENTS"): 4},
    "48 steps a period": {(coarse_walk, "STEPS"): 48},
    "128 steps a period": {(coarse_walk, "STEPS"): 128},
    "feet sink half as far": {(coarse, "SINK_M"): coarse.SINK_M / 2},
    "feet sink twice as far": {(coarse, "SINK_M"): coarse.SINK_M * 2},
    "feet give half as much": {(coarse, "GIVE"): coarse.GIVE * 2},
    "feet give twice as much": {(coarse, "GIVE"): coarse.GIVE / 2},
    "steps solved ten times closer": {(coarse, "CLOSE"): coarse.CLOSE / 10},
}


@dataclass(frozen=True)
class Settled:
    """One robot's wirings walked in Bullet: their rings, travels [m] and processor time of a ring and walk [s]."""

    robot: Robot
    rings: list[RingRun]
    travels_m: np.ndarray
    each_s: float


def settled(path: Path) -> Settled:
    robot = read_robot(path).robot
    begin, wirings = time.process_time(), list(WiringSpace.of(robot))
    rings = [ring_run(robot, wiring) for wiring in wirings]
    travels = [walk(robot, wiring, ring)[0].travel_m for wiring, ring in zip(wirings, rings, strict=True)]
    return Settled(robot, rings, np.array(travels), (time.process_time() - begin) / len(wirings))


@contextmanager
def changed(settings: dict[tuple[object, str], float]) -> Iterator[None]:
    with ExitStack() as stack:
        for (module, name), value in settings.items():
            stack.enter_context(patch.object(module, name, value))
        yield


def line(name: str, label: str, full: Settled) -> str:
    begin = time.process_time()
    travels = np.array([found.travel_m for found in coarse_walk.coarse_walks(full.robot, full.rings)])
    each_s = (time.process_time() - begin) / len(travels)
    both = np.isfinite(travels) & np.isfinite(full.travels_m)
    rank = spearmanr(travels[both], full.travels_m[both]).statistic
    place = int(np.sum(travels > travels[int(np.nanargmax(full.travels_m))])) + 1
    best = f"{np.nanmax(travels) * 1e3:.1f}, {np.nanmax(full.travels_m) * 1e3:.1f}"
    return f"| {name} ({len(travels)}) | {label} | {rank:.3f} | {place} | {best} | {100 * each_s / full.each_s:.1f} % |"


def main() -> None:
    paths = [Path(word) for word in sys.argv[1:]] or [ROBOTS / f"{name}.toml" for name in NAMES]
    print(
        "| robot (wirings) | coarse walks | rank correlation | place of the true best | best mm, coarse and settled | time |"
    )
    print("|---|---|---|---|---|---|")
    for path in paths:
        full = settled(path)
        for label, settings in SETTINGS.items():
            with changed(settings):
                print(line(path.stem, label, full), flush=True)


if __name__ == "__main__":
    main()
