"""The bench sheet is one A4 page whose text can be read back, row by row, and whose numbers are the run's."""

from __future__ import annotations

import dataclasses
import itertools
import json
import math
import re
import subprocess
import tomllib
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
from click.testing import CliRunner
from matplotlib.figure import Figure
from matplotlib.text import Text
from matplotlib.transforms import Bbox

from gaitlab.cli.main import cli
from gaitlab.cli.starter import starter_text
from gaitlab.errors import InputError
from gaitlab.report.paper import Paper, broken, shortened, text_width_mm
from gaitlab.report.run_folder import SavedRun, read_run
from gaitlab.report.sheet import A4_MM, BOTTOM, LEFT, WIDTH, bench_sheet, sheet_files
from gaitlab.report.sheet_content import sheet_content, tube_rows
from gaitlab.report.style import MM_PER_INCH, styled
from gaitlab.report.words import course_text, number, reversed_text, speed_estimate
from gaitlab.ring.sequence import ideal_run
from gaitlab.robot.parts import Unit
from gaitlab.robot.reader import read_robot, robot_from_document
from gaitlab.robot.records import Robot
from gaitlab.wiring.wiring import Wiring
from tests.report import synthetic

ROBOTS = Path(__file__).resolve().parents[2] / "robots"
TOLERANCE_MM = 0.05  # a hairline; chosen by us
DPI = (72, 150)  # of the PDF and of the PNG


@pytest.fixture(scope="module")
def run(run_folder: Path) -> SavedRun:
    return read_run(run_folder)


def _pdf_text(pdf: Path) -> str:
    return subprocess.run(["pdftotext", "-layout", str(pdf), "-"], capture_output=True, text=True, check=True).stdout


def _written(run: SavedRun, folder: Path) -> Path:
    for path, content in sheet_files(run, folder / "sheet.pdf").items():
        path.write_bytes(content)
    return folder / "sheet.pdf"


@pytest.fixture(scope="module")
def sheet(run: SavedRun, tmp_path_factory: pytest.TempPathFactory) -> Path:
    return _written(run, tmp_path_factory.mktemp("sheet"))


def test_one_page_of_a4(sheet: Path) -> None:
    told = subprocess.run(["pdfinfo", str(sheet)], capture_output=True, text=True, check=True).stdout
    assert re.search(r"Pages:\s+1\b", told)
    assert "(A4)" in told
    assert sheet.with_suffix(".png").stat().st_size > 50_000


def test_its_text_holds_every_row_of_the_wiring(run: SavedRun, sheet: Path) -> None:
    text = _pdf_text(sheet)
    for inlet, source in run.best.wiring.pairs:
        length = next(row.length_m for row in tube_rows(run) if row.inlet == inlet)
        assert re.search(rf"output {source}\s+{inlet}\s+{length * 1e3:.0f}\s", text), (inlet, source)


def test_its_text_holds_cautions_orientation_and_interval(sheet: Path) -> None:
    text = " ".join(_pdf_text(sheet).split())
    for words in (
        "implode",
        "Compressed air",
        "Blades and needles",
        "Silicone",
        "solvents",
        "Hot pumps",
        "estimates",
        "Local codes",
    ):
        assert words in text
    assert "walks on the spot: 1.3 mm per period instead of 11.2" in text
    assert "12.1 mm/s, likely 9.0 to 14.7" in text


def test_the_same_run_gives_the_same_bytes(run: SavedRun, sheet: Path) -> None:
    assert sheet_files(run, sheet) == {path: path.read_bytes() for path in (sheet, sheet.with_suffix(".png"))}


def test_cut_lengths_are_the_files_rule_rounded_up(run: SavedRun) -> None:
    """Straight distance from the manifold times slack plus extra: 70.4 mm · 1.3 + 15 mm for the outer legs."""
    outer = 1.3 * math.hypot(68.0, 12.0 + 6.0) + 15.0
    row = next(row for row in tube_rows(run) if row.inlet == "a")
    assert row.length_m * 1e3 == pytest.approx(math.ceil(outer))


