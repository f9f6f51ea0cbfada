"""Remakes DEVELOPERS.md's table of faults: what was tried, how often, what happened. Prints Markdown; progress goes to stderr.

Run from the root; the long one takes about an hour on two idle cores:

    python tests/benchmarks/fault_table.py --quick
    python tests/benchmarks/fault_table.py > faults.md
"""

from __future__ import annotations

import os
import random
import shutil
import sys
import tempfile
import time
from collections import Counter
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

import click

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from tests.cli.commands import gaitlab
from tests.cli.test_wrong_options import CASES, MEANINGLESS, needed, wrong_values
from tests.faults import trials
from tests.faults.harness import Search, undisturbed
from tests.robot.mutations import spoiled_bytes
from tests.robot.test_spoiled_files import judged, no_hang


@dataclass(frozen=True)
class Bench:
    """Where trials run: a scratch folder, a finished search as the measure, and a seeded source of chance."""

    folder: Path
    measure: Search
    chance: random.Random

    def fresh(self, **settings: str) -> Search:
        """A search in a folder of its own."""
        return Search(self._new(), settings=settings)

    def copy(self) -> Search:
        """A copy of the finished search."""
        return trials.copied(self.measure, self._new())

    def _new(self) -> Path:
        return Path(tempfile.mkdtemp(dir=self.folder))


Trial = Callable[[Bench], str]  # one trial; what happened, or an exception


def spoiled_file(bench: Bench) -> str:
    """One spoiled robot file."""
    path = bench.folder / "spoiled.toml"
    path.write_bytes(spoiled_bytes(lambda options: bench.chance.choice(list(options))))
    with no_hang():
        verdict = judged(path)
    return "read as a robot" if verdict == "robot" else "one clean message"


def wrong_option(bench: Bench) -> str:
    """One command line that makes no sense, in the scratch folder beside a robot.toml."""
    os.chdir(bench.folder)
    shutil.copy(bench.measure.robot, "robot.toml")
    if bench.chance.random() < 0.15:
        arguments = list(bench.chance.choice(MEANINGLESS))
    else:
        name, option = bench.chance.choice(CASES)
        given = needed(name)
        if option.opts[0] in given:
            at = given.index(option.opts[0])
            del given[at : at + 2]
        arguments = [name, *given, option.opts[0], bench.chance.choice(list(wrong_values(option)))]
    shown = gaitlab(*arguments)
    assert shown.code == 2 and shown.out == "" and "Traceback" not in shown.err, f"{arguments}: {shown}"
    return "exit code 2 and a message"


def kills(bench: Bench) -> str:
    trials.killed_in_a_row(bench.fresh(), bench.measure, bench.chance, times=5)
    return "nothing lost or doubled, no process left, same ranking"


def interrupts(bench: Bench) -> str:
    trials.interrupted_in_a_row(bench.fresh(), bench.measure, bench.chance, times=5)
    return "nothing lost or doubled, no process left, same ranking"


def shutdown(bench: Bench) -> str:
    trials.ended_by_the_system(bench.fresh(), bench.measure, bench.chance)
    return "nothing lost or doubled, no process left, same ranking"


def lost_workers(bench: Bench) -> str:
    killed = trials.workers_killed(bench.fresh(), bench.measure, bench.chance)
    return "went on by itself, same ranking" if killed else "ended before the kill"


def no_memory(bench: Bench) -> str:
    trials.starved(bench.fresh(GAITLAB_TEST_KIND="starved"), bench.measure)
    return "named worker_lost, same ranking after --resume"


def two_at_once(bench: Bench) -> str:
    trials.two_at_once(bench.fresh(), bench.measure, bench.chance)
    return "both end, nothing doubled, same ranking"


def clock_jumps(bench: Bench) -> str:
    trials.clock_jumps(bench.fresh(GAITLAB_TEST_CLOCK="jumps"), bench.measure)
    return "same ranking"


