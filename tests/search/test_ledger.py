"""The ledger: exact numbers back, one row per key, plain refusals, nothing overwritten."""

from __future__ import annotations

import dataclasses
import math
import os
import shutil
import sqlite3
import subprocess
import sys
import textwrap
from pathlib import Path

import pytest
from search.fakes import by_hash, task_of, walk_of
from wiring.robots import row_document

from gaitlab.errors import RunFolderError
from gaitlab.robot.reader import robot_from_document
from gaitlab.search import identity as identity_module
from gaitlab.search import ledger as ledger_module
from gaitlab.search.evaluate import WORKER_LOST, Evaluation, Job, failed_walk
from gaitlab.search.identity import Identity, code_version
from gaitlab.search.ledger_file import LEDGER_FILE, created, reopened
from gaitlab.search.run import SearchTask, job_of
from gaitlab.search.schema import COLUMNS, SCHEMA, row_of
from gaitlab.search.settings import WalkSettings
from gaitlab.search.strategies.ask_tell import Ask
from gaitlab.wiring.wiring import Wiring

TASK = task_of()
PACKAGE = Path(identity_module.__file__).parents[1]


def jobs(number: int = 3) -> list[Job]:
    how = WalkSettings()
    return [Job("{}", w, how, TASK.identity.key(w, how)) for w, _ in zip(TASK.space, range(number), strict=False)]


def test_a_walk_comes_back_bit_for_bit(tmp_path: Path) -> None:
    (job,) = jobs(1)
    walk = dataclasses.replace(walk_of(job, 0.1 + 0.2), drift_m=math.nan, travels_m=(1 / 3, 1e-300))
    with created(tmp_path / LEDGER_FILE, TASK.identity) as ledger:
        assert ledger.add(job, Evaluation(walk, 0.5), None)
    with reopened(tmp_path / LEDGER_FILE, TASK.identity) as ledger:
        back = ledger.known([job.key])[job.key].walk
    assert repr(back) == repr(walk)


def test_a_second_row_of_the_same_key_is_not_written(tmp_path: Path) -> None:
    (job,) = jobs(1)
    with created(tmp_path / LEDGER_FILE, TASK.identity) as ledger:
        assert ledger.add(job, Evaluation(walk_of(job, 1.0), 0.0), None)
        assert not ledger.add(job, Evaluation(walk_of(job, 2.0), 0.0), None)
        assert ledger.known([job.key])[job.key].walk.travel_m == 1.0
        assert ledger.number_of_walks() == 1


def test_two_connections_share_one_ledger(tmp_path: Path) -> None:
    path = tmp_path / LEDGER_FILE
    one, two, three = jobs(3)
    with created(path, TASK.identity) as first, reopened(path, TASK.identity) as second:
        first.add(one, by_hash(one), None)
        second.add(two, by_hash(two), None)
        second.add(one, by_hash(one), None)
        first.add(three, by_hash(three), None)
        assert first.there([j.key for j in (one, two, three)]) == second.there([j.key for j in (one, two, three)])
        assert first.number_of_walks() == 3


def test_lookups_of_more_keys_than_one_query_holds(tmp_path: Path) -> None:
    (job,) = jobs(1)
    with created(tmp_path / LEDGER_FILE, TASK.identity) as ledger:
        ledger.add(job, by_hash(job), None)
        keys = [f"{n}" for n in range(2500)] + [job.key]
        assert ledger.there(keys) == {job.key}
        assert list(ledger.known(keys)) == [job.key]


def test_lost_workers_are_forgotten_on_request(tmp_path: Path) -> None:
    one, two, _ = jobs(3)
    with created(tmp_path / LEDGER_FILE, TASK.identity) as ledger:
        ledger.add(one, Evaluation(failed_walk(one, WORKER_LOST, "again"), 0.0), None)
        ledger.add(two, Evaluation(failed_walk(two, "fell_over", ""), 0.0), None)
        assert ledger.forget_lost() == 1
        assert ledger.there([one.key, two.key]) == {two.key}


def test_key_hangs_on_everything_that_decides() -> None:
    document = row_document(5, 5)
    renamed = {**document, "name": "other", "notes": ["changed"]}
    heavier = row_document(5, 5)
    heavier["body"]["block"][0]["mass_g"] += 1
    wiring, how = Wiring.of({"a": 1}), WalkSettings()
    base = Identity.of(document).key(wiring, how)
    assert Identity.of(renamed).key(wiring, how) == base
    assert Identity.of(heavier).key(wiring, how) != base
    assert Identity.of(document).key(Wiring.of({"a": 2}), how) != base
    assert Identity.of(document).key(wiring, WalkSettings(periods=2)) != base
    assert Identity.of(document).key(wiring, WalkSettings(step_s=5e-4)) != base
    assert Identity.of(document).key(wiring, WalkSettings(engine="mujoco")) != base
    assert dataclasses.replace(Identity.of(document), code_version="x").key(wiring, how) != base


