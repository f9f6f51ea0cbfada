"""What commands print: JSON without NaN, tables for people, files in one step, a bar that knows the time left."""

from __future__ import annotations

import io
import json
from pathlib import Path

import click
import numpy as np
import pytest

from gaitlab.cli.files import write_new
from gaitlab.cli.options import Number
from gaitlab.cli.output import cell, json_text, print_failure, table_text
from gaitlab.cli.progress import Progress, duration_text, progress
from gaitlab.errors import RunFolderError


def test_json_has_no_nan_no_infinity_and_no_negative_zero() -> None:
    value = {
        "a": float("nan"), "b": np.inf, "c": -0.0, "d": np.array([1.5, np.nan, -0.0]), "e": (np.int64(3), np.bool_(True)),
        "f": np.float32(0.5), "g": None, "h": Path("x"), 3: {"i": []},
    }  # fmt: skip
    text = json_text(value)
    assert "NaN" not in text and "Infinity" not in text and "-0" not in text
    assert json.loads(text) == {
        "a": None, "b": None, "c": 0, "d": [1.5, None, 0], "e": [3, True], "f": 0.5, "g": None, "h": "x", "3": {"i": []},
    }  # fmt: skip


def test_text_that_a_terminal_would_obey_is_escaped_in_json() -> None:
    assert "\x1b" not in json_text({"a": "\x1b[31m"})


@pytest.mark.parametrize(
    ("value", "text"),
    [
        (0.0, "0"), (-0.0, "0"), (1.0, "1"), (12345.6, "12346"), (0.00012, "0.00012"), (1e-7, "1.000e-07"), (2.5e7, "2.500e+07"),
        (-3.14159, "-3.142"), (99.995, "100"), (100, "100"), ("x", "x"), (None, "–"), (float("inf"), "–"), (True, "yes"),
        (np.float64(2.0), "2"), (-0.00004, "-4.000e-05"),
    ],
)  # fmt: skip
def test_numbers_in_tables_have_four_digits(value: object, text: str) -> None:
    assert cell(value) == text


def test_a_table_aligns_numbers_right_and_texts_left() -> None:
    assert table_text(["wiring", "mm"], [["a=1", 1.5], ["a=10 b=2", None]]).splitlines() == [
        "wiring     mm", "a=1       1.5", "a=10 b=2    –",
    ]  # fmt: skip
    assert table_text(["wiring", "mm"], []) == "wiring  mm"


def test_a_failed_run_exits_1_with_outcome_and_remedy(capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(click.exceptions.Exit) as ended:
        print_failure("latches", "use an odd ring", as_json=True, period_s=float("nan"))
    assert ended.value.exit_code == 1
    assert json.loads(capsys.readouterr().out) == {"outcome": "latches", "remedy": "use an odd ring", "period_s": None}
    with pytest.raises(click.exceptions.Exit):
        print_failure("latches", "use an odd ring", as_json=False)
    assert capsys.readouterr().out == "outcome: latches\nremedy: use an odd ring\n"


def test_a_file_is_written_whole_or_not_at_all(tmp_path: Path) -> None:
    write_new(tmp_path / "a.csv", "x", force=False)
    with pytest.raises(RunFolderError, match="add --force"):
        write_new(tmp_path / "a.csv", "y", force=False)
    write_new(tmp_path / "a.csv", b"z", force=True)
    assert (tmp_path / "a.csv").read_text() == "z"
    for bad in (tmp_path / "none" / "b.csv", tmp_path / "a.csv" / "b.csv", tmp_path / ("n" * 300), tmp_path / "a\0b"):
        with pytest.raises(RunFolderError, match="writable"):
            write_new(bad, "y", force=True)
    (tmp_path / "folder").mkdir()
    with pytest.raises(RunFolderError, match="writable"):
        write_new(tmp_path / "folder", "y", force=True)
    assert sorted(p.name for p in tmp_path.iterdir()) == ["a.csv", "folder"]


def test_a_dangling_link_is_not_written_through(tmp_path: Path) -> None:
    link = tmp_path / "link.csv"
    link.symlink_to(tmp_path / "elsewhere.csv")
    with pytest.raises(RunFolderError, match="add --force"):
        write_new(link, "y", force=False)
    write_new(link, "y", force=True)
    assert not link.is_symlink() and not (tmp_path / "elsewhere.csv").exists()


class Clock:
    """Seconds that a test sets."""

    now = 0.0

    def __call__(self) -> float:
        return self.now


class Terminal(io.StringIO):
    def isatty(self) -> bool:
        return True


def test_the_bar_is_silent_at_first_then_tells_time_left_and_the_best() -> None:
    clock, stream = Clock(), io.StringIO()
    bar = Progress(24, "walking", stream=stream, clock=clock)
    clock.now = 1.9
    bar.advance(1)
    assert stream.getvalue() == ""
    clock.now = 10.0
    bar.advance(5, note="best so far 11.4 mm")
    assert stream.getvalue() == "walking [######..................] 6/24, about 30 s left; best so far 11.4 mm\n"
    clock.now = 12.0
    bar.advance(1)
    assert stream.getvalue().count("\n") == 1, "a log gets a line now and then only"
    clock.now = 24.0
    bar.advance(17)
    assert "24/24, 24 s in all" in stream.getvalue()


def test_work_done_before_does_not_count_for_the_pace() -> None:
    clock = Clock()
    bar = Progress(100, "walking", stream=io.StringIO(), clock=clock)
    bar.advance(50, already_done=True)
    assert "time left not known yet" in bar.line(5.0)
    bar.advance(10)
    assert "60/100, about 40 s left" in bar.line(10.0)


def test_the_pace_counts_from_the_beginning_of_the_work() -> None:
    clock = Clock()
    bar = Progress(4, "finalists again", stream=io.StringIO(), clock=clock)
    clock.now = 1000.0
    bar.advance(0)
    clock.now = 1010.0
    bar.advance(1)
    assert bar._left(clock.now - bar._start) == "about 30 s left"


def test_on_a_terminal_one_line_is_redrawn() -> None:
    clock, stream = Clock(), Terminal()
    bar = Progress(2, "x", stream=stream, clock=clock)
    clock.now = 3.0
    bar.advance(1, note="a long note that goes away")
    clock.now = 4.0
    bar.advance(1, note="")
    bar.close()
    lines = stream.getvalue().split("\r")
    assert lines[0] == "" and len(lines[1]) == len(lines[2].rstrip("\n")) and stream.getvalue().endswith("\n")


def test_the_line_is_ended_when_the_work_is_stopped(capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(KeyboardInterrupt), progress(3, "x") as bar:
        bar.advance()
        raise KeyboardInterrupt
    assert capsys.readouterr().err == ""


def test_durations() -> None:
    assert [duration_text(s) for s in (0, 59.2, 60, 3600)] == ["1 s", "1 min 0 s", "1 min 0 s", "1 h 0 min"]


@pytest.mark.parametrize("text", ["nan", "inf", "-inf", "x", "0", "11", "1e999", ""])
def test_an_option_takes_finite_numbers_within_bounds_only(text: str) -> None:
    with pytest.raises(click.BadParameter):
        Number(above=0, at_most=10).convert(text, None, None)
    assert Number(above=0, at_most=10).convert("10", None, None) == 10.0
