"""A search under bad luck: killed again and again, a ledger of a million rows, the ledger's own cost.

Run from the root; every command prints a Markdown table:

    python tests/benchmarks/search_faults.py kills         # kill -9 at 20 random moments of a real search, then the ranking
    python tests/benchmarks/search_faults.py memory        # the parent's memory with 100, 10 000 and 100 000 rows
    python tests/benchmarks/search_faults.py resume        # how long it takes to go on with a million rows; resume=N with N
    python tests/benchmarks/search_faults.py overhead      # the ledger's share of a search's time
"""

from __future__ import annotations

import json
import os
import random
import resource
import signal
import sqlite3
import subprocess
import sys
import tempfile
import time
from dataclasses import replace
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))
sys.path.insert(0, str(Path(__file__).resolve().parents[1]))

from search.fakes import task_of

from gaitlab.gait.records import Walk, WaveReading
from gaitlab.robot.reader import read_robot
from gaitlab.search.evaluate import Evaluation, Job, evaluate, failed_walk
from gaitlab.search.ledger_file import LEDGER_FILE, created, reopened
from gaitlab.search.ranking import Ranking
from gaitlab.search.ranking_table import write_ranking
from gaitlab.search.run import SearchTask, Step, run_search
from gaitlab.search.strategies.exhaustive import Exhaustive
from gaitlab.search.workers import InProcess
from gaitlab.wiring.smooth import SmoothWaves

ROOT = Path(__file__).resolve().parents[2]
KILLS = 20
ROBOT = ROOT / "robots" / "tray_row5.toml"
ROWS = (100, 10_000, 100_000)
MILLION = 1_000_000  # rows


def kills() -> None:
    """Real walks of tray_row5: one search that is never hurt, and one that is killed `KILLS` times."""
    chance = random.Random(1)
    with tempfile.TemporaryDirectory() as folder:
        whole, hurt = Path(folder) / "whole", Path(folder) / "hurt"
        begin = time.monotonic()
        assert search(whole).wait() == 0
        length = time.monotonic() - begin
        moments = []
        for _ in range(KILLS):
            process = search(hurt)
            moments.append(chance.uniform(0.0, length / 5))
            time.sleep(moments[-1])
            os.kill(process.pid, signal.SIGKILL)
            process.wait()
        assert search(hurt).wait() == 0
        same = (whole / "ranking.csv").read_bytes() == (hurt / "ranking.csv").read_bytes()
        print("| kills | moments s after the start | rows | doubled | lost | same ranking.csv | processes left |")
        print("|---|---|---|---|---|---|---|")
        rows, keys = counted(hurt)
        print(
            f"| {KILLS} | {min(moments):.2f} … {max(moments):.2f} | {rows} | {rows - keys} | {counted(whole)[0] - rows} |"
            f" {'yes' if same else 'NO'} | {left_running(folder)} |"
        )


def search(out: Path) -> subprocess.Popen[bytes]:
    resume = ["--resume"] if (out / LEDGER_FILE).exists() else []
    words = ["search", str(ROBOT), "--out", str(out), "--no-pictures", "--finalists", "0", *resume]
    silent = subprocess.DEVNULL
    return subprocess.Popen([sys.executable, "-m", "gaitlab", *words], cwd=ROOT, stdout=silent, stderr=silent)


def counted(folder: Path) -> tuple[int, int]:
    with sqlite3.connect(folder / LEDGER_FILE) as connection:
        return tuple(connection.execute("SELECT count(*), count(DISTINCT key) FROM walks").fetchone())  # type: ignore[return-value]


def left_running(mark: str) -> int:
    """Processes whose command line names the folder."""
    found = 0
    for path in Path("/proc").glob("[0-9]*/cmdline"):
        try:
            found += mark.encode() in path.read_bytes()
        except OSError:
            continue
    return found


_one: list[Walk] = []


