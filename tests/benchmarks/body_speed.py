"""What the step loop costs over bare physics, how fast a walk runs, and whether a process that walks on and on stays small.

    python tests/benchmarks/body_speed.py [--walks N]

The bare cost is the time inside stepSimulation in the very run whose loop is timed, so both see the same contacts; medians over
the steps, so that other programs do not count. Real-time factor and memory are this machine's.
"""

from __future__ import annotations

import argparse
import resource
import sys
import time
from dataclasses import replace
from pathlib import Path
from types import SimpleNamespace

import numpy as np
import pybullet

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from gaitlab.body import bullet
from gaitlab.body.engine import EngineSettings, advance
from gaitlab.body.model import body_model
from gaitlab.gait.walk import walk_waves
from gaitlab.ring.waves import Waves
from gaitlab.robot.parts import Leg
from gaitlab.robot.reader import read_robot
from gaitlab.robot.records import Robot

ROW5 = read_robot(Path(__file__).resolve().parents[2] / "robots" / "tray_row5.toml").robot
STEPS = 4000


class Stopwatch:
    """A clock round stepSimulation: `module` is pybullet with that one function timed."""

    def __init__(self) -> None:
        self.starts_s: list[float] = []
        self.ends_s: list[float] = []
        self.module = SimpleNamespace(**vars(pybullet))
        self.module.stepSimulation = self.step

    def step(self, physicsClientId: int) -> None:
        """One step, timed."""
        self.starts_s.append(time.perf_counter())
        pybullet.stepSimulation(physicsClientId=physicsClientId)
        self.ends_s.append(time.perf_counter())

    @property
    def bare_s(self) -> float:
        """A step of bare physics."""
        return float(np.median(np.subtract(self.ends_s, self.starts_s)))

    @property
    def loop_s(self) -> float:
        """From one step to the next."""
        return float(np.median(np.diff(self.starts_s)))


def legged(rows: int, segments: int) -> Robot:
    """Legs in pairs (or in the row of five) with so many turning joints each, and a trunk that they carry."""
    bellows = replace(ROW5.bellows[0], segments=segments)
    if rows == 5:
        return replace(ROW5, bellows=(bellows,))
    places = [(0.034 * (i - (rows / 2 - 1) / 2), y) for i in range(rows // 2) for y in (0.03, -0.03)]
    legs = tuple(
        Leg(f"l{index}", "trunk", (x, y, -0.006), "pad", 0.0, 0.0, ROW5.body.legs[0].units)
        for index, (x, y) in enumerate(places)
    )
    units = [replace(leg.units[0], inlet=leg.name) for leg in legs]
    legs = tuple(replace(leg, units=(unit,)) for leg, unit in zip(legs, units, strict=True))
    blocks = (replace(ROW5.body.blocks[0], size_m=(0.22, 0.06, 0.012), mass_kg=0.12),)
    feet = (replace(ROW5.feet[0], spacing_m=0.0),)
    return replace(ROW5, bellows=(bellows,), feet=feet, body=replace(ROW5.body, legs=legs, blocks=blocks))


def waves_of(robot: Robot, period_s: float) -> Waves:
    """Raised cosines, every inlet a little later than the one before."""
    phase = np.arange(200) / 200.0 - np.linspace(0.0, 0.8, len(robot.inlets()))[:, None]
    return Waves(period_s, robot.inlets(), 24e3 * (1.0 - np.cos(2.0 * np.pi * phase)))


def loop_ratio(robot: Robot) -> tuple[int, float, float]:
    """Joints, microseconds of a bare step, and loop time over the time inside stepSimulation."""
    clock = Stopwatch()
    engine = bullet.BulletEngine(body_model(robot), EngineSettings())
    wave = waves_of(robot, 1.0).vacuum_Pa
    rows = wave[:, np.arange(STEPS) // 5 % wave.shape[1]].T
    advance(engine, rows[:500])
    bullet.pybullet = clock.module
    failed = advance(engine, rows)
    bullet.pybullet = pybullet
    engine.close()
    if failed:
        raise SystemExit(f"the body {failed}")
    return len(engine.model.joints), clock.bare_s * 1e6, clock.loop_s / clock.bare_s


def walk_ratio(robot: Robot) -> tuple[float, float]:
    """A whole walk with its measures over the bare steps in it, and simulated over processor time."""
    clock = Stopwatch()
    bullet.pybullet = clock.module
    started = time.process_time()
    walked, _ = walk_waves(robot, waves_of(robot, 1.0), periods=4)
    spent = time.process_time() - started
    bullet.pybullet = pybullet
    return spent / (clock.bare_s * len(clock.starts_s)), walked.simulated_s / spent


def resident_MB() -> float:
    """Memory of this process now."""
    for line in Path("/proc/self/status").read_text().splitlines():
        if line.startswith("VmRSS"):
            return float(line.split()[1]) / 1024.0
    return resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024.0


def memory_of_many(robot: Robot, walks: int) -> list[float]:
    """Memory [MB] after each tenth of so many short walks in this process."""
    short = replace(robot, numerics=replace(robot.numerics, settle_s=0.05))
    seen = []
    for index in range(walks):
        walk_waves(short, waves_of(robot, 0.1), periods=1)
        if (index + 1) % max(1, walks // 10) == 0:
            seen.append(resident_MB())
    return seen


def main() -> None:
    """Prints the tables."""
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("--walks", type=int, default=1000, help="walks of the memory test")
    options = parser.parse_args()
    print("| body | joints | bare step | loop over bare step |\n|---|---|---|---|")
    for rows, segments in ((5, 4), (5, 8), (12, 6)):
        joints, bare, ratio = loop_ratio(legged(rows, segments))
        print(f"| {rows} legs of {segments} | {joints} | {bare:.0f} µs | {ratio:.2f} |", flush=True)
    ratio, factor = walk_ratio(ROW5)
    print(f"\nwalk of tray_row5 with its measures: {ratio:.2f} × bare steps, {factor:.1f} × real time", flush=True)
    seen = memory_of_many(ROW5, options.walks)
    print(f"memory over {options.walks} walks in one process, MB: " + ", ".join(f"{mb:.1f}" for mb in seen))


if __name__ == "__main__":
    main()
