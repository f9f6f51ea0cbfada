"""gaitlab bellows: bend or stroke, force and volume of every bellows type against vacuum."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import click
import numpy as np

from gaitlab.body.bellows import BellowsLaw, bellows_law
from gaitlab.cli.files import write_new
from gaitlab.cli.options import force_option, json_option, robot_argument
from gaitlab.cli.output import print_facts, print_json, print_table, warn
from gaitlab.errors import InputError, must
from gaitlab.robot.fields import DEGREE, KILO, MILLI, ML
from gaitlab.robot.reader import read_robot
from gaitlab.robot.records import Robot
from gaitlab.robot.suspicions import greatest_vacuum_Pa
from gaitlab.trust.cautions import ESTIMATES

POINTS = 13
CURVE_POINTS = 121
MOTION = {"bend": ("bend_deg", DEGREE), "contract": ("stroke_mm", MILLI)}


@click.command("bellows")
@robot_argument
@click.option("--type", "name", metavar="NAME", help="One type only; default: all that the file has.")
@click.option("--plot", type=click.Path(path_type=Path), help="Draw the curves into this PNG, SVG or PDF file.")
@force_option
@json_option
def command(robot_path: Path, name: str | None, plot: Path | None, force: bool, as_json: bool) -> None:
    """How the bellows of a robot move, pull and breathe, from no vacuum to the most its supply can do.

    Bend or stroke and the volume taken out are those of a free bellows; the blocked force (at the greatest vacuum) is that
    of one whose end is held. "source" says whether a bench measurement or the drawing is behind the numbers; a
    measurement always beats a formula. Refused (exit 2): an unknown type.

    \b
      gaitlab bellows robots/tray_row5.toml
      gaitlab bellows robots/worm5.toml --type pull --json
    """
    robot = read_robot(robot_path).robot
    laws = chosen_laws(robot, name)
    if plot is not None:
        _write_picture(robot, laws, plot, force=force)
    facts = {law.name: bellows_facts(law, vacuum_grid(robot, POINTS)) for law in laws}
    if as_json:
        print_json(facts)
    else:
        for law in laws:
            _print_human(law, facts[law.name])
        click.echo(f"\n{ESTIMATES}")


def chosen_laws(robot: Robot, name: str | None) -> list[BellowsLaw]:
    """Laws of all types, or of the one named. Raises InputError for an unknown name."""
    names = [bellows.name for bellows in robot.bellows]
    if name is not None and name not in names:
        raise InputError(must("--type", "one of " + ", ".join(names), name))
    return [bellows_law(bellows) for bellows in robot.bellows if name in (None, bellows.name)]


def vacuum_grid(robot: Robot, points: int) -> np.ndarray[Any, np.dtype[np.float64]]:
    """Even steps of gauge vacuum [Pa] from none to the most the supply can do (a syringe: down to no air at all)."""
    return np.linspace(0.0, greatest_vacuum_Pa(robot) or robot.ambient.pressure_Pa, points)


def bellows_facts(law: BellowsLaw, vacuum_Pa: np.ndarray[Any, np.dtype[np.float64]]) -> dict[str, Any]:
    """Numbers of one type as --json prints them."""
    key, unit = MOTION[law.action]
    return {
        "action": law.action,
        "source": law.source,
        "vacuum_kPa": vacuum_Pa / KILO,
        key: law.free_deflection(vacuum_Pa) / unit,
        "blocked_force_N": float(law.blocked_force(vacuum_Pa[-1])),
        "tip_stiffness_N_mm": law.tip_stiffness * MILLI,
        "swept_volume_mL": (law.rest_m3 - law.volume(vacuum_Pa)[0]) / ML,
        "rest_volume_mL": law.rest_m3 / ML,
        "bend_stiffness_N_m_rad": law.bend_stiffness,
        "axial_stiffness_N_m": law.axial_stiffness,
        "solid_" + key: law.solid / unit,
        "warnings": list(law.warnings),
    }


def _print_human(law: BellowsLaw, facts: dict[str, Any]) -> None:
    key = MOTION[law.action][0]
    print_facts(
        [
            ("bellows", f"{law.name} ({law.action}, {law.source})"),
            ("blocked force", f"{facts['blocked_force_N']:.3g} N at {facts['vacuum_kPa'][-1]:.4g} kPa"),
            ("tip stiffness", f"{facts['tip_stiffness_N_mm']:.3g} N/mm"),
            ("bending stiffness", f"{law.bend_stiffness:.3g} N m/rad"),
            ("axial stiffness", f"{law.axial_stiffness:.4g} N/m"),
            ("solid at", f"{facts['solid_' + key]:.4g} {key.rpartition('_')[2]}"),
        ]
    )
    columns = ("vacuum_kPa", key, "swept_volume_mL")
    rows = zip(*(facts[column] for column in columns), strict=True)
    print_table(columns, [[round(float(value), 3) for value in row] for row in rows])
    for text in law.warnings:
        warn(text)


def _write_picture(robot: Robot, laws: list[BellowsLaw], path: Path, *, force: bool) -> None:
    from gaitlab.report.bellows_plots import BellowsCurve, bellows_plot
    from gaitlab.report.style import figure_bytes

    vacuum = vacuum_grid(robot, CURVE_POINTS)
    curves = [
        BellowsCurve(
            name=law.name,
            action=law.action,
            vacuum_kPa=(vacuum / KILO).tolist(),
            deflection=(law.free_deflection(vacuum) / MOTION[law.action][1]).tolist(),
            blocked_force_N=law.blocked_force(vacuum).tolist(),
            swept_mL=((law.rest_m3 - law.volume(vacuum)[0]) / ML).tolist(),
            solid=law.solid / MOTION[law.action][1],
        )
        for law in laws
    ]
    figure = bellows_plot(curves, f"Bellows of {robot.name}")
    write_new(path, figure_bytes(figure, path.suffix.lower()), force=force)