def made_up(job: Job) -> Evaluation:
    """A walk at no cost, with a travel that hangs on the wiring."""
    if not _one:
        wave = WaveReading("direct", 4.0, 0.9)
        feet = tuple((f"foot_{i}", 0.5) for i in range(10))
        stance = tuple((name, ((0.1, 0.6),)) for name, _ in feet)
        walk = failed_walk(job, "walked", "")
        _one.append(
            replace(
                walk,
                period_s=1.5,
                travel_scatter_m=1e-5,
                travels_m=(0.01,) * 4,
                duty_factor=feet,
                stance=stance,
                wave=wave,
            )
        )
    return Evaluation(replace(_one[0], travel_m=int(job.key[:6], 16) * 1e-9, simulated_s=6.5), 0.0)


def ignore(step: Step) -> None:
    """Nobody watches."""


def filled(folder: Path, rows: int, *, inlets_per_output_max: int = 3) -> SearchTask:
    task = task_of(10, 5, inlets_per_output_max=inlets_per_output_max)
    with created(folder / LEDGER_FILE, task.identity) as ledger:
        run_search(task, Exhaustive(task.space, rows), ledger, InProcess(made_up), ignore)
    return task


def ranked(folder: Path, task: SearchTask) -> None:
    with reopened(folder / LEDGER_FILE, task.identity) as ledger:
        ranking = Ranking(ledger, SmoothWaves.of(task.robot, task.space), "travel", task.settings)
        write_ranking(folder / "ranking.csv", ranking, "travel")


def one_size(rows: int) -> None:
    """Peak memory of a process that searches and ranks so many wirings."""
    with tempfile.TemporaryDirectory() as folder:
        ranked(Path(folder), filled(Path(folder), rows))
    print(json.dumps(resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024))


def memory() -> None:
    print("| rows | peak memory of the parent MB |")
    print("|---|---|")
    for rows in ROWS:
        done = subprocess.run([sys.executable, __file__, f"size={rows}"], capture_output=True, text=True, check=True)
        print(f"| {rows} | {float(done.stdout.splitlines()[-1]):.0f} |", flush=True)


def resume(rows: int = MILLION) -> None:
    with tempfile.TemporaryDirectory() as folder:
        task = filled(Path(folder), rows, inlets_per_output_max=6)
        begin = time.perf_counter()
        ledger = reopened(Path(folder) / LEDGER_FILE, task.identity)
        opened = time.perf_counter() - begin
        with ledger:
            run_search(task, Exhaustive(task.space, rows), ledger, InProcess(made_up), ignore)
        gone_on = time.perf_counter() - begin
        ranked(Path(folder), task)
        done = time.perf_counter() - begin
        size = (Path(folder) / LEDGER_FILE).stat().st_size / 1e6
    print("| rows | ledger MB | opened s | all found done s | ranking.csv written s |")
    print("|---|---|---|---|---|")
    print(f"| {rows} | {size:.0f} | {opened:.1f} | {gone_on:.1f} | {done:.1f} |")


def overhead() -> None:
    """What a row costs, against what a walk costs, both in CPU time of one run."""
    rows = 5000
    with tempfile.TemporaryDirectory() as folder:
        begin = time.process_time()
        filled(Path(folder), rows)
        each = (time.process_time() - begin) / rows
    file = read_robot(ROBOT)
    task = SearchTask.of(file.document, file.robot)
    begin = time.process_time()
    evaluate(Job(task.document_json, next(iter(task.space)), task.settings, ""))
    walk = time.process_time() - begin
    print("| CPU ms a row (listing, ledger, made-up walk) | CPU ms a settled walk of tray_row5 | share |")
    print("|---|---|---|")
    print(f"| {1e3 * each:.2f} | {1e3 * walk:.0f} | {100 * each / walk:.3f} % |")


def main() -> None:
    commands = {"kills": kills, "memory": memory, "resume": resume, "overhead": overhead}
    word = sys.argv[1] if len(sys.argv) == 2 else ""
    if word.startswith("size="):
        one_size(int(word.removeprefix("size=")))
    elif word.startswith("resume="):
        resume(int(word.removeprefix("resume=")))
    elif word in commands:
        commands[word]()
    else:
        raise SystemExit(__doc__)


if __name__ == "__main__":
    main()
