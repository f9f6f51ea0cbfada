"""Spoils robot files for as long as wanted: each must end in a clean message or in a robot. Prints a Markdown table.

Run from the root:

    python tests/benchmarks/fuzz_files.py                        # 20 000 files, read and summed up
    python tests/benchmarks/fuzz_files.py --files 100000 --seed 3
    python tests/benchmarks/fuzz_files.py --files 2000 --run     # what is still a robot also solves its ring and walks two periods
"""

from __future__ import annotations

import random
import resource
import sys
import tempfile
import time
from collections import Counter
from pathlib import Path

import click

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from gaitlab.robot.checks import require_odd_ring
from gaitlab.robot.reader import read_robot
from gaitlab.wiring.space import WiringSpace
from tests.robot.mutations import spoiled_bytes
from tests.robot.test_spoiled_files import judged, no_hang


def run_outcome(path: Path) -> str:
    """How the first wiring of a robot walks: the outcome's name, or 'refused' for a clean message."""
    from gaitlab.errors import GaitlabError
    from gaitlab.gait.walk import walk
    from gaitlab.ring.solve import ring_run

    try:
        robot = read_robot(path).robot
        require_odd_ring(robot)
        wiring = next(iter(WiringSpace.of(robot)))
        done, _ = walk(robot, wiring, ring_run(robot, wiring), periods=2)
    except GaitlabError:
        return "refused"
    return done.outcome


@click.command()
@click.option("--files", default=20_000, show_default=True)
@click.option("--seed", default=1, show_default=True)
@click.option("--run", is_flag=True, help="Also solve the ring and walk two periods of what is still a robot.")
def main(files: int, seed: int, run: bool) -> None:
    """Spoils robot files and tells what came of them."""
    chance = random.Random(seed)
    verdicts: Counter[str] = Counter()
    slowest = slowest_run = 0.0
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "spoiled.toml"
        for number in range(files):
            path.write_bytes(spoiled_bytes(lambda options: chance.choice(list(options))))
            begin = time.perf_counter()
            try:
                with no_hang():
                    verdict = judged(path)
                slowest = max(slowest, time.perf_counter() - begin)
                verdicts["robot" if verdict == "robot" else "message"] += 1
                if run and verdict == "robot":
                    begin = time.perf_counter()
                    verdicts[f"run: {run_outcome(path)}"] += 1
                    slowest_run = max(slowest_run, time.perf_counter() - begin)
            except Exception as fault:
                kept = Path.cwd() / f"spoiled_{seed}_{number}.toml"
                kept.write_bytes(path.read_bytes())
                verdicts["FAULT"] += 1
                click.echo(f"{type(fault).__name__}: {fault} — the file is kept as {kept.name}", err=True)
            if number % 500 == 499:
                click.echo(f"{number + 1} of {files}: {dict(verdicts)}", err=True)
    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024
    told = ", ".join(f"{name} {number}" for name, number in sorted(verdicts.items()))
    click.echo("| files | what came of them | slowest read s | slowest run s | peak memory MB |")
    click.echo("|---|---|---|---|---|")
    click.echo(f"| {files} | {told} | {slowest:.2f} | {slowest_run:.1f} | {peak:.0f} |")
    sys.exit(1 if verdicts["FAULT"] else 0)


if __name__ == "__main__":
    main()
