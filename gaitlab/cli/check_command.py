"""gaitlab check: read a robot file and say what it will be."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import click

from gaitlab.air.gas import gas_of
from gaitlab.air.supply import supply_law
from gaitlab.air.validity import circuit_warnings
from gaitlab.body.checks import check_step
from gaitlab.body.model import body_model
from gaitlab.cli.options import json_option, robot_argument
from gaitlab.cli.output import print_facts, print_json, warn
from gaitlab.robot.checks import require_odd_ring
from gaitlab.robot.reader import RobotFile, read_robot
from gaitlab.robot.records import Robot
from gaitlab.robot.totals import mass_kg
from gaitlab.trust.cautions import ESTIMATES
from gaitlab.trust.tolerances import tolerances_of
from gaitlab.wiring.space import WiringSpace


@click.command("check")
@robot_argument
@json_option
def command(robot_path: Path, as_json: bool) -> None:
    """Read a robot file and say what it will be.

    Refused (exit 2): anything that breaks a rule of the file, a ring that cannot oscillate, a body that cannot stand. Legal
    but unlikely numbers are named warnings.

    \b
      gaitlab check robots/tray_row5.toml
      gaitlab check robots/tray_row5.toml --json
    """
    file = read_robot(robot_path)
    require_odd_ring(file.robot)
    facts = summary(file)
    if as_json:
        print_json(facts)
    else:
        _print_human(facts)
        click.echo(f"\n{ESTIMATES}")


def summary(file: RobotFile) -> dict[str, Any]:
    """What a robot file will be, keyed as --json prints it.

    Raises InputError for a tolerance whose key leads to no number.
    """
    robot = file.robot
    if robot.tolerances:
        tolerances_of(file.document, robot.tolerances)
    space = WiringSpace.of(robot)
    return {
        "ok": True,
        "name": robot.name,
        "stages": robot.ring.stages,
        "inlets": list(robot.inlets()),
        "blocks": [block.name for block in robot.body.blocks],
        "mass_g": mass_kg(robot) * 1e3,
        "wirings": {"raw": space.raw, "distinct": space.distinct},
        "notes": list(robot.notes),
        "warnings": [*file.warnings, *air_warnings(robot), *body_warnings(robot)],
    }


def air_warnings(robot: Robot) -> tuple[str, ...]:
    """What is doubtful about the air parts; raises InputError for a supply that cannot work at the ambient pressure."""
    gas = gas_of(robot.ambient)
    return circuit_warnings(robot.ring, gas, supply_law(robot.supply, gas).rest_Pa)


def body_warnings(robot: Robot) -> tuple[str, ...]:
    """What is doubtful about the body; raises InputError for one that cannot stand or a step too long for its springs."""
    model = body_model(robot)
    check_step(model, step_s=robot.numerics.step_s, inertia_factor=robot.numerics.inertia_factor)
    return model.warnings


def _print_human(facts: dict[str, Any]) -> None:
    print_facts(
        [
            ("robot", facts["name"]),
            ("ring stages", facts["stages"]),
            ("inlets", " ".join(facts["inlets"])),
            ("blocks", " ".join(facts["blocks"])),
            ("mass", f"{facts['mass_g']:.4g} g without tubes and fittings"),
            ("wirings", f"{facts['wirings']['raw']} in all, {facts['wirings']['distinct']} distinct"),
            *(("file says", note) for note in facts["notes"]),
        ]
    )
    for text in facts["warnings"]:
        warn(text)