def test_an_existing_ledger_is_not_overwritten(tmp_path: Path) -> None:
    path = tmp_path / LEDGER_FILE
    created(path, TASK.identity).close()
    before = path.read_bytes()
    with pytest.raises(RunFolderError, match=r"is there already.*--resume"):
        created(path, TASK.identity)
    assert path.read_bytes() == before


def test_nothing_to_resume(tmp_path: Path) -> None:
    with pytest.raises(RunFolderError, match="nothing can be resumed"):
        reopened(tmp_path / LEDGER_FILE, TASK.identity)


@pytest.mark.parametrize(
    ("change", "words"),
    [
        ({"robot_hash": "beef"}, "another robot or of a changed robot file .hash beef"),
        ({"code_version": "f00d"}, "other code of the models .version f00d"),
    ],
)
def test_a_ledger_of_something_else_is_refused(tmp_path: Path, change: dict[str, str], words: str) -> None:
    path = tmp_path / LEDGER_FILE
    created(path, dataclasses.replace(TASK.identity, **change)).close()
    before = path.read_bytes()
    with pytest.raises(RunFolderError, match=words):
        reopened(path, TASK.identity)
    assert path.read_bytes() == before


def test_a_ledger_of_another_layout_is_refused(tmp_path: Path) -> None:
    path = tmp_path / LEDGER_FILE
    created(path, TASK.identity).close()
    with sqlite3.connect(path) as connection:
        connection.execute("UPDATE meta SET value = '99' WHERE name = 'schema'")
    with pytest.raises(RunFolderError, match=f"layout 99, this version writes layout {SCHEMA}"):
        reopened(path, TASK.identity)


@pytest.mark.parametrize("content", [b"", b"no database at all, only text" * 50])
def test_a_file_that_is_no_ledger_is_refused_and_kept(tmp_path: Path, content: bytes) -> None:
    path = tmp_path / LEDGER_FILE
    path.write_bytes(content)
    with pytest.raises(RunFolderError, match="no ledger"):
        reopened(path, TASK.identity)
    assert path.read_bytes() == content


def test_a_damaged_ledger_is_refused_and_kept(tmp_path: Path) -> None:
    path = tmp_path / LEDGER_FILE
    with created(path, TASK.identity) as ledger:
        for job in jobs(24):
            ledger.add(job, by_hash(job), None)
    content = bytearray(path.read_bytes())
    content[4096 : 3 * 4096] = os.urandom(2 * 4096)
    path.write_bytes(content)
    with pytest.raises(RunFolderError, match=r"damaged|no ledger"):
        reopened(path, TASK.identity)
    assert path.read_bytes() == bytes(content)


def test_a_ledger_in_a_folder_that_cannot_be_made_is_refused() -> None:
    with pytest.raises(RunFolderError, match="cannot be made"):
        created(Path("/proc/no/such") / LEDGER_FILE, TASK.identity)


def test_a_read_only_ledger_is_refused(tmp_path: Path) -> None:
    """Run as a user without rights: the super-user may write anything."""
    path = tmp_path / LEDGER_FILE
    created(path, TASK.identity).close()
    os.chmod(path, 0o444)
    os.chmod(tmp_path, 0o555)
    script = textwrap.dedent(f"""
        import pathlib
        from gaitlab.search.identity import Identity
        from gaitlab.search.ledger_file import reopened
        from gaitlab.errors import RunFolderError
        from tests.faults.one_search import give_up_privileges
        identity = Identity({TASK.identity.robot_name!r}, {TASK.identity.robot_hash!r}, {TASK.identity.code_version!r})
        give_up_privileges()
        try:
            reopened(pathlib.Path({str(path)!r}), identity)
        except RunFolderError as error:
            print(error)
    """)
    before = path.read_bytes()
    done = subprocess.run([sys.executable, "-c", script], capture_output=True, text=True, cwd=Path(__file__).parents[2])
    os.chmod(tmp_path, 0o755)
    assert "cannot be" in done.stdout and "right to write" in done.stdout, done.stdout + done.stderr
    assert path.read_bytes() == before


def test_a_full_disk_is_told_plainly(tmp_path: Path) -> None:
    """A page limit stands in for the disk's end: SQLite reports both the same way."""
    with created(tmp_path / LEDGER_FILE, TASK.identity) as ledger:
        with ledger.told_plainly() as connection:
            (pages,) = connection.execute("PRAGMA page_count").fetchone()
            connection.execute(f"PRAGMA max_page_count = {pages + 1}")
        with pytest.raises(RunFolderError, match=r"full.*free some space"):
            for job in jobs(24):
                ledger.add(job, by_hash(job), None)


def test_a_changed_robot_file_does_not_mix(tmp_path: Path) -> None:
    document = row_document(5, 5)
    created(tmp_path / LEDGER_FILE, TASK.identity).close()
    document["foot"]["pad"]["friction"] = 0.7
    other = SearchTask.of(document, robot_from_document(document))
    with pytest.raises(RunFolderError, match="changed robot file"):
        reopened(tmp_path / LEDGER_FILE, other.identity)


