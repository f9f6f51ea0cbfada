"""The pictures of a run folder, drawn from what the search saved there."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

from matplotlib.figure import Figure

from gaitlab.errors import GaitlabError
from gaitlab.gait.records import Trace
from gaitlab.report.animation import film_of, write_gif
from gaitlab.report.body_path import body_path
from gaitlab.report.footfall import footfall_chart
from gaitlab.report.pressure_map import pressure_map
from gaitlab.report.pump_plot import pump_working_point
from gaitlab.report.ranking_plot import ranking_bars
from gaitlab.report.run_folder import SavedRun, read_run
from gaitlab.report.spread_plots import sensitivity_bars, spread_plot
from gaitlab.report.style import save_figure
from gaitlab.ring.waves import RingRun
from gaitlab.wiring.wiring import Wiring


@dataclass(frozen=True)
class Drawn:
    """What `draw_run` wrote, and in words what it had to leave out."""

    files: tuple[Path, ...]
    left_out: tuple[str, ...]


def draw_run(folder: str | Path, *, svg: bool = False) -> Drawn:
    """Write every picture that the run in `folder` gives into the folder itself; pictures of the same name are replaced.

    Always ranking.png, footfall.png and pressure_map.png, and pump.png where the supply is a pump; with traces path.png,
    best.gif and reversed.gif; with a spread spread.png and sensitivities.png. `svg` writes the figures as SVG as well.
    Raises RunFolderError for a folder that holds no readable run or takes no files.
    """
    run = read_run(folder)
    figures = _figures(run)
    files, left_out = [], list(run.gaps)
    for name, figure in figures.items():
        files += [
            save_figure(figure, run.folder / f"{name}{ending}") for ending in (".png", *((".svg",) if svg else ()))
        ]
    for name, write in _films(run).items():
        try:
            files.append(write(run.folder / f"{name}.gif"))
        except GaitlabError as error:
            left_out.append(f"{name}.gif is left out: {error}")
    return Drawn(tuple(files), tuple(left_out))


def _figures(run: SavedRun) -> dict[str, Figure]:
    best = run.best
    figures = {
        "ranking": ranking_bars(run.ranking, title=run.robot.name),
        "footfall": footfall_chart(best.walk, best.reversed_walk, title=f"Footfalls of {run.robot.name}, best wiring"),
        "pressure_map": pressure_map(run.ring.waves, wiring=best.wiring),
    }
    pump = pump_working_point(run.robot, run.ring)
    if pump is not None:
        figures["pump"] = pump
    if run.trace is not None:
        figures["path"] = body_path(run.trace)
    if run.spread is not None:
        figures["spread"] = spread_plot(run.spread)
        if run.spread.sensitivities:
            figures["sensitivities"] = sensitivity_bars(run.spread.sensitivities)
    return figures


def _films(run: SavedRun) -> dict[str, Callable[[Path], Path]]:
    films = {"best": _film_writer(run.trace, run.ring, run.best.wiring, run.robot.name)}
    title = f"{run.robot.name}, wave reversed"
    films["reversed"] = _film_writer(run.reversed_trace, run.reversed_ring, run.best.reversed_wiring, title)
    return {name: write for name, write in films.items() if write is not None}


def _film_writer(
    trace: Trace | None, ring: RingRun | None, wiring: Wiring | None, title: str
) -> Callable[[Path], Path] | None:
    """What writes the film to a path; None where something it needs was not saved."""
    if trace is None or ring is None or wiring is None:
        return None
    return lambda path: write_gif(film_of(trace, ring, wiring, title=title), path)
