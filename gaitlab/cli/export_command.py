"""gaitlab export: the body as URDF, a walk as CSV."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import click

from gaitlab.cli.files import write_new
from gaitlab.cli.options import (
    WholeNumber,
    engine_option,
    force_option,
    json_option,
    robot_argument,
    wiring_for,
    wiring_option,
)
from gaitlab.cli.output import print_facts, print_failure, print_json
from gaitlab.errors import InputError, must
from gaitlab.gait.outcomes import WALKED
from gaitlab.robot.reader import read_robot
from gaitlab.robot.records import Robot
from gaitlab.trust.cautions import DISTANCES, ESTIMATES

CSV_HZ = 100.0  # rows a second (chosen by us)


@click.command("export")
@robot_argument
@click.option("--urdf", type=click.Path(path_type=Path), default=None, help="Write the body to this URDF file.")
@click.option(
    "--csv", "csv_path", type=click.Path(path_type=Path), default=None, help="Walk --wiring and write its motion here."
)
@wiring_option()
@click.option("--periods", type=WholeNumber(1, 500), default=4, show_default=True, help="Periods of the walk to write.")
@engine_option
@force_option
@json_option
def command(
    robot_path: Path,
    urdf: Path | None,
    csv_path: Path | None,
    wiring_text: str | None,
    periods: int,
    engine: str,
    force: bool,
    as_json: bool,
) -> None:
    """Write the body as URDF, or a walk as CSV (time, vacuum, body, feet; SI units in the header).

    URDF holds links, masses, inertias, joints and feet; it has no springs, so bellows do not come along. Refused (exit 2):
    neither --urdf nor --csv, --csv without --wiring, files that are there already (--force replaces them).

    \b
      gaitlab export robots/tray_row5.toml --urdf row5.urdf
      gaitlab export robots/tray_row5.toml --csv row5.csv --wiring "a=1 b=3 c=5 d=2 e=4"
    """
    if urdf is None and csv_path is None:
        raise InputError(must("export", "given --urdf or --csv", "neither", "add --urdf FILE"))
    if (csv_path is None) != (wiring_text is None):
        raise InputError(must("--csv and --wiring", "given together", "one of them alone"))
    robot = read_robot(robot_path).robot
    facts: dict[str, Any] = {"name": robot.name}
    if urdf is not None:
        facts |= _write_urdf(robot, urdf, force=force)
    if csv_path is not None and wiring_text is not None:
        facts |= _write_csv(robot, wiring_text, csv_path, (periods, engine), force=force, as_json=as_json)
    if as_json:
        print_json(facts)
    else:
        print_facts([(key.replace("_", " "), value) for key, value in facts.items()])
        click.echo("\n" + (ESTIMATES if csv_path is None else f"{DISTANCES}\n{ESTIMATES}"))


def _write_urdf(robot: Robot, path: Path, *, force: bool) -> dict[str, Any]:
    from gaitlab.body.model import body_model
    from gaitlab.body.urdf import urdf_text

    model = body_model(robot)
    write_new(path, urdf_text(model), force=force)
    return {"urdf": str(path), "links": len(model.links), "joints": len(model.joints), "mass_g": model.mass_kg * 1e3}


def _write_csv(
    robot: Robot, wiring_text: str, path: Path, how: tuple[int, str], *, force: bool, as_json: bool
) -> dict[str, Any]:
    from gaitlab.gait.trace_csv import trace_csv
    from gaitlab.gait.walk import walk
    from gaitlab.ring.solve import ring_run

    wiring = wiring_for(robot, wiring_text)
    periods, engine = how
    walked, trace = walk(robot, wiring, ring_run(robot, wiring), periods=periods, engine=engine, trace_hz=CSV_HZ)
    if walked.outcome != WALKED or trace is None:
        print_failure(walked.outcome, walked.remedy, as_json=as_json)
    write_new(path, trace_csv(trace), force=force)
    return {"csv": str(path), "rows": len(trace.time_s), "travel_mm_per_period": walked.travel_m * 1e3}
