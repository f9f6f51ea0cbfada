"""gaitlab export: files, refusals, exit codes."""

from __future__ import annotations

import csv
import json
from pathlib import Path

import pytest

from tests.cli.commands import gaitlab

ROW5 = str(Path(__file__).resolve().parents[2] / "robots" / "tray_row5.toml")
WIRING = "a=1 b=3 c=5 d=2 e=4"


def test_urdf_is_written_once(tmp_path: Path) -> None:
    path = tmp_path / "row5.urdf"
    done = gaitlab("export", ROW5, "--urdf", str(path), "--json")
    facts = json.loads(done.out)
    assert done.code == 0 and facts["joints"] == 25 and facts["links"] == 26
    assert path.read_text(encoding="utf-8").startswith("<?xml")
    again = gaitlab("export", ROW5, "--urdf", str(path))
    assert again.code == 2 and "--force" in again.err
    assert gaitlab("export", ROW5, "--urdf", str(path), "--force").code == 0


def test_csv_of_a_walk(tmp_path: Path) -> None:
    path = tmp_path / "row5.csv"
    done = gaitlab("export", ROW5, "--csv", str(path), "--wiring", WIRING, "--periods", "1", "--engine", "mujoco")
    assert done.code == 0
    with path.open(encoding="utf-8") as file:
        header, *rows = csv.reader(file)
    assert header[0] == "time_s" and float(rows[0][0]) == 0.0
    assert len(rows) > 50


@pytest.mark.parametrize(
    ("words", "message"),
    [
        ((), "given --urdf or --csv"),
        (("--csv", "x.csv"), "given together"),
        (("--urdf", "no/such/folder/x.urdf"), "writable"),
        (("--csv", "x.csv", "--wiring", "a=1"), "missing b, c, d, e"),
    ],
)
def test_refusals(words: tuple[str, ...], message: str) -> None:
    done = gaitlab("export", ROW5, *words)
    assert done.code == 2
    assert message in done.err
    assert not Path("x.csv").exists()
