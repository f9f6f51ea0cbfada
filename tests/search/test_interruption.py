"""Ended from outside: Ctrl-C leaves a ranking, kill -9 leaves the rows and no processes behind."""

from __future__ import annotations

import os
import signal
import sqlite3
import subprocess
import sys
import time
from pathlib import Path

import pytest

from gaitlab.search.ledger_file import LEDGER_FILE

TESTS = Path(__file__).parents[1]
SCRIPT = """
import sys
from pathlib import Path
from search.fakes import slowly, task_of
from search.test_run import searched
from gaitlab.search.workers import local_workers

if __name__ == "__main__":
    searched(Path(sys.argv[1]), local_workers(slowly, 2), task=task_of(6, 5, inlets_per_output_max=2), resume=sys.argv[2] == "resume")
"""


def started(folder: Path, how: str) -> subprocess.Popen[bytes]:
    script = folder / "searching.py"
    script.write_text(SCRIPT, encoding="utf-8")
    environment = {**os.environ, "PYTHONPATH": os.pathsep.join([str(TESTS), str(TESTS.parent)])}
    return subprocess.Popen(
        [sys.executable, str(script), str(folder / "run"), how], env=environment, stderr=subprocess.PIPE
    )


def rows(folder: Path) -> int:
    path = folder / "run" / LEDGER_FILE
    if not path.is_file():
        return 0
    try:
        with sqlite3.connect(path, timeout=10) as connection:
            return int(connection.execute("SELECT count(*) FROM walks").fetchone()[0])
    except sqlite3.OperationalError:  # the tables are being made
        return 0


def after_rows(folder: Path, process: subprocess.Popen[bytes], number: int) -> None:
    while rows(folder) < number:
        assert process.poll() is None, process.stderr and process.stderr.read()
        time.sleep(0.02)


def children(process: subprocess.Popen[bytes]) -> list[int]:
    listing = Path(f"/proc/{process.pid}/task/{process.pid}/children")
    return [int(word) for word in listing.read_text().split()]


def alive(process_id: int) -> bool:
    try:
        return Path(f"/proc/{process_id}/stat").read_text().rsplit(")", 1)[1].split()[0] != "Z"
    except FileNotFoundError:
        return False


def gone(process_ids: list[int], within_s: float = 10.0) -> bool:
    end = time.monotonic() + within_s
    while time.monotonic() < end:
        if not any(alive(process_id) for process_id in process_ids):
            return True
        time.sleep(0.05)
    return False


@pytest.mark.slow
def test_killed_search_leaves_its_rows_and_no_processes_and_resumes_to_the_same_ranking(tmp_path: Path) -> None:
    for name in ("whole", "killed"):
        (tmp_path / name).mkdir()
    whole = started(tmp_path / "whole", "new")
    assert whole.wait(120) == 0
    killed = started(tmp_path / "killed", "new")
    after_rows(tmp_path / "killed", killed, 30)
    workers = children(killed)
    os.kill(killed.pid, signal.SIGKILL)
    killed.wait()
    assert workers and gone(workers)
    before = rows(tmp_path / "killed")
    assert before >= 30
    resumed = started(tmp_path / "killed", "resume")
    assert resumed.wait(120) == 0
    first, second = (tmp_path / name / "run" / "ranking.csv" for name in ("whole", "killed"))
    assert first.read_bytes() == second.read_bytes()
    assert rows(tmp_path / "killed") == rows(tmp_path / "whole")


@pytest.mark.slow
def test_interrupted_search_ranks_what_is_known_and_ends_its_workers(tmp_path: Path) -> None:
    process = started(tmp_path, "new")
    after_rows(tmp_path, process, 20)
    workers = children(process)
    os.kill(process.pid, signal.SIGINT)
    assert process.wait(60) == 0
    assert gone(workers)
    known = rows(tmp_path)
    lines = (tmp_path / "run" / "ranking.csv").read_text().splitlines()
    assert len(lines) - 1 == known < 360
