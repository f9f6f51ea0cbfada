"""One trial of each fault: hurts a search and asserts that nothing is lost, doubled, overwritten or left running.

The tests run each a few times, ``tests/benchmarks/fault_table.py`` many times.
"""

from __future__ import annotations

import json
import os
import random
import resource
import shutil
import signal
import sqlite3
import subprocess
import sys
import time
from collections.abc import Callable
from pathlib import Path

from tests.faults.harness import LIMIT_S, WIRINGS, Search, assert_unharmed, hurt
from tests.robot.documents import ROOT

Rows = dict[str, tuple[object, ...]]


def hurt_at_random(search: Search, chance: random.Random, sign: signal.Signals) -> tuple[int, str, str]:
    """Starts or resumes the search and hurts it after a random number of further walks, or before the first one."""
    process = search.started()
    if chance.random() < 0.25:
        search.wait_for_start(process)
        time.sleep(chance.uniform(0.0, 2.0))  # while it loads its parts
    else:
        search.wait_for_walks(process, len(search.heard()) + chance.randrange(1, WIRINGS // 4))
        time.sleep(chance.uniform(0.0, 0.03))
    return hurt(process, sign)


def nothing_heard_is_lost(search: Search) -> Rows:
    """The rows of the ledger, among them every walk that was reported."""
    rows = search.rows()
    assert search.heard() <= set(rows), "a walk was reported but is not in the ledger"
    return rows


def killed_in_a_row(search: Search, measure: Search, chance: random.Random, times: int) -> None:
    """kill -9 of the search, again and again in one ledger, then left alone."""
    before: Rows = {}
    for _ in range(times):
        hurt_at_random(search, chance, signal.SIGKILL)
        after = nothing_heard_is_lost(search)
        assert before.items() <= after.items(), "a walk that was written is gone or changed"
        assert not search.orphans(), "a process outlives the search"
        before = after
    assert_unharmed(search, measure, before)


def interrupted_in_a_row(search: Search, measure: Search, chance: random.Random, times: int) -> None:
    """Ctrl-C, again and again in one ledger, then left alone."""
    for _ in range(times):
        code, out, err = hurt_at_random(search, chance, signal.SIGINT)
        assert code in (130, 0), f"exit code {code}: {err}"
        assert "Traceback" not in err
        if code == 130 and out:
            assert json.loads(out)["outcome"] == "interrupted"
        nothing_heard_is_lost(search)
        assert not search.orphans(), "a process outlives the search"
    assert_unharmed(search, measure, search.rows())


def ended_by_the_system(search: Search, measure: Search, chance: random.Random) -> None:
    """SIGTERM, as a shutdown sends it."""
    process = search.started()
    search.wait_for_walks(process, chance.randrange(1, WIRINGS // 2))
    hurt(process, signal.SIGTERM)
    assert_unharmed(search, measure, nothing_heard_is_lost(search))


def workers_killed(search: Search, measure: Search, chance: random.Random) -> int:
    """kill -9 of two or three workers in turn, as a machine short of memory does it; gives back how many were met."""
    process = search.started()
    killed = 0
    for walks in sorted(chance.sample(range(1, WIRINGS - 20), 3)):
        search.wait_for_walks(process, walks)
        workers = [pid for pid in search.processes() if pid != process.pid and _is_worker(pid)]
        if workers:
            os.kill(chance.choice(workers), signal.SIGKILL)
            killed += 1
    out, err = process.communicate(timeout=LIMIT_S)
    assert process.returncode == 0, err
    assert json.loads(out)["evaluated"] == WIRINGS
    assert (search.rows(), search.ranking()) == (measure.rows(), measure.ranking())
    assert not search.orphans(), "a process outlives the search"
    return killed


def _is_worker(pid: int) -> bool:
    """Whether a process is one of the pool's (the pool also has one that only counts semaphores)."""
    try:
        return b"spawn_main" in Path(f"/proc/{pid}/cmdline").read_bytes()
    except OSError:
        return False


def starved(search: Search, measure: Search) -> None:
    """Walks that run out of memory inside a worker: told by name, and walked again on --resume."""
    code, out, err = search.finished()
    assert code == 0, err
    assert json.loads(out)["failed"].get("worker_lost", 0) > 0
    assert_unharmed(search, measure, {})


def two_at_once(search: Search, measure: Search, chance: random.Random) -> None:
    """A second search on the ledger of the first while that one runs."""
    first = search.started()
    search.wait_for_walks(first, chance.randrange(1, WIRINGS // 2))
    second = search.started(resume=True)
    for process in (first, second):
        _, err = process.communicate(timeout=LIMIT_S)
        assert process.returncode == 0, err
    assert (search.rows(), search.ranking()) == (measure.rows(), measure.ranking())
    assert not search.orphans(), "a process outlives the search"


def clock_jumps(search: Search, measure: Search) -> None:
    """A wall clock that jumps by decades at every look."""
    code, out, err = search.finished()
    assert code == 0, err
    assert (search.rows(), search.ranking()) == (measure.rows(), measure.ranking())
    assert json.loads(out)["wall_s"] > 0


def blown_up(search: Search) -> int:
    """Walks whose travel is NaN or infinite though they call themselves walked; gives back how many were kept out."""
    code, out, err = search.finished()
    assert code == 0, err
    assert "NaN" not in out and "Infinity" not in out
    facts = json.loads(out)
    travels = [place["travel_mm_per_period"] for place in facts["ranking"]]
    assert travels == sorted(travels, reverse=True)
    kept_out = sum(facts["failed"].values())
    assert kept_out + len(travels) == WIRINGS
    ranked = [line for line in search.ranking().decode().splitlines()[1:] if line.split(",")[0].isdigit()]
    assert len(ranked) == len(travels)
    assert not any(word in line.lower() for line in ranked for word in ("nan", "inf"))
    return int(kept_out)


def copied(done: Search, folder: Path) -> Search:
    """A copy of a finished search that a trial may spoil."""
    shutil.copytree(done.folder, folder, dirs_exist_ok=True)
    return Search(folder)


def contents(folder: Path) -> dict[str, bytes]:
    """Every file of a folder; SQLite's own notes beside a ledger that was only read hold nothing of ours."""
    files = [p for p in sorted(folder.rglob("*")) if p.is_file() and not p.name.endswith(("-shm", "-wal"))]
    return {str(p.relative_to(folder)): p.read_bytes() for p in files}


def refused(search: Search, *more: str, resume: bool | None = None) -> str:
    """A search that must not start: one message, exit code 2, no process left."""
    code, out, err = search.finished(*more, resume=resume)
    assert code == 2, f"exit code {code}: {err}"
    assert out == ""
    assert "Traceback" not in err and "usual fix" in err
    assert not search.orphans(), "a process outlives the search"
    return err


def run_as(
    search: Search, *more: str, before: Callable[[], None] | None = None, **settings: str
) -> subprocess.CompletedProcess[str]:
    """A search whose process calls `before` first; `settings` go into its environment."""
    command = [sys.executable, "-m", "tests.faults.one_search", "search", str(search.robot), "--out", str(search.out)]
    heard = {"GAITLAB_TEST_HEARD": os.devnull, "GAITLAB_TEST_MARK": search.mark, **settings}
    return subprocess.run(
        [*command, "--workers", "1", "--no-pictures", *more],
        cwd=ROOT, env={**os.environ, **heard}, capture_output=True, text=True, timeout=LIMIT_S, preexec_fn=before,
    )  # fmt: skip


def may_only_read(search: Search, *, resume: bool) -> None:
    """A folder and a ledger without the right to write (the super-user, who has all rights, gives up that one)."""
    if not resume:
        shutil.rmtree(search.out)
        search.out.mkdir()
    before = contents(search.out)
    for path in [search.out, *search.out.rglob("*")]:
        path.chmod(0o555 if path.is_dir() else 0o444)
    finished = run_as(search, *(["--resume"] if resume else []), GAITLAB_TEST_NO_PRIVILEGES="yes")
    search.out.chmod(0o755)
    assert finished.returncode == 2, finished.stderr
    assert "Traceback" not in finished.stderr and "usual fix" in finished.stderr
    assert contents(search.out) == before, "something was written"


def disk_full(search: Search, done: Search, kilobytes: int) -> int:
    """A limit on file size stands in for the disk's end; then there is room again. Gives back the walks that were kept."""

    def limited() -> None:
        signal.signal(signal.SIGXFSZ, signal.SIG_IGN)
        resource.setrlimit(resource.RLIMIT_FSIZE, (kilobytes * 1024, kilobytes * 1024))

    finished = run_as(search, before=limited)
    assert finished.returncode == 2, finished.stderr
    assert "Traceback" not in finished.stderr and "usual fix" in finished.stderr
    assert not search.orphans(), "a process outlives the search"
    rows = search.rows()
    if not rows:
        shutil.rmtree(search.out, ignore_errors=True)
    assert_unharmed(search, done, rows)
    return len(rows)


def of_another_version(search: Search) -> None:
    """A ledger whose tables another version wrote."""
    connection = sqlite3.connect(search.ledger)
    connection.execute("UPDATE meta SET value = '999' WHERE name = 'schema'")
    connection.commit()
    connection.close()
    before = contents(search.out)
    assert "layout 999" in refused(search)
    assert contents(search.out) == before


def damaged(search: Search, done: Search, chance: random.Random) -> str:
    """A ledger with flipped bits or cut short: refused and kept, or (where nothing was hit) the same ranking."""
    data = bytearray(search.ledger.read_bytes())
    if chance.random() < 0.25:
        del data[chance.randrange(len(data)) :]
    else:
        for _ in range(chance.choice([1, 1, 3, 50])):
            data[chance.randrange(len(data))] ^= 1 << chance.randrange(8)
    search.ledger.write_bytes(data)
    code, _, err = search.finished(resume=True)
    assert code in (0, 2), f"exit code {code}: {err}"
    if code == 2:
        assert "Traceback" not in err and "usual fix" in err
        assert search.ledger.read_bytes() == bytes(data), "a damaged ledger was overwritten"
        return "refused"
    assert search.ranking() == done.ranking(), "a damaged ledger changed the ranking"
    return "harmless"
