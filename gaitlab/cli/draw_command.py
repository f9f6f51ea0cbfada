"""gaitlab draw: the pictures and films of a saved run, drawn again."""

from __future__ import annotations

from pathlib import Path

import click

from gaitlab.cli.options import WholeNumber, force_option, json_option, out_option
from gaitlab.cli.output import print_json, warn
from gaitlab.errors import RunFolderError, must


@click.command("draw")
@click.argument("run", metavar="RUN", type=click.Path(path_type=Path))
@out_option("Folder for the pictures; default: RUN/pictures.")
@click.option("--svg", is_flag=True, help="Figures as SVG as well.")
@click.option("--mp4", is_flag=True, help="Films as MP4 as well (needs ffmpeg).")
@click.option("--periods", type=WholeNumber(1, 100), default=3, show_default=True, help="Periods that a film shows.")
@force_option
@json_option
def command(run: Path, out: Path | None, svg: bool, mp4: bool, periods: int, force: bool, as_json: bool) -> None:
    """Draw the pictures and films of a saved run: ranking, footfalls, pressures, path, pump, spread, walk.

    RUN is the folder of a search (gaitlab search ROBOT --out RUN); nothing is simulated. What the run holds no record of
    is left out and told. Refused (exit 2): a folder that holds no finished run, pictures that are there already (--force
    replaces them).

    \b
      gaitlab draw runs/row5 --svg
      gaitlab draw runs/row5 --mp4 --periods 5 --out talk
    """
    from gaitlab.report.run_folder import read_run
    from gaitlab.report.run_pictures import draw, writers

    saved = read_run(run)
    chosen = writers(saved, svg=svg, mp4=mp4, periods=periods)
    folder = _ready(run / "pictures" if out is None else out, list(chosen), force=force)
    drawn = draw(saved, folder, chosen)
    for reason in drawn.left_out:
        warn(reason)
    if as_json:
        print_json({"files": [str(path) for path in drawn.files], "left_out": list(drawn.left_out)})
    else:
        click.echo("\n".join(str(path) for path in drawn.files))


def _ready(folder: Path, names: list[str], *, force: bool) -> Path:
    """The folder, made if it is not there. Raises RunFolderError when it cannot be, or holds pictures already."""
    there = [name for name in names if (folder / name).exists()]
    if there and not force:
        rule = "free of pictures of the same name"
        raise RunFolderError(must("--out", rule, str(folder / there[0]), "add --force to replace them"))
    try:
        folder.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        reason = (error.strerror or str(error)).lower()
        raise RunFolderError(must("--out", "a folder that can be written", str(folder), reason)) from None
    return folder
