"""Remakes the pictures that README shows, from the folder of a search: ``python -m gaitlab.report.media RUN media``."""

from __future__ import annotations

import sys
from pathlib import Path

from PIL import Image

from gaitlab.errors import GaitlabError, InputError, must
from gaitlab.report.animation import Film, film_of, painted, save_gif
from gaitlab.report.footfall import footfall_chart
from gaitlab.report.ranking_plot import ranking_bars
from gaitlab.report.run_folder import SavedRun, read_run
from gaitlab.report.sheet import bench_sheet
from gaitlab.report.style import save_figure

HERO_WIDTH = 700  # px, chosen by us: as wide as a README column
HERO_FRAMES_PER_PERIOD = 18  # keeps two films in one file under 4 MB
USAGE = "usage: python -m gaitlab.report.media RUN FOLDER   (RUN: folder of a search, FOLDER: where the pictures go)"


def remade(run: SavedRun, folder: Path) -> tuple[Path, ...]:
    """Write walk.gif (best above reversed), ranking.png, footfall.png and sheet.png into `folder`.

    Raises InputError when the run holds no motion of the best wiring and its reverse.
    """
    best = run.best
    return (
        _hero(run, folder / "walk.gif"),
        save_figure(ranking_bars(run.ranking, title=run.robot.name), folder / "ranking.png", dpi=110),
        save_figure(footfall_chart(best.walk, best.reversed_walk), folder / "footfall.png", dpi=110),
        save_figure(bench_sheet(run), folder / "sheet.png", dpi=110),
    )


def _hero(run: SavedRun, path: Path) -> Path:
    """Best and reversed walk one above the other, at the same moments of their periods."""
    backwards = run.best.reversed_wiring
    if run.trace is None or run.reversed_trace is None or run.reversed_ring is None or backwards is None:
        raise InputError(must("run", "one with motion of best and reversed wiring", str(run.folder), "search again"))
    name, beat = run.robot.name, HERO_FRAMES_PER_PERIOD
    above = film_of(run.trace, run.ring, run.best.wiring, title=f"{name}: best wiring", frames_per_period=beat)
    title = "the same wiring, wave reversed"
    below = film_of(run.reversed_trace, run.reversed_ring, backwards, title=title, frames_per_period=beat)
    pictures = [_stacked(above, below, k) for k in range(min(len(above.frames), len(below.frames)))]
    return save_gif(pictures, above.frame_s, path)


def _stacked(above: Film, below: Film, index: int) -> Image.Image:
    upper, lower = painted(above, index), painted(below, index)
    both = Image.new("RGB", (upper.width, upper.height + lower.height), "white")
    both.paste(upper, (0, 0))
    both.paste(lower, (0, upper.height))
    return both.resize((HERO_WIDTH, round(HERO_WIDTH * both.height / both.width)), Image.Resampling.LANCZOS)


def main(arguments: list[str]) -> int:
    """Runs the command; gives back its exit code."""
    if len(arguments) != 2:
        print(USAGE, file=sys.stderr)
        return 2
    try:
        files = remade(read_run(arguments[0]), Path(arguments[1]))
    except GaitlabError as error:
        print(error, file=sys.stderr)
        return 2
    print("\n".join(str(file) for file in files))
    return 0


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