def test_rings_are_kept_once_and_up_to_a_limit(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(ledger_module, "RINGS_MAX", 2)
    with created(tmp_path / LEDGER_FILE, TASK.identity) as ledger:
        for pattern, run in (("p", b"one"), ("p", b"other"), ("q", b"two"), ("r", b"three")):
            ledger.keep_ring(pattern, run)
        assert [ledger.ring(pattern) for pattern in "pqr"] == [b"one", b"two", None]


def test_a_damaged_ring_is_not_handed_out_and_is_replaced(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(ledger_module, "RINGS_MAX", 1)
    with created(tmp_path / LEDGER_FILE, TASK.identity) as ledger:
        ledger.keep_ring("p", b"whole")
        for damage in (b"whule", "whole", b""):
            with ledger.told_plainly() as connection:
                connection.execute("UPDATE rings SET run = ?", (damage,))
            assert ledger.ring("p") is None
        ledger.keep_ring("p", b"anew")
        assert ledger.ring("p") == b"anew"


def test_a_negative_zero_is_no_damage(tmp_path: Path) -> None:
    """SQLite gives 0.0 back for −0.0."""
    (job,) = jobs(1)
    walk = dataclasses.replace(walk_of(job, -0.0), travel_scatter_m=-0.0, simulated_s=-0.0)
    with created(tmp_path / LEDGER_FILE, TASK.identity) as ledger:
        ledger.add(job, Evaluation(walk, -0.0), None)
    with reopened(tmp_path / LEDGER_FILE, TASK.identity) as ledger:
        assert ledger.number_of_walks() == 1


@pytest.mark.parametrize("time_s", [math.nan, math.inf])
def test_a_time_that_is_none_is_an_error_and_no_lost_row(tmp_path: Path, time_s: float) -> None:
    (job,) = jobs(1)
    with created(tmp_path / LEDGER_FILE, TASK.identity) as ledger:
        with pytest.raises(ValueError, match="time must be finite"):
            ledger.add(job, Evaluation(walk_of(job, 1.0), time_s), None)
        with pytest.raises(ValueError, match="time must be finite"):
            ledger.add(job, Evaluation(dataclasses.replace(walk_of(job, 1.0), simulated_s=time_s), 0.0), None)


@pytest.mark.parametrize(("column", "value"), [("wall_s", None), ("status", "lost"), ("walk", None)])
def test_a_row_that_the_tables_refuse_is_told(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, column: str, value: str | None
) -> None:
    """Only a key that is there already is passed over."""
    (job,) = jobs(1)
    row = list(row_of(job, by_hash(job), None))
    row[COLUMNS.index(column)] = value
    monkeypatch.setattr(ledger_module, "row_of", lambda *_: tuple(row))
    with (
        created(tmp_path / LEDGER_FILE, TASK.identity) as ledger,
        pytest.raises(RunFolderError, match=r"constraint failed.*none that the tables allow"),
    ):
        ledger.add(job, by_hash(job), None)


@pytest.mark.parametrize(
    "changed",
    [
        "record_json.py",
        "search/objective.py",
        "search/evaluate.py",
        "search/schema.py",
        "search/settings.py",
        "wiring/space.py",
        "wiring/wiring.py",
        "robot/reader.py",
        "air/duct.py",
        "ring/solve.py",
        "body/bullet.py",
        "gait/measures.py",
    ],
)
def test_code_version_hangs_on_every_file_that_decides_a_row(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, changed: str
) -> None:
    package = tmp_path / "gaitlab"
    shutil.copytree(PACKAGE, package, ignore=shutil.ignore_patterns("__pycache__"))
    monkeypatch.setattr(identity_module.gaitlab, "__file__", str(package / "__init__.py"))
    before = code_version.__wrapped__()
    with (package / changed).open("a", encoding="utf-8") as file:
        file.write("# more\n")
    assert code_version.__wrapped__() != before


def test_code_version_does_not_hang_on_reports_and_strategies(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    package = tmp_path / "gaitlab"
    shutil.copytree(PACKAGE, package, ignore=shutil.ignore_patterns("__pycache__"))
    monkeypatch.setattr(identity_module.gaitlab, "__file__", str(package / "__init__.py"))
    for name in ("report/sheet.py", "search/strategies/race.py", "search/run.py", "cli/main.py"):
        (package / name).write_text("", encoding="utf-8")
    assert code_version.__wrapped__() == code_version()


def test_rows_of_a_bundle_are_written_together_or_not_at_all(tmp_path: Path) -> None:
    task = task_of()
    jobs = [job_of(task, Ask(wiring, coarse=True)) for wiring in task.space]
    with created(tmp_path / LEDGER_FILE, task.identity) as ledger:
        with pytest.raises(KeyboardInterrupt), ledger.at_once():
            ledger.add(jobs[0], by_hash(jobs[0]), None)
            raise KeyboardInterrupt
        assert ledger.number_of_walks() == 0
        with ledger.at_once():
            for job in jobs:
                ledger.add(job, by_hash(job), None)
    with reopened(tmp_path / LEDGER_FILE, task.identity) as ledger:
        assert ledger.number_of_walks() == 24
        assert {level for (level,) in ledger.select("SELECT level FROM walks")} == {"coarse"}
