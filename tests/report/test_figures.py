"""Every figure names its quantities with units, shows its data, and gives the same bytes twice."""

from __future__ import annotations

import dataclasses
import re
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from matplotlib.figure import Figure
from matplotlib.text import Text

from gaitlab.errors import InputError, RunFolderError
from gaitlab.report.body_path import body_path
from gaitlab.report.footfall import footfall_chart
from gaitlab.report.pressure_map import pressure_map, rising_phases
from gaitlab.report.pump_plot import pump_working_point
from gaitlab.report.ranking_plot import ranking_bars
from gaitlab.report.run_folder import SavedRun, read_run
from gaitlab.report.spread_plots import sensitivity_bars, spread_plot
from gaitlab.report.style import SERIES, VACUUM_STOPS, save_figure
from gaitlab.ring.waves import Waves
from gaitlab.robot.circuit import FixedVacuum
from tests.report import synthetic

FIGURES: dict[str, Callable[[SavedRun], Figure]] = {
    "footfall": lambda run: footfall_chart(run.best.walk, run.best.reversed_walk),
    "pressure_map": lambda run: pressure_map(run.ring.waves, wiring=run.best.wiring),
    "path": lambda run: body_path(run.trace),
    "ranking": lambda run: ranking_bars(run.ranking),
    "spread": lambda run: spread_plot(run.spread),
    "sensitivities": lambda run: sensitivity_bars(run.spread.sensitivities),
    "pump": lambda run: pump_working_point(run.robot, run.ring),
}


@pytest.fixture(scope="module", params=FIGURES)
def figure(request: pytest.FixtureRequest, run_folder: Path) -> Figure:
    return FIGURES[request.param](read_run(run_folder))


def _texts(figure: Figure) -> list[str]:
    return [text.get_text() for text in figure.findobj(Text) if text.get_text()]


def test_every_axis_says_what_it_shows_and_in_which_unit(figure: Figure) -> None:
    for ax in figure.axes:
        for label in (ax.get_xlabel(), ax.get_ylabel()):
            if label or ax.get_label() != "<colorbar>":
                assert label, "an axis without a label"
                named = re.search(r"\((mm|kPa|s|%|–|periods|L/min ANR|mm\nper period|mm per period)[^)]*\)", label)
                assert named or re.match(r"(foot|inlet|wiring|number)", label), label


def test_nothing_is_drawn_in_colour_alone(figure: Figure) -> None:
    assert any(ax.get_title(loc="left") for ax in figure.axes)
    assert figure.get_layout_engine() is not None


@pytest.mark.parametrize("name", FIGURES)
def test_same_record_same_bytes(name: str, run_folder: Path, tmp_path: Path) -> None:
    run = read_run(run_folder)
    for ending in (".png", ".svg"):
        files = [save_figure(FIGURES[name](run), tmp_path / f"{k}{ending}", dpi=60) for k in range(2)]
        assert files[0].read_bytes() == files[1].read_bytes()


def test_the_footfall_chart_tells_duty_factors(run_folder: Path) -> None:
    texts = _texts(footfall_chart(read_run(run_folder).best.walk))
    assert texts.count("0.62") == 5
    assert {"a", "b", "c", "d", "e"} <= set(texts)


def test_bars_of_the_footfall_chart_are_the_stance(run_folder: Path) -> None:
    walk = synthetic.walk()
    ax = footfall_chart(walk).axes[0]
    bars = [path for collection in ax.collections for path in collection.get_paths()]
    lengths = [np.ptp(path.vertices[:, 0]) for path in bars]
    stance = sum(length for length in lengths if length < 1.99)
    assert stance == pytest.approx(2 * 5 * 0.62)


def test_the_ranking_shows_ties_and_reversed_waves(run_folder: Path) -> None:
    figure = ranking_bars(read_run(run_folder).ranking, limit=6)
    ax = figure.axes[0]
    hatched = [patch for patch in ax.patches if patch.get_hatch()]
    assert len(hatched) == 2
    assert len([line for line in ax.lines if line.get_marker() == "D"]) == 6
    assert "a=1 b=4 c=2 d=5 e=3    1" in _texts(figure)


def test_a_lonely_best_is_tied_with_nobody(run_folder: Path) -> None:
    ranking = read_run(run_folder).ranking
    alone = [dataclasses.replace(row, tied_with_best=row.rank == 1, smooth=int(row.rank == 3)) for row in ranking]
    figure = ranking_bars(alone, limit=6)
    assert not [patch for patch in figure.axes[0].patches if patch.get_hatch()]
    assert _texts(figure).count("smooth wave") == 1


