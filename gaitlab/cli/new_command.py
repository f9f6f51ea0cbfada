"""gaitlab new: write a commented starter robot file."""

from __future__ import annotations

import re
from pathlib import Path

import click

from gaitlab.cli.options import WholeNumber, force_option, json_option
from gaitlab.cli.output import print_json, write_new
from gaitlab.cli.starter import LEGS_MAX, LEGS_MIN, starter_text


@click.command("new")
@click.argument("path", metavar="FILE.toml", type=click.Path(path_type=Path))
@click.option(
    "--legs",
    type=WholeNumber(LEGS_MIN, LEGS_MAX),
    default=5,
    show_default=True,
    help="Legs in the row and stages of the ring; odd.",
)
@force_option
@json_option
def command(path: Path, legs: int, force: bool, as_json: bool) -> None:
    """Write a commented starter robot file that passes `gaitlab check`.

    Refused (exit 2): a file that exists (unless --force), and an even number of legs.

    \b
      gaitlab new my_robot.toml
      gaitlab new row7.toml --legs 7
    """
    name = re.sub(r"[^A-Za-z0-9_-]", "_", path.stem)[:64].lstrip("-") or "robot"
    write_new(path, starter_text(name, legs), force=force)
    if as_json:
        print_json({"path": str(path), "name": name, "legs": legs})
    else:
        click.echo(f"wrote {path}: next, put your own figures in and run  gaitlab check {path}")
