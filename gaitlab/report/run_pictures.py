"""The pictures of a run folder, drawn from what the search saved there."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import partial
from pathlib import Path

from matplotlib.figure import Figure

from gaitlab.errors import GaitlabError
from gaitlab.report.animation import PERIODS, Film, film_of, write_gif, write_mp4
from gaitlab.report.body_path import body_path
from gaitlab.report.footfall import footfall_chart
from gaitlab.report.pressure_map import pressure_map
from gaitlab.report.pump_plot import pump_working_point
from gaitlab.report.ranking_plot import ranking_bars
from gaitlab.report.run_folder import SavedRun, read_run
from gaitlab.report.spread_plots import sensitivity_bars, spread_plot
from gaitlab.report.style import save_figure

Writer = Callable[[Path], Path]


@dataclass(frozen=True)
class Drawn:
    """What `draw` wrote, and in words what it had to leave out."""

    files: tuple[Path, ...]
    left_out: tuple[str, ...]


def draw_run(folder: str | Path) -> Drawn:
    """Write the PNG and GIF pictures that the run in `folder` gives into the folder itself, over those of the same name.

    Raises RunFolderError for a folder that holds no readable run or takes no files.
    """
    run = read_run(folder)
    return draw(run, run.folder, writers(run))


def draw(run: SavedRun, folder: Path, chosen: dict[str, Writer]) -> Drawn:
    """Write every chosen picture into `folder`; one that cannot be drawn is told and costs only itself."""
    files, left_out = [], list(run.gaps)
    for name, write in chosen.items():
        try:
            files.append(write(folder / name))
        except GaitlabError as error:
            left_out.append(f"{name} is left out: {error}")
    return Drawn(tuple(files), tuple(left_out))


def writers(run: SavedRun, *, svg: bool = False, mp4: bool = False, periods: int = PERIODS) -> dict[str, Writer]:
    """What there is to draw of a run, by file name.

    Always ranking, footfall and pressure_map, and pump where the supply is a pump; with traces path and the films best and
    reversed over `periods` periods; with a spread spread and sensitivities. `svg` adds the figures as SVG, `mp4` the
    films as MP4.
    """
    endings = (".png", ".svg") if svg else (".png",)
    found: dict[str, Writer] = {}
    for name, figure in _figures(run).items():
        found |= {f"{name}{ending}": partial(save_figure, figure) for ending in endings}
    for name, film in _films(run, periods).items():
        found[f"{name}.gif"] = partial(_gif, film)
        if mp4:
            found[f"{name}.mp4"] = partial(_mp4, film)
    return found


def _figures(run: SavedRun) -> dict[str, Figure]:
    best = run.best
    figures: dict[str, Figure | None] = {
        "ranking": ranking_bars(run.ranking, title=run.robot.name),
        "footfall": footfall_chart(best.walk, best.reversed_walk, title=f"Footfalls of {run.robot.name}, best wiring"),
        "pressure_map": pressure_map(run.ring.waves, wiring=best.wiring),
        "pump": pump_working_point(run.robot, run.ring),
        "path": None if run.trace is None else body_path(run.trace),
    }
    if run.spread is not None:
        figures["spread"] = spread_plot(run.spread)
        figures["sensitivities"] = sensitivity_bars(run.spread.sensitivities) if run.spread.sensitivities else None
    return {name: figure for name, figure in figures.items() if figure is not None}


def _films(run: SavedRun, periods: int) -> dict[str, Callable[[], Film]]:
    films: dict[str, Callable[[], Film]] = {}
    if run.trace is not None:
        best = run.best.wiring
        films["best"] = partial(film_of, run.trace, run.ring, best, title=run.robot.name, periods=periods)
    if run.reversed_trace is not None and run.reversed_ring is not None and run.best.reversed_wiring is not None:
        title, wiring = f"{run.robot.name}, wave reversed", run.best.reversed_wiring
        films["reversed"] = partial(
            film_of, run.reversed_trace, run.reversed_ring, wiring, title=title, periods=periods
        )
    return films


def _gif(film: Callable[[], Film], path: Path) -> Path:
    return write_gif(film(), path)


def _mp4(film: Callable[[], Film], path: Path) -> Path:
    return write_mp4(film(), path)