def test_screened_wirings_are_hollow_and_the_legend_says_so(run_folder: Path) -> None:
    ranking = read_run(run_folder).ranking
    assert "screened only" not in _texts(ranking_bars(ranking, limit=6))
    mixed = [dataclasses.replace(row, settled=row.rank <= 4) for row in ranking]
    figure = ranking_bars(mixed, limit=6)
    assert "screened only" in _texts(figure)
    white = (1.0, 1.0, 1.0, 1.0)
    assert [patch.get_facecolor() == white for patch in figure.axes[0].patches] == [False] * 4 + [True] * 2


def test_rising_phase_of_a_wave_that_rises_at_a_third() -> None:
    phase = np.arange(300) / 300
    row = 1e4 * (1 - np.cos(2 * np.pi * (phase - 1 / 3 + 0.25)))
    found = rising_phases(Waves(1.0, ("x", "rest"), np.stack([row, np.zeros(300)])))
    assert found[0] == pytest.approx(1 / 3, abs=1e-4)
    assert np.isnan(found[1])


def _lightness(colour: str) -> float:
    """CIE L* of an sRGB colour (IEC 61966-2-1 and CIE 15)."""
    rgb = np.array([int(colour[k : k + 2], 16) for k in (1, 3, 5)]) / 255
    linear = np.where(rgb <= 0.04045, rgb / 12.92, ((rgb + 0.055) / 1.055) ** 2.4)
    y = float(linear @ (0.2126, 0.7152, 0.0722))
    return 116 * np.cbrt(y) - 16 if y > 216 / 24389 else y * 24389 / 27


def test_the_vacuum_scale_reads_in_grey() -> None:
    steps = np.diff([_lightness(stop) for stop in VACUUM_STOPS])
    assert np.all(steps < -12), steps


def test_series_next_to_each_other_differ_in_grey() -> None:
    lightness = [_lightness(colour) for colour in SERIES]
    assert np.min(np.abs(np.diff(lightness))) > 6


def test_a_dollar_sign_is_a_dollar_sign(run_folder: Path, tmp_path: Path) -> None:
    figure = ranking_bars(read_run(run_folder).ranking, title="cheap $x_1$ and $\\frac{")
    assert save_figure(figure, tmp_path / "a.svg").read_text(encoding="utf-8").count("\\frac{") == 1


def test_the_working_point_lies_on_the_figures_of_the_run(run_folder: Path) -> None:
    """12 mg in 0.9 s is 0.675 L/min of ISO 8778 air (1.185 kg/m³); the pump of the file ends at its dead end."""
    run = read_run(run_folder)
    ax = pump_working_point(run.robot, run.ring).axes[0]
    point = next(line for line in ax.lines if line.get_marker() == "o")
    assert point.get_xydata()[0] == pytest.approx([49.0, 12e-6 / 0.9 / 1.185 * 60e3])
    curve = ax.lines[0].get_xydata()
    assert curve[-1] == pytest.approx([run.robot.supply.dead_end_vacuum_Pa / 1e3, 0.0], abs=1e-9)
    assert curve[0, 1] == pytest.approx(run.robot.supply.free_flow_m3_s * 60e3 * 1.2041 / 1.185, rel=1e-3)


def test_a_house_line_has_no_pump_curve(run_folder: Path) -> None:
    run = read_run(run_folder)
    assert pump_working_point(dataclasses.replace(run.robot, supply=FixedVacuum(50e3)), run.ring) is None


def test_a_wiring_alone_is_best_of_nothing(run_folder: Path) -> None:
    """Its chance to be the best would always be 100 %: drawn only where there are several."""
    spread = read_run(run_folder).spread
    assert spread is not None and len(spread.wirings) > 1
    alone = dataclasses.replace(spread, wirings=spread.wirings[:1])
    told = ["".join(text.get_text() for text in spread_plot(s).axes[0].texts) for s in (spread, alone)]
    assert "best" in told[0] and "best" not in told[1] and "forward" in told[1]


def test_a_wrong_ending_and_a_missing_folder(run_folder: Path, tmp_path: Path) -> None:
    figure = spread_plot(read_run(run_folder).spread)
    with pytest.raises(InputError, match=r"must be .png, .svg or .pdf, got '.jpeg'"):
        save_figure(figure, tmp_path / "a.jpeg")
    with pytest.raises(RunFolderError, match="picture file must be writable"):
        save_figure(figure, tmp_path / "none" / "a.png")
