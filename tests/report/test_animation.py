"""Films have the frames and the pace asked for, repeat their bytes, and draw what was recorded."""

from __future__ import annotations

import dataclasses
import shutil
import subprocess
from pathlib import Path

import numpy as np
import pytest
from PIL import Image

from gaitlab.errors import InputError
from gaitlab.gait.records import Part
from gaitlab.report.animation import Film, film_of, painted, write_gif, write_mp4
from gaitlab.report.body_view import TRUNK_TOP
from gaitlab.report.canvas import Canvas, fitted, hull, text_width
from gaitlab.report.moments import even_moments
from gaitlab.report.solids import rotated, solids_of
from gaitlab.report.stage_set import HEIGHT, WIDTH
from gaitlab.report.style import rgb255
from tests.report import synthetic


@pytest.fixture(scope="module")
def film() -> Film:
    wiring = synthetic.BEST
    return film_of(synthetic.trace(wiring), synthetic.ring_run(wiring), wiring, title="row", frames_per_period=6)


def test_a_gif_has_the_frames_and_the_pace_asked_for(film: Film, tmp_path: Path) -> None:
    with Image.open(write_gif(film, tmp_path / "walk.gif")) as picture:
        assert picture.n_frames == 18
        assert picture.size == (WIDTH, HEIGHT)
        assert picture.info["duration"] == 150  # 0.9 s in six steps
        assert picture.info["loop"] == 0


@pytest.mark.slow
def test_three_periods_stay_under_four_megabytes(tmp_path: Path) -> None:
    wiring = synthetic.BEST
    film = film_of(synthetic.trace(wiring), synthetic.ring_run(wiring), wiring, title="row")
    assert len(film.frames) == 3 * 22
    assert write_gif(film, tmp_path / "walk.gif").stat().st_size < 4e6


def test_the_same_film_is_the_same_bytes(film: Film, tmp_path: Path) -> None:
    assert write_gif(film, tmp_path / "a.gif").read_bytes() == write_gif(film, tmp_path / "b.gif").read_bytes()


def test_frames_begin_at_a_whole_period_and_step_evenly() -> None:
    trace = synthetic.trace(synthetic.BEST, periods=4, hz=200.0)
    frames = even_moments(trace, periods=3, per_period=9)
    moments = trace.time_s[list(frames)]
    assert moments[0] == pytest.approx(trace.period_s)
    np.testing.assert_allclose(np.diff(moments), trace.period_s / 9, atol=0.5 / 200)


def test_a_trace_shorter_than_asked_gives_what_it_has() -> None:
    trace = synthetic.trace(synthetic.BEST, periods=2)
    assert len(even_moments(trace, periods=3, per_period=10)) == 20


def test_a_trace_shorter_than_a_period_is_refused() -> None:
    trace = synthetic.trace(synthetic.BEST, periods=1)
    short = dataclasses.replace(trace, period_s=5.0)
    with pytest.raises(InputError, match="trace must be at least one whole period long"):
        even_moments(short, periods=3, per_period=10)
    with pytest.raises(InputError, match="periods and pictures per period must be at least 1 and 2"):
        even_moments(trace, periods=0, per_period=10)


def test_mp4_through_ffmpeg(film: Film, tmp_path: Path) -> None:
    assert shutil.which("ffprobe"), "the films' tests need ffmpeg on the path"
    target = write_mp4(film, tmp_path / "walk.mp4")
    asked = [
        "ffprobe",
        "-v",
        "error",
        "-count_frames",
        "-show_entries",
        "stream=width,height,nb_read_frames",
        "-of",
        "csv=p=0",
    ]
    told = subprocess.run([*asked, str(target)], capture_output=True, text=True, check=True).stdout
    assert told.strip() == f"{WIDTH},{HEIGHT},18"


def test_without_ffmpeg_it_says_so(film: Film, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("PATH", str(tmp_path))
    with pytest.raises(InputError, match=r"ffmpeg must be on the path for MP4.*write a .gif instead"):
        write_mp4(film, tmp_path / "walk.mp4")
    assert not (tmp_path / "walk.mp4").exists()


@pytest.mark.parametrize(("name", "message"), [("walk.png", "named .gif"), ("none/walk.gif", "there already")])
def test_wrong_names(film: Film, tmp_path: Path, name: str, message: str) -> None:
    with pytest.raises(InputError, match=message):
        write_gif(film, tmp_path / name)


def test_feet_under_load_are_orange_and_swinging_ones_are_not(film: Film) -> None:
    frame = film.frames[4]
    pixels = np.asarray(painted(film, 4))
    for foot, at in enumerate(film.stage.side.pixels(film.trace.foot_m[frame])):
        red, _, blue = pixels[round(at[1]), round(at[0])].astype(int)
        assert (red - blue > 100) == bool(film.trace.loaded[frame, foot])


def test_the_body_moves_to_the_right(film: Film) -> None:
    middles = []
    for index in (0, 17):
        row = round(film.stage.side.pixels(film.trace.position_m[film.frames[index], :1])[0, 1])
        pixels = np.asarray(painted(film, index))[row, 20:580]
        middles.append(np.flatnonzero((pixels == rgb255(TRUNK_TOP)).all(axis=1)).mean())
    expected = film.stage.side.px_per_m * 0.011 * 17 / 6
    assert middles[1] - middles[0] == pytest.approx(expected, abs=2)


def test_rotation_by_a_quaternion_is_the_rotation_matrix() -> None:
    turn = np.array([0.0, np.sin(0.3), 0.0, np.cos(0.3)])
    matrix = np.array([[np.cos(0.6), 0, np.sin(0.6)], [0, 1, 0], [-np.sin(0.6), 0, np.cos(0.6)]])
    points = np.array([[1.0, 2.0, 3.0], [-1.0, 0.5, 0.0]])
    np.testing.assert_allclose(rotated(points, turn), points @ matrix.T, atol=1e-12)


def test_a_hull_keeps_corners_only() -> None:
    square = np.array([[0, 0], [1, 0], [1, 1], [0, 1], [0.5, 0.5], [0.5, 0.0]], dtype=float)
    assert {tuple(p) for p in hull(square)} == {(0, 0), (1, 0), (1, 1), (0, 1)}


def test_ribs_fill_their_segment() -> None:
    (part,) = (Part("a.1", "capsule", (0.006, 0.008, 0.0), (0.0, 0.0, 0.0), "a", "a"),)
    solids = solids_of((part,))
    points = np.concatenate([solid.points_m for solid in solids])
    assert len(solids) == 2
    assert np.ptp(points[:, 2]) == pytest.approx(0.008, rel=0.05)
    assert np.hypot(points[:, 0], points[:, 1]).max() == pytest.approx(0.006)


def test_long_titles_are_cut_to_fit() -> None:
    words, size = fitted("wiring " * 60, 300.0, size=12.0, least=8.0)
    assert words.endswith("…") and size == 8.0
    assert text_width(words, size) <= 300.0 + text_width("…", size)
    assert fitted("short", 300.0, size=12.0, least=8.0) == ("short", 12.0)


def test_drawing_twice_the_size_smooths_edges() -> None:
    canvas = Canvas.blank(40, 40, "#ffffff")
    canvas.disc((20, 20), 10, fill="#000000")
    shades = set(np.asarray(canvas.finished().convert("L")).ravel())
    assert len(shades) > 3
