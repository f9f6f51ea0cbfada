"""gaitlab inverter: curve, levels and margins of one stage of the ring."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import click

from gaitlab.air.gas import gas_of
from gaitlab.air.valve import valve_numbers
from gaitlab.cli.files import write_new
from gaitlab.cli.options import Number, WholeNumber, force_option, json_option, robot_argument
from gaitlab.cli.output import print_facts, print_json
from gaitlab.errors import InputError, must
from gaitlab.ring.inverter import InverterCurve, gain_needed, inverter_curve
from gaitlab.ring.pattern import stage_parts
from gaitlab.ring.working import working_vacuum
from gaitlab.robot.fields import KILO
from gaitlab.robot.reader import read_robot
from gaitlab.robot.records import Robot
from gaitlab.trust.cautions import ESTIMATES


@click.command("inverter")
@robot_argument
@click.option("--stage", type=WholeNumber(1, 31), default=1, show_default=True, help="Which stage of the ring.")
@click.option(
    "--supply-kPa",
    "supply_kPa",
    type=Number(above=0, below=101.3),
    default=None,
    help="Gauge vacuum of the supply; default: what the file's supply keeps with half of the valves open.",
)
@click.option("--plot", type=click.Path(path_type=Path), help="Draw the curve into this PNG file.")
@force_option
@json_option
def command(
    robot_path: Path, stage: int, supply_kPa: float | None, plot: Path | None, force: bool, as_json: bool
) -> None:
    """Output against control of one stage at rest, the levels it holds, and how far they are from failing.

    Vacuums are gauge, positive; control 0 is atmosphere. The levels are those of the steady state: a ring in motion may not
    reach them (gaitlab ring says what it reaches). Gain is compared with sec(π/N), what N equal first-order stages need.

    \b
      gaitlab inverter robots/tray_row5.toml
      gaitlab inverter robots/tray_row5.toml --stage 2 --supply-kPa 45 --plot inverter.png
    """
    robot = read_robot(robot_path).robot
    if stage > robot.ring.stages:
        raise InputError(must("--stage", f"1 to {robot.ring.stages}, the stages of this ring", stage))
    curve = _curve(robot, stage, supply_kPa)
    facts = inverter_facts(curve, robot.ring.stages)
    if plot is not None:
        write_new(plot, _picture(robot, stage, curve), force=force)
    if as_json:
        print_json(facts)
    else:
        _print_human(stage, facts)
        click.echo(f"\n{ESTIMATES}")


def _curve(robot: Robot, stage: int, supply_kPa: float | None) -> InverterCurve:
    parts, gas = stage_parts(robot.ring)[stage - 1], gas_of(robot.ambient)
    supply = working_vacuum(robot) if supply_kPa is None else supply_kPa * KILO
    if supply >= gas.pressure_Pa:
        rule = f"below the ambient pressure of {gas.pressure_Pa / KILO:g} kPa"
        raise InputError(must("--supply-kPa", rule, supply_kPa))
    return inverter_curve(parts.resistor, valve_numbers(parts.valve), supply, gas)


def inverter_facts(curve: InverterCurve, stages: int) -> dict[str, Any]:
    """The curve as --json prints it; `output_falling_kPa` is the way back of a valve that snaps."""
    return {
        "input_kPa": curve.control_Pa / KILO,
        "output_kPa": curve.rising_Pa / KILO,
        "output_falling_kPa": curve.falling_Pa / KILO,
        "low_kPa": curve.low_Pa / KILO,
        "high_kPa": curve.high_Pa / KILO,
        "switch_in_kPa": curve.switch_in_Pa / KILO,
        "switch_out_kPa": curve.switch_out_Pa / KILO,
        "gain_max": curve.gain_max,
        "margin_low_kPa": curve.margin_low_Pa / KILO,
        "margin_high_kPa": curve.margin_high_Pa / KILO,
        "gain_needed": gain_needed(stages),
        "supply_kPa": curve.supply_Pa / KILO,
    }


def _print_human(stage: int, facts: dict[str, Any]) -> None:
    needed = facts["gain_needed"]
    print_facts(
        [
            ("stage", stage),
            ("supply vacuum", f"{facts['supply_kPa']:.4g} kPa"),
            ("output at no control", f"{facts['high_kPa']:.4g} kPa"),
            ("output at full control", f"{facts['low_kPa']:.4g} kPa"),
            ("switches at", f"{facts['switch_in_kPa']:.4g} kPa rising, {facts['switch_out_kPa']:.4g} kPa falling"),
            ("high margin", f"{facts['margin_high_kPa']:.4g} kPa"),
            ("low margin", f"{facts['margin_low_kPa']:.4g} kPa"),
            ("steepest gain", f"{facts['gain_max']:.4g}"),
            ("gain needed", f"{needed:.4g}" if math.isfinite(needed) else "a ring of 1 or 2 stages never runs"),
        ]
    )


def _picture(robot: Robot, stage: int, curve: InverterCurve) -> bytes:
    from gaitlab.report.ring_plots import CurvePicture, inverter_picture
    from gaitlab.report.style import figure_bytes

    picture = CurvePicture(
        control_Pa=curve.control_Pa,
        rising_Pa=curve.rising_Pa,
        falling_Pa=curve.falling_Pa,
        low_Pa=curve.low_Pa,
        high_Pa=curve.high_Pa,
        switch_in_Pa=curve.switch_in_Pa,
        switch_out_Pa=curve.switch_out_Pa,
    )
    title = f"{robot.name}: stage {stage} on {curve.supply_Pa / KILO:.3g} kPa of supply vacuum"
    return figure_bytes(inverter_picture(picture, title=title), ".png")