def test_phase_and_swing_are_the_rings(run: SavedRun) -> None:
    row = next(row for row in tube_rows(run) if row.source == 2)
    assert row.phase == pytest.approx(0.6)
    assert row.delay_s == pytest.approx(0.6 * synthetic.PERIOD_S)
    assert (row.least_Pa, row.peak_Pa) == pytest.approx((run.ring.least_vacuum_Pa[1], run.ring.peak_vacuum_Pa[1]))


def test_inlets_on_atmosphere_and_supply_come_last(run: SavedRun) -> None:
    wiring = Wiring.of({"a": "open", "b": 2, "c": "held", "d": 5, "e": 3})
    rows = tube_rows(dataclasses.replace(run, ranking=(dataclasses.replace(run.best, wiring=wiring),)))
    assert [row.source for row in rows] == [2, 3, 5, "held", "open"]
    assert rows[3].peak_Pa == run.ring.supply_mean_Pa and rows[4].peak_Pa == 0.0


def _crowded(run: SavedRun) -> SavedRun:
    """The same run with thirty legs on five outputs and one leg open, in a robot of the same name."""
    legs = tuple(
        dataclasses.replace(run.robot.body.legs[k % 5], name=f"leg{k}", units=_units(run, k)) for k in range(31)
    )
    robot = dataclasses.replace(run.robot, body=dataclasses.replace(run.robot.body, legs=legs))
    wiring = Wiring.of({f"leg{k}": "open" if k == 30 else k % 5 + 1 for k in range(31)})
    best = dataclasses.replace(run.best, wiring=wiring, reversed_wiring=wiring.reversed(5))
    return dataclasses.replace(run, robot=robot, ranking=(best,))


def _units(run: SavedRun, k: int) -> tuple[Unit, ...]:
    return (dataclasses.replace(run.robot.body.legs[0].units[0], inlet=f"leg{k}"),)


def test_thirty_tubes_fit_as_well(run: SavedRun, tmp_path: Path) -> None:
    crowded = _crowded(run)
    text = _pdf_text(_written(crowded, tmp_path))
    for k in range(30):
        assert re.search(rf"output {k % 5 + 1}\s+leg{k}\s+\d+\s", text), k
    assert "Open to atmosphere, no tube: leg30." in text


def _of_robot(run: SavedRun, robot: Robot) -> SavedRun:
    """The same run's figures on another robot, wired in order, its ring an ideal one."""
    inlets, stages = robot.inlets(), robot.ring.stages
    wiring = Wiring.of({inlet: k % stages + 1 for k, inlet in enumerate(inlets)})
    best = dataclasses.replace(run.best, wiring=wiring, reversed_wiring=wiring.reversed(stages))
    ring = ideal_run(robot, wiring, "natural", 1.0, 50e3)
    return dataclasses.replace(run, robot=robot, ranking=(best,), ring=ring)


def _long(robot: Robot) -> Robot:
    """The same robot with names as long as a file may give them."""

    def unit(old: Unit) -> Unit:
        other = None if old.opposed_inlet is None else old.opposed_inlet.ljust(64, "w")
        return dataclasses.replace(old, inlet=old.inlet.ljust(64, "W"), opposed_inlet=other)

    def chain(old: Any) -> Any:
        return dataclasses.replace(old, units=tuple(unit(u) for u in old.units))

    legs, spines = tuple(map(chain, robot.body.legs)), tuple(map(chain, robot.body.spines))
    return dataclasses.replace(robot, name="W" * 64, body=dataclasses.replace(robot.body, legs=legs, spines=spines))


def _starter(legs: int) -> Robot:
    return robot_from_document(tomllib.loads(starter_text(f"starter{legs}", legs)))


SHEETS: dict[str, Callable[[SavedRun], SavedRun]] = {
    "five": lambda run: run,
    "thirty-one": _crowded,
    **{p.stem: lambda run, p=p: _of_robot(run, read_robot(p).robot) for p in sorted(ROBOTS.glob("*.toml"))},
    **{f"{p.stem}, long names": lambda run, p=p: _of_robot(run, _long(read_robot(p).robot)) for p in sorted(ROBOTS.glob("*.toml"))},
    **{f"starter of {n}": lambda run, n=n: _of_robot(run, _starter(n)) for n in (3, 7, 15)},
    "starter of 15, long names": lambda run: _of_robot(run, _long(_starter(15))),
}  # fmt: skip