def blown_up(bench: Bench) -> str:
    trials.blown_up(bench.fresh(GAITLAB_TEST_KIND="blown_up"))
    return "kept out of the ranking, counted as failed"


def full_disk(bench: Bench) -> str:
    kept = trials.disk_full(bench.fresh(), bench.measure, bench.chance.choice([1, 4, 16, 48, 96]))
    return "a message; rows kept, same ranking after --resume" if kept else "a message; nothing written yet"


def read_only(bench: Bench) -> str:
    trials.may_only_read(bench.copy(), resume=bench.chance.choice([True, False]))
    return "a message; nothing written"


def other_version(bench: Bench) -> str:
    trials.of_another_version(bench.copy())
    return "a message; nothing written"


def damage(bench: Bench) -> str:
    met = trials.damaged(bench.copy(), bench.measure, bench.chance)
    return "a message; file kept" if met == "refused" else "no row hit, same ranking"


# What is tried: in words, the trial, faults in one trial, trials when quick, trials in the long run.
EXPERIMENTS: list[tuple[str, Trial, int, int, int]] = [
    ("robot file spoiled", spoiled_file, 1, 500, 10_000),
    ("command line that makes no sense", wrong_option, 1, 60, 1_000),
    ("search killed (kill -9) at a random moment", kills, 5, 1, 20),
    ("Ctrl-C at a random moment", interrupts, 5, 1, 6),
    ("search ended by the system (SIGTERM)", shutdown, 1, 1, 10),
    ("three workers killed in one search", lost_workers, 3, 1, 10),
    ("walks out of memory in one search", no_memory, 1, 1, 4),
    ("second search on the same ledger", two_at_once, 1, 1, 8),
    ("wall clock jumping by decades", clock_jumps, 1, 1, 4),
    ("walks that blew up to NaN or infinity", blown_up, 1, 1, 4),
    ("disk full", full_disk, 1, 1, 12),
    ("folder or ledger without the right to write", read_only, 1, 1, 8),
    ("ledger of another version", other_version, 1, 1, 4),
    ("ledger with flipped bits or cut short", damage, 1, 3, 120),
]


def tried(words: str, trial: Trial, bench: Bench, times: int) -> Counter[str]:
    """What happened in so many trials; one that fails is told in full on stderr."""
    met: Counter[str] = Counter()
    for number in range(times):
        try:
            met[trial(bench)] += 1
        except Exception as fault:
            met["FAILED"] += 1
            click.echo(f"{words}, trial {number + 1}: {type(fault).__name__}: {fault}", err=True)
    return met


@click.command()
@click.option("--quick", is_flag=True, help="A few trials of each, as a smoke test.")
@click.option("--share", default=1.0, show_default=True, help="Part of the long run's trials, for a shorter one.")
@click.option("--seed", default=1, show_default=True)
@click.option("--only", default="", help="Only rows whose words hold this text.")
def main(quick: bool, share: float, seed: int, only: str) -> None:
    """Tries every fault and prints what happened as a Markdown table."""
    failed = 0
    with tempfile.TemporaryDirectory() as folder:
        bench = Bench(Path(folder), undisturbed(Path(folder) / "measure"), random.Random(seed))
        click.echo("| what was tried | times | what happened |")
        click.echo("|---|---|---|")
        for words, trial, faults, few, many in EXPERIMENTS:
            if only not in words:
                continue
            begin = time.perf_counter()
            met = tried(words, trial, bench, few if quick else max(1, round(share * many)))
            failed += met["FAILED"]
            told = "; ".join(f"{what} ({n})" if len(met) > 1 else what for what, n in met.most_common() if n)
            click.echo(f"| {words} | {faults * sum(met.values())} | {told} |")
            click.echo(f"{words}: {time.perf_counter() - begin:.0f} s", err=True)
    sys.exit(1 if failed else 0)


if __name__ == "__main__":
    main()
