"""What a run folder gives is drawn; what cannot be is told, and costs only itself."""

from __future__ import annotations

import json
from pathlib import Path

import pytest
from click.testing import CliRunner
from PIL import Image

from gaitlab.cli.main import cli
from gaitlab.report.run_folder import read_run
from gaitlab.report.run_pictures import draw, draw_run, writers

FIGURES = ("ranking", "footfall", "pressure_map", "pump", "path", "spread", "sensitivities")


@pytest.mark.slow
def test_every_picture_of_a_full_run(own_folder: Path) -> None:
    drawn = draw_run(own_folder)
    assert {file.name for file in drawn.files} == {f"{name}.png" for name in FIGURES} | {"best.gif", "reversed.gif"}
    assert drawn.left_out == ()
    for file in drawn.files:
        assert file.stat().st_size > 2000
    with Image.open(own_folder / "best.gif") as film:
        assert film.n_frames == 3 * 22


def test_without_traces_the_rest_is_drawn(own_folder: Path) -> None:
    for trace in (own_folder / "traces").iterdir():
        trace.unlink()
    drawn = draw_run(own_folder)
    assert {"ranking.png", "footfall.png", "pressure_map.png"} <= {file.name for file in drawn.files}
    assert not (own_folder / "best.gif").exists()
    assert len(drawn.left_out) == 2


def test_svg_and_mp4_are_added_on_request(run_folder: Path) -> None:
    names = set(writers(read_run(run_folder), svg=True, mp4=True))
    assert names == {f"{name}{ending}" for name in FIGURES for ending in (".png", ".svg")} | {
        f"{name}{ending}" for name in ("best", "reversed") for ending in (".gif", ".mp4")
    }


def test_without_ffmpeg_only_the_mp4_is_left_out(
    run_folder: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    run = read_run(run_folder)
    chosen = {name: write for name, write in writers(run, mp4=True).items() if name in ("best.mp4", "ranking.png")}
    monkeypatch.setenv("PATH", str(tmp_path))
    drawn = draw(run, tmp_path, chosen)
    assert [file.name for file in drawn.files] == ["ranking.png"]
    assert drawn.left_out[0].startswith("best.mp4 is left out: ffmpeg must be on the path")


@pytest.mark.slow
def test_the_command_draws_once(own_folder: Path, tmp_path: Path) -> None:
    asked = ["draw", str(own_folder), "--out", str(tmp_path / "talk"), "--svg", "--periods", "1"]
    first = CliRunner().invoke(cli, [*asked, "--json"])
    assert first.exit_code == 0, first.output
    told = json.loads(first.stdout)
    assert {Path(file).name for file in told["files"]} == {path.name for path in (tmp_path / "talk").iterdir()}
    with Image.open(tmp_path / "talk" / "best.gif") as film:
        assert film.n_frames == 22
    again = CliRunner().invoke(cli, asked)
    assert again.exit_code == 2 and "--force" in again.output


def test_the_command_says_where_it_cannot_write(own_folder: Path, tmp_path: Path) -> None:
    (tmp_path / "file").write_text("", encoding="utf-8")
    result = CliRunner().invoke(cli, ["draw", str(own_folder), "--out", str(tmp_path / "file" / "talk")])
    assert result.exit_code == 2 and "--out must be a folder that can be written" in result.output
    nothing = CliRunner().invoke(cli, ["draw", str(tmp_path)])
    assert nothing.exit_code == 2 and "holds no run" in nothing.output
