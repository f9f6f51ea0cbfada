"""Starts searches as processes, hurts them, and looks whether anything was lost, doubled or left running."""

from __future__ import annotations

import os
import signal
import sqlite3
import subprocess
import sys
import time
import uuid
from collections.abc import Callable
from dataclasses import dataclass, field
from pathlib import Path

from tests.robot.documents import ROOT, ROW5

STAGE = "\n[[ring.stage]]\nnumber = 1\nport_mL = 0.61\n"  # stages that differ: no turn of the ring is an equal wiring
WIRINGS = 120  # 5! of them then
GONE_WITHIN_S = 15.0  # as long as a killed search's workers may take to follow it on a busy machine
LIMIT_S = 180.0  # a search that has not ended by then hangs


@dataclass
class Search:
    """One search in one folder, started as often as a test likes."""

    folder: Path
    mark: str = field(default_factory=lambda: uuid.uuid4().hex)
    settings: dict[str, str] = field(default_factory=dict)
    _heard: str = ""  # what earlier starts reported

    def __post_init__(self) -> None:
        self.folder.mkdir(parents=True, exist_ok=True)
        self.robot.write_text(ROW5.replace("[tubes]", STAGE + "\n[tubes]", 1), encoding="utf-8")

    @property
    def robot(self) -> Path:
        """The robot file."""
        return self.folder / "row.toml"

    @property
    def out(self) -> Path:
        """The run folder."""
        return self.folder / "run"

    @property
    def ledger(self) -> Path:
        """The ledger's file."""
        return self.out / "ledger.sqlite"

    def started(self, *more: str, resume: bool | None = None) -> subprocess.Popen[str]:
        """The search as a process, going on with what is there (unless told otherwise)."""
        again = self.ledger.exists() if resume is None else resume
        self._heard += (
            (self.folder / "heard.txt").read_text(encoding="utf-8") if (self.folder / "heard.txt").exists() else ""
        )
        (self.folder / "heard.txt").unlink(missing_ok=True)
        arguments = [
            "search",
            str(self.robot),
            "--out",
            str(self.out),
            "--workers",
            "2",
            "--no-pictures",
            "--json",
            *more,
        ]
        environment = {
            **os.environ,
            "GAITLAB_TEST_MARK": self.mark,
            "GAITLAB_TEST_HEARD": str(self.folder / "heard.txt"),
            **self.settings,
        }
        return subprocess.Popen(
            [sys.executable, "-m", "tests.faults.one_search", *arguments, *(["--resume"] if again else [])],
            cwd=ROOT, env=environment, stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True,
        )  # fmt: skip

    def finished(self, *more: str, resume: bool | None = None) -> tuple[int, str, str]:
        """Exit code and outputs of a search left alone."""
        process = self.started(*more, resume=resume)
        out, err = process.communicate(timeout=LIMIT_S)
        return process.returncode, out, err

    def heard(self) -> set[str]:
        """Wirings whose walk was reported as finished, in any of the starts."""
        path = self.folder / "heard.txt"
        latest = path.read_text(encoding="utf-8") if path.exists() else ""
        return set((self._heard + latest).split("\n")) - {""}

    def rows(self) -> dict[str, tuple[object, ...]]:
        """The ledger's walks by wiring, each wall time left out (it is the only thing that may differ)."""
        if not self.ledger.exists():
            return {}
        connection = sqlite3.connect(f"{self.ledger.absolute().as_uri()}?mode=ro", uri=True)
        try:
            tables = {name for (name,) in connection.execute("SELECT name FROM sqlite_schema")}
            if "walks" not in tables:
                return {}
            found = connection.execute(
                "SELECT wiring, key, status, outcome, travel_m, scatter_m, walk FROM walks ORDER BY key"
            ).fetchall()
        finally:
            connection.close()
        assert len({row[0] for row in found}) == len(found), "a wiring stands in the ledger twice"
        return {row[0]: row[1:] for row in found}

    def ranking(self) -> bytes:
        """The ranking's bytes."""
        return (self.out / "ranking.csv").read_bytes()

    def processes(self) -> list[int]:
        """Every process that this search or one of its workers is (found by a mark in its environment)."""
        found = []
        for entry in Path("/proc").iterdir():
            if entry.name.isdigit() and _carries(entry, f"GAITLAB_TEST_MARK={self.mark}"):
                found.append(int(entry.name))
        return found

    def orphans(self) -> list[int]:
        """Processes that outlive the search, after some patience."""
        _waited(lambda: not self.processes(), GONE_WITHIN_S)
        return self.processes()

    def wait_for_start(self, process: subprocess.Popen[str]) -> None:
        """Waits until Python runs the search's first line (before that, Ctrl-C meets Python and not the search)."""
        begun = _waited(lambda: (self.folder / "heard.txt").exists() or process.poll() is not None, LIMIT_S)
        assert begun, "the search did not start"

    def wait_for_walks(self, process: subprocess.Popen[str], number: int) -> None:
        """Waits until so many walks were reported, or the search has ended."""
        reported = _waited(lambda: len(self.heard()) >= number or process.poll() is not None, LIMIT_S)
        assert reported, "no walk was reported"


def _waited(condition: Callable[[], bool], patience_s: float) -> bool:
    """Whether the condition came true in time; a guard against hanging, not a measure of speed."""
    until = time.monotonic() + patience_s
    while not condition():
        if time.monotonic() > until:
            return False
        time.sleep(0.005)
    return True


def _carries(entry: Path, text: str) -> bool:
    try:
        state = (entry / "stat").read_text().rpartition(")")[2].split()[0]
        return state != "Z" and text.encode() in (entry / "environ").read_bytes().split(b"\0")
    except OSError:
        return False


def hurt(process: subprocess.Popen[str], sign: signal.Signals) -> tuple[int, str, str]:
    """Sends a signal to the search alone (not to its workers) and waits for its end."""
    process.send_signal(sign)
    out, err = process.communicate(timeout=LIMIT_S)
    return process.returncode, out, err


def undisturbed(folder: Path) -> Search:
    """A search that nothing happens to, as the measure of all others."""
    search = Search(folder)
    code, _, err = search.finished()
    assert code == 0, err
    assert len(search.rows()) == WIRINGS
    return search


def assert_unharmed(search: Search, measure: Search, before: dict[str, tuple[object, ...]]) -> None:
    """Resumes a hurt search to its end: every row of before is still there, none is doubled, and the ranking is the same."""
    assert not search.orphans()
    code, _, err = search.finished()
    assert code == 0, err
    after = search.rows()
    assert before.items() <= after.items(), "a walk that was written is gone or changed"
    assert after == measure.rows()
    assert search.ranking() == measure.ranking()
    assert not search.orphans()
