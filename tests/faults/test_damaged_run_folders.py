"""Saved runs that were damaged or tampered with: the reports say so in one message, or leave a gap; they never break down."""

from __future__ import annotations

import copy
import json
import random
from pathlib import Path
from typing import Any

import pytest

from tests.cli.commands import Finished, gaitlab
from tests.report.synthetic import write_run
from tests.robot.documents import ROW5, row5
from tests.robot.mutations import (
    doubled_item,
    renamed_key,
    swapped_values,
    take_away,
    wrong_number,
    wrong_text,
    wrong_type,
)

WAYS = [take_away, take_away, wrong_number, wrong_type, wrong_text, renamed_key, doubled_item, swapped_values]
RECORDS = 60  # damaged records for the page; the sheet and its picture take longer and get a quarter of them
TRACES = 12


@pytest.fixture(scope="module")
def run(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return write_run(tmp_path_factory.mktemp("runs") / "run", row5(), ROW5)


def assert_clean(shown: Finished, what: str) -> None:
    assert shown.code in (0, 2), f"{what}: exit code {shown.code}: {shown.err}"
    assert "Traceback" not in shown.err
    if shown.code == 2:
        assert shown.out == "" and shown.err.startswith("Error: ")


def damaged_record(run: Path, chance: random.Random) -> str:
    """A run.json with one to three things wrong, as JSON text (NaN and infinities as Python writes them)."""
    record: dict[str, Any] = copy.deepcopy(json.loads((run / "run.json").read_text(encoding="utf-8")))
    for _ in range(chance.choice([1, 1, 3])):
        chance.choice(WAYS)(record, lambda options: chance.choice(list(options)))
    return json.dumps(record)


@pytest.mark.parametrize(("command", "trials"), [("page", RECORDS), ("sheet", RECORDS // 4)])
def test_damaged_records(run: Path, tmp_path: Path, command: str, trials: int) -> None:
    chance = random.Random(command)
    suffix = {"page": "html", "sheet": "pdf"}[command]
    codes = []
    for trial in range(trials):
        folder = tmp_path / str(trial)
        (folder / "traces").mkdir(parents=True)
        (folder / "run.json").write_text(damaged_record(run, chance), encoding="utf-8")
        for trace in ("best.npz", "reversed.npz"):
            (folder / "traces" / trace).symlink_to(run / "traces" / trace)
        shown = gaitlab(command, str(folder), "--out", str(tmp_path / f"{trial}.{suffix}"))
        assert_clean(shown, f"{command} trial {trial}")
        codes.append(shown.code)
    assert codes.count(2) >= trials // 4, "most damage is noticed"


def test_damaged_traces(run: Path, tmp_path: Path) -> None:
    chance = random.Random(3)
    for trial in range(TRACES):
        folder = tmp_path / str(trial)
        (folder / "traces").mkdir(parents=True)
        (folder / "run.json").symlink_to(run / "run.json")
        data = bytearray((run / "traces" / "best.npz").read_bytes())
        for _ in range(chance.choice([1, 20])):
            data[chance.randrange(len(data))] ^= 1 << chance.randrange(8)
        kept = data[: chance.randrange(len(data))] if trial % 3 == 0 else data
        (folder / "traces" / "best.npz").write_bytes(kept)
        assert_clean(gaitlab("page", str(folder), "--out", str(tmp_path / f"{trial}.html")), f"trace trial {trial}")


def test_a_record_may_not_name_files_outside_its_folder(run: Path, tmp_path: Path) -> None:
    """Names in a record are shown, never opened or written."""
    record = (run / "run.json").read_text(encoding="utf-8")
    folder = tmp_path / "run"
    (folder / "traces").mkdir(parents=True)
    robot = json.loads(record)
    robot["robot"]["path"] = "../../../../etc/passwd" if "path" in robot.get("robot", {}) else "x"
    (folder / "run.json").write_text(json.dumps(robot), encoding="utf-8")
    shown = gaitlab("page", str(folder))
    assert_clean(shown, "page")
    page = folder / "page.html"
    assert not page.exists() or "root:x:0" not in page.read_text(encoding="utf-8")


@pytest.mark.parametrize(
    "text", ["", "{", "[]", "null", "nan", '{"layout": 99}', "[" * 100_000, '{"layout": "1"}', "\x00"]
)
def test_what_is_no_record(tmp_path: Path, text: str) -> None:
    (tmp_path / "run.json").write_text(text, encoding="utf-8")
    for command in ("page", "sheet", "draw"):
        shown = gaitlab(command, str(tmp_path))
        assert shown.code == 2, shown.err
        assert_clean(shown, command)
    assert [p.name for p in tmp_path.iterdir()] == ["run.json"]


def test_scripts_in_a_robot_file_stay_text_in_the_page(tmp_path: Path) -> None:
    evil = '<script>alert(1)</script>" onload="x\' &amp; </style>'
    document = {**row5(), "notes": [evil]}
    text = (
        ROW5.replace("five bending bellows legs", "<script>alert(2)</script>")
        + "\n# </script><img src=x onerror=alert(3)>\n"
    )
    folder = write_run(tmp_path / "run", document, text)
    shown = gaitlab("page", str(folder))
    assert shown.code == 0, shown.err
    page = (folder / "page.html").read_text(encoding="utf-8")
    for bad in ("<script>alert(", "onload=\"x'", "<img src=x"):
        assert bad not in page
