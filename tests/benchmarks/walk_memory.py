"""Memory of one process over thousands of walks: what a walk leaves behind would show as growth. Prints a Markdown table.

Run from the root (each walk is one short period of its own wiring, in a physics world of its own):

    python tests/benchmarks/walk_memory.py             # 2000 walks
    python tests/benchmarks/walk_memory.py --walks 200
"""

from __future__ import annotations

import gc
import sys
import time
from itertools import cycle, islice
from pathlib import Path

import click

ROOT = Path(__file__).resolve().parents[2]
sys.path.insert(0, str(ROOT))

from gaitlab.gait.walk import walk_waves
from gaitlab.ring.sequence import ideal_waves
from gaitlab.robot.reader import read_robot
from gaitlab.wiring.space import WiringSpace

PERIOD_S, VACUUM_PA = 0.2, 45e3  # short, because the memory of a walk does not hang on its length
WARM_UP = 100  # walks after which libraries have filled their caches; chosen by us


def resident_kB() -> int:
    """Memory of this process that is in use now (Linux)."""
    line = next(x for x in Path("/proc/self/status").read_text().splitlines() if x.startswith("VmRSS"))
    return int(line.split()[1])


@click.command()
@click.option("--walks", default=2000, show_default=True)
@click.option("--robot", "robot_path", default=str(ROOT / "robots" / "tray_row5.toml"))
def main(walks: int, robot_path: str) -> None:
    """Walks and watches the memory; exit code 1 if it grows by more than a kilobyte a walk."""
    robot = read_robot(robot_path).robot
    seen: list[tuple[int, int]] = []
    begin = time.perf_counter()
    for number, wiring in enumerate(islice(cycle(WiringSpace.of(robot)), walks), start=1):
        waves = ideal_waves(robot, wiring, "natural", PERIOD_S, VACUUM_PA)
        walk_waves(robot, waves, periods=1)
        if number % max(1, walks // 10) == 0 or number == WARM_UP:
            gc.collect()
            seen.append((number, resident_kB()))
            click.echo(f"{number} walks, {seen[-1][1]} kB, {time.perf_counter() - begin:.0f} s", err=True)
    settled = [(n, kB) for n, kB in seen if n >= WARM_UP] or seen
    (first, low), (last, high) = settled[0], settled[-1]
    growth = (high - low) / max(1, last - first)
    click.echo("| walks in one process | memory after warm-up MB | at the end MB | growth kB a walk |")
    click.echo("|---|---|---|---|")
    click.echo(f"| {walks} | {low / 1024:.1f} | {high / 1024:.1f} | {growth:.3f} |")
    sys.exit(1 if growth > 1.0 else 0)


if __name__ == "__main__":
    main()
