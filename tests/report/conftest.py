"""One made-up run folder for the whole of the report's tests; tests that change it take a copy."""

from __future__ import annotations

import shutil
import tomllib
from pathlib import Path

import pytest

from tests.report import synthetic

ROBOT_FILE = Path(__file__).resolve().parents[2] / "robots" / "tray_row5.toml"


@pytest.fixture(scope="session")
def run_folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A finished run; read only."""
    text = ROBOT_FILE.read_text(encoding="utf-8")
    return synthetic.write_run(tmp_path_factory.mktemp("runs") / "row5", tomllib.loads(text), text)


@pytest.fixture
def own_folder(run_folder: Path, tmp_path: Path) -> Path:
    """A copy that a test may change."""
    return Path(shutil.copytree(run_folder, tmp_path / "own"))