def _extent_mm(text: Text) -> Bbox:
    """Where a text is on the page [mm from the left, from the top] as the figure's own renderer sets it."""
    figure = text.get_figure()
    assert isinstance(figure, Figure)
    box = text.get_window_extent(figure.canvas.get_renderer())  # type: ignore[attr-defined]
    mm, height = MM_PER_INCH / figure.dpi, figure.bbox.height
    return Bbox.from_extents(box.x0 * mm, (height - box.y1) * mm, box.x1 * mm, (height - box.y0) * mm)


@pytest.mark.parametrize("name", SHEETS)
def test_no_text_leaves_its_box_its_column_or_the_margins(
    run: SavedRun, monkeypatch: pytest.MonkeyPatch, name: str
) -> None:
    columns: list[tuple[Text, float]] = []
    set_paragraph = Paper.paragraph

    def watched(paper: Paper, x: float, y: float, words: str, *, width: float, **look: Any) -> float:
        before = len(paper.ground.texts)
        below = set_paragraph(paper, x, y, words, width=width, **look)
        columns.extend((text, x + width) for text in paper.ground.texts[before:])
        return below

    monkeypatch.setattr(Paper, "paragraph", watched)
    figure = bench_sheet(SHEETS[name](run))
    assert figure.get_size_inches() * 25.4 == pytest.approx(A4_MM)
    for dpi in DPI:
        with styled():
            figure.set_dpi(dpi)
            figure.draw_without_rendering()
            texts = {text: _extent_mm(text) for text in figure.findobj(Text) if _is_seen(text)}
        _assert_in_place(texts, {text: right for text, right in columns if text in texts}, figure)


def _assert_in_place(texts: dict[Text, Bbox], columns: dict[Text, float], figure: Figure) -> None:
    assert len(columns) > 30
    for text, box in texts.items():
        assert box.x0 >= LEFT - TOLERANCE_MM and box.x1 <= LEFT + WIDTH + TOLERANCE_MM, text.get_text()
        assert box.y0 > 0.0 and box.y1 < BOTTOM, text.get_text()
    for text, right in columns.items():
        assert texts[text].x1 <= right + TOLERANCE_MM, text.get_text()
    ground = [(text, box) for text, box in texts.items() if text.axes is figure.axes[0]]
    for (one, a), (other, b) in itertools.combinations(ground, 2):
        assert not a.padded(-0.2).overlaps(b.padded(-0.2)), (one.get_text(), other.get_text())


def _is_seen(text: Text) -> bool:
    return text.get_visible() and bool(text.get_text().strip())


@pytest.mark.parametrize(
    ("travel_m", "words"),
    [
        (0.001, "walks on the spot"),
        (-0.0015, "walks on the spot"),
        (-0.005, "walks backwards"),
        (0.006, "much slower"),
        (0.011, "much the same speed"),
        (math.nan, "does not walk (fell over)"),
    ],
)
def test_the_reversed_wave_in_words(run: SavedRun, travel_m: float, words: str) -> None:
    backwards = dataclasses.replace(synthetic.walk(), travel_m=travel_m, outcome="fell_over")
    assert words in reversed_text(dataclasses.replace(run.best, reversed_walk=backwards))


@pytest.mark.parametrize(
    ("drift_m", "turn_rad", "words"),
    [
        (0.0012, -0.02, "drifts 1.2 mm to the left, turns 1.1° to the right per period"),
        (-1e-6, 1e-5, "drifts 0.0 mm, turns 0.0° per period"),
        (math.nan, 0.0, "not known"),
    ],
)
def test_the_course_in_words(drift_m: float, turn_rad: float, words: str) -> None:
    assert course_text(dataclasses.replace(synthetic.walk(), drift_m=drift_m, turn_rad=turn_rad)) == words


def test_a_reverse_that_was_not_walked_is_not_invented(run: SavedRun) -> None:
    assert "was not walked" in reversed_text(dataclasses.replace(run.best, reversed_walk=None))


