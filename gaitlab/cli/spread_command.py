"""gaitlab spread: what a wiring does over the build tolerances, and which number to measure first."""

from __future__ import annotations

import os
from pathlib import Path

import click

from gaitlab.cli.options import (
    WholeNumber,
    engine_option,
    force_option,
    json_option,
    robot_argument,
    seed_option,
    wiring_for,
    wiring_option,
    workers_option,
)
from gaitlab.cli.output import print_failure, print_json, progress, write_new
from gaitlab.cli.spread_facts import print_failures, print_spread, spread_facts
from gaitlab.errors import InputError, must
from gaitlab.robot.checks import require_odd_ring
from gaitlab.robot.reader import read_robot
from gaitlab.search.evaluate import Guarded, evaluate
from gaitlab.search.objective import OBJECTIVES
from gaitlab.search.settings import WalkSettings
from gaitlab.search.workers import Workers, local_workers
from gaitlab.trust.cautions import ESTIMATES
from gaitlab.trust.spread import Request, Spread, spread
from gaitlab.trust.tolerances import tolerances_of

NOTHING_WALKED = "nothing_walked"
REMEDY = "no draw walked: see the outcomes, then try `gaitlab ring` and `gaitlab walk` with the file's own numbers"


@click.command("spread")
@robot_argument
@wiring_option(required=True, multiple=True)
@click.option(
    "--draws",
    type=WholeNumber(1, 100_000),
    default=64,
    show_default=True,
    help="Builds to draw; powers of two spread best.",
)
@click.option(
    "--objective", type=click.Choice(OBJECTIVES), default="travel", show_default=True, help="What counts as best."
)
@click.option(
    "--plot",
    type=click.Path(path_type=Path),
    help="Draw the intervals into this PNG, SVG or PDF file, and the sensitivities beside it (NAME_sensitivities).",
)
@force_option
@seed_option
@engine_option
@workers_option
@json_option
def command(
    robot_path: Path,
    wiring_texts: tuple[str, ...],
    draws: int,
    objective: str,
    plot: Path | None,
    force: bool,
    seed: int,
    engine: str,
    workers: int | None,
    as_json: bool,
) -> None:
    """What wirings do over the build tolerances: travel and speed with their interval, chances, and what decides them.

    Each draw is one build of the robot; its ring is solved and its body walked anew, with the same draws for every
    wiring. Tolerances are the file's [[tolerance]] list, else printed defaults. Travel in mm per period, speed in mm/s.
    Refused: a draw that leaves a key's bounds (unless its tolerance has truncate = true), a wiring given twice.

    \b
      gaitlab spread robots/tray_row5.toml --wiring "a=1 b=3 c=5 d=2 e=4"
      gaitlab spread robots/tray_row5.toml --wiring "a=1 b=3 c=5 d=2 e=4" --wiring "a=1 b=4 c=2 d=5 e=3" --draws 32
      gaitlab spread robots/tray_row5.toml --wiring "a=1 b=3 c=5 d=2 e=4" --plot spread.png
    """
    file = read_robot(robot_path)
    require_odd_ring(file.robot)
    wirings = tuple(wiring_for(file.robot, text) for text in wiring_texts)
    tolerances = tolerances_of(file.document, file.robot.tolerances)
    pictures = () if plot is None else _pictures(plot, force=force)
    request = Request(tolerances, wirings, draws, seed, WalkSettings(engine=engine), objective)
    pool = local_workers(Guarded(evaluate), workers or os.cpu_count() or 1)
    found = drawn(request, pool)
    facts = spread_facts(found, tolerances)
    if all(w.summary.walks.share == 0 for w in found.wirings):
        if not as_json:
            _print_failures(found)
        print_failure(NOTHING_WALKED, REMEDY, as_json=as_json, **facts)
    _draw(found, pictures, force=force)
    if as_json:
        print_json(facts)
    else:
        print_spread(found, tolerances)
        click.echo(f"\n{ESTIMATES}")


def _print_failures(found: Spread) -> None:
    click.echo(f"{found.draws} draws, seed {found.seed}")
    for w in found.wirings:
        print_failures(w)


def _pictures(path: Path, *, force: bool) -> tuple[Path, Path]:
    """Both files, looked at before the long run rather than after it."""
    if path.suffix.lower() not in (".png", ".svg", ".pdf"):
        raise InputError(must("--plot", "a file that ends in .png, .svg or .pdf", str(path)))
    both = (path, path.with_name(f"{path.stem}_sensitivities{path.suffix}"))
    there = [str(file) for file in both if file.exists()]
    if there and not force:
        raise InputError(must("--plot", "a file that does not exist yet", there[0], "add --force to replace it"))
    if not path.parent.is_dir():
        raise InputError(must("--plot", "in a folder that exists", str(path)))
    return both


def _draw(found: Spread, pictures: tuple[Path, ...], *, force: bool) -> None:
    if not pictures:
        return
    from gaitlab.report import run_folder
    from gaitlab.report.spread_plots import sensitivity_bars, spread_plot
    from gaitlab.report.style import figure_bytes

    rows = tuple(run_folder.WiringSpread(w.wiring, w.summary) for w in found.best_first())
    kept = run_folder.Spread(found.draws, rows, found.sensitivities())
    write_new(pictures[0], figure_bytes(spread_plot(kept), pictures[0].suffix.lower()), force=force)
    if kept.sensitivities:
        bars = figure_bytes(sensitivity_bars(kept.sensitivities), pictures[1].suffix.lower())
        write_new(pictures[1], bars, force=force)


def drawn(request: Request, pool: Workers) -> Spread:
    """The spread, with a progress bar; the workers end with it."""
    try:
        with progress(request.draws * len(request.wirings), "spread") as bar:
            return spread(request, pool, tell=bar.advance)
    finally:
        pool.close()
