"""The pictures that README shows are remade by one command."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import pytest
from PIL import Image

from gaitlab.report.media import HERO_WIDTH, main

MEDIA = Path(__file__).resolve().parents[2] / "media"


@pytest.mark.slow
def test_one_command_makes_every_picture_in_media(run_folder: Path, tmp_path: Path) -> None:
    command = [sys.executable, "-m", "gaitlab.report.media", str(run_folder), str(tmp_path)]
    done = subprocess.run(command, capture_output=True, text=True, check=True, cwd=MEDIA.parent)
    made = {path.name for path in tmp_path.iterdir()}
    assert {Path(line).name for line in done.stdout.split()} == made
    assert made == {path.name for path in MEDIA.iterdir()}
    with Image.open(tmp_path / "walk.gif") as film:
        assert film.n_frames == 3 * 18 and film.width == HERO_WIDTH
    assert (tmp_path / "walk.gif").stat().st_size < 4e6


def test_pictures_in_media_are_small_enough_to_clone() -> None:
    for path in MEDIA.iterdir():
        assert path.stat().st_size < 4e6, path.name


def test_wrong_use(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main([]) == 2 and "usage" in capsys.readouterr().err
    assert main([str(tmp_path), str(tmp_path)]) == 2 and "holds no run" in capsys.readouterr().err


def test_a_run_without_motion_has_no_hero(own_folder: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (own_folder / "traces" / "best.npz").unlink()
    assert main([str(own_folder), str(tmp_path)]) == 2
    assert "motion of best and reversed wiring" in capsys.readouterr().err