def test_without_a_spread_the_interval_is_the_engines_doubt(run: SavedRun) -> None:
    estimate = speed_estimate(dataclasses.replace(run, spread=None))
    assert estimate is not None
    low, middle, high = estimate.speed_m_s
    assert middle == pytest.approx(0.0112 / 0.9)
    assert (low / middle, high / middle) == pytest.approx((0.75, 1.25))
    assert "engine" in estimate.basis


def test_long_and_odd_names_fit(run: SavedRun, tmp_path: Path) -> None:
    name = "crawler $\\frac{ " + 40 * "very long " + "<b>"
    robot = dataclasses.replace(run.robot, name=name)
    pdf = _written(dataclasses.replace(run, robot=robot), tmp_path)
    assert "crawler $\\frac{ very long" in _pdf_text(pdf)


def test_text_is_broken_by_measured_width() -> None:
    lines = broken("the quick brown fox jumps over the lazy dog " * 3, 40.0, 8.0)
    assert " ".join(lines).split() == ("the quick brown fox jumps over the lazy dog " * 3).split()
    assert max(text_width_mm(line, 8.0) for line in lines) <= 40.0
    assert len(broken("x" * 300, 40.0, 8.0)) > 5


def test_a_line_that_must_fit_is_shortened_in_the_middle() -> None:
    name = "front_left_" + 40 * "very_" + "long_bellows_7"
    short = shortened(name, 30.0, 4.0)
    assert text_width_mm(short, 4.0) <= 30.0 < text_width_mm(short + "x", 4.0)
    assert short.startswith("front_left_") and short.endswith("ellows_7") and "…" in short
    assert shortened("leg1", 30.0, 4.0) == "leg1"


@pytest.mark.parametrize(("value", "text"), [(-0.04, "0.0"), (math.inf, "–"), (12.35, "12.3"), (-3.0, "−3.0")])
def test_numbers_in_words(value: float, text: str) -> None:
    assert number(value) == text


def test_the_content_counts_every_stage(run: SavedRun) -> None:
    content = sheet_content(run)
    assert "1 → 2 → 3 → 4 → 5 → 1" in content.orientation[0]
    assert len(content.assembly) == 6 and len(content.faults) == 6


def test_a_wrong_ending(run: SavedRun) -> None:
    with pytest.raises(InputError, match=r"must be named \.pdf, got 'sheet.txt'"):
        sheet_files(run, Path("sheet.txt"))


def test_the_command_writes_once_and_prints_json(own_folder: Path) -> None:
    first = CliRunner().invoke(cli, ["sheet", str(own_folder), "--json"])
    assert first.exit_code == 0, first.output
    told = json.loads(first.stdout)
    assert told["wiring"] == synthetic.BEST.as_dict()
    assert [row["source"] for row in told["tubes"]] == [1, 2, 3, 4, 5]
    assert (own_folder / "sheet.pdf").is_file() and (own_folder / "sheet.png").is_file()
    second = CliRunner().invoke(cli, ["sheet", str(own_folder)])
    assert second.exit_code == 2 and "--force" in second.output
    third = CliRunner().invoke(cli, ["sheet", str(own_folder), "--force"])
    assert third.exit_code == 0 and "walks on the spot" in third.output


def test_the_command_refuses_a_folder_without_a_run(tmp_path: Path) -> None:
    result = CliRunner().invoke(cli, ["sheet", str(tmp_path)])
    assert result.exit_code == 2 and "holds no run" in result.output
    assert list(tmp_path.iterdir()) == []


@pytest.mark.parametrize("out", ["sheet.txt", "none/sheet.pdf", "x" * 300 + ".pdf"])
def test_the_command_refuses_names_that_are_none(own_folder: Path, tmp_path: Path, out: str) -> None:
    before = sorted(tmp_path.rglob("*"))
    result = CliRunner().invoke(cli, ["sheet", str(own_folder), "--out", f"{tmp_path}/{out}"])
    assert result.exit_code == 2, result.output
    assert sorted(tmp_path.rglob("*")) == before
