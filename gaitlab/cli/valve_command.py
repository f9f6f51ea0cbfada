"""gaitlab valve: a measured membrane valve becomes the [ring.valve] table of a robot file."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import Any

import click
import numpy as np

from gaitlab.air.gas import DENSITY_ANR_KG_M3, Gas
from gaitlab.air.restrictor import check_vacuum, square_for_flow
from gaitlab.air.valve_fit import ValveFit, fit_flow_curve, fit_sealing
from gaitlab.cli.files import write_new
from gaitlab.cli.options import Number, force_option, json_option
from gaitlab.cli.output import print_facts, print_json, warn
from gaitlab.cli.valve_table import read_columns
from gaitlab.errors import InputError, must
from gaitlab.robot.circuit import SquareDuct
from gaitlab.robot.fields import KILO, MILLI, MINUTE_LITRE
from gaitlab.trust.cautions import ESTIMATES

# The sealing of Jensen, Grover & Mathies' valve (J. Microelectromech. Syst. 16(6) 1378, 2007, fig. 3a) in our law.
PUBLISHED_SEALING = 0.32
GOOD_MISFIT = 0.06  # of full flow; above it the fit is named doubtful, chosen by us
CURVE_POINTS = 241
VACUUM = Number(above=0, below=2000)


@click.command("valve")
@click.argument("table", type=click.Path(path_type=Path))
@click.option(
    "--flow-vacuum-kPa",
    "flow_vacuum_kPa",
    type=VACUUM,
    required=True,
    help="Gauge vacuum that drew the flow; the valve's other end was open to the air.",
)
@click.option(
    "--sealing", type=Number(at_least=0, at_most=2), help="Threshold rise per flow-side vacuum; default 0.32."
)
@click.option("--passed", type=click.Path(path_type=Path), help="Table of vacuum passed to a dead end: finds sealing.")
@click.option("--supply-kPa", "supply_kPa", type=VACUUM, help="Gauge vacuum on the other side in the --passed table.")
@click.option("--ambient-kPa", "ambient_kPa", type=Number(above=1, at_most=1000), default=101.325, show_default=True)
@click.option("--plot", type=click.Path(path_type=Path), help="Draw the points and the fit into this PNG file.")
@force_option
@json_option
def command(
    table: Path, flow_vacuum_kPa: float, sealing: float | None, passed: Path | None, supply_kPa: float | None,
    ambient_kPa: float, plot: Path | None, force: bool, as_json: bool,
) -> None:  # fmt: skip
    """From a measured flow-against-control curve to a robot file's valve.

    TABLE is a CSV file with the columns control_kPa (gauge vacuum in the control chamber) and flow_L_min (free air, ANR),
    from shut to open. With --passed (columns control_kPa and passed_kPa: the vacuum that the valve lets through to a dead
    end) the sealing is measured too; without it a published valve's is taken.

    \b
      gaitlab valve curve.csv --flow-vacuum-kPa 50
      gaitlab valve curve.csv --flow-vacuum-kPa 87 --passed passed.csv --supply-kPa 87 --plot valve.png
    """
    gas = Gas(ambient_kPa * KILO)
    check_vacuum("flow_vacuum", flow_vacuum_kPa * KILO, gas)
    control, flow = read_columns(table, ("control_kPa", "flow_L_min"))
    fit = fit_flow_curve([KILO * c for c in control], [MINUTE_LITRE * q for q in flow])
    measured = MeasuredValve(fit, _sealing(sealing, passed, supply_kPa), flow_vacuum_kPa * KILO, gas)
    facts = valve_facts(measured)
    if plot is not None:
        _write_picture(fit, control, flow, plot, force=force)
    if as_json:
        print_json(facts)
    else:
        _print_human(facts)


@dataclass(frozen=True)
class MeasuredValve:
    """A fitted flow curve [m³/s ANR], the sealing, and the vacuum that drew the flow."""

    fit: ValveFit
    sealing: float
    flow_vacuum_Pa: float
    gas: Gas

    def open_channel(self) -> SquareDuct:
        """The 10 mm long square channel that passes as much as the open valve."""
        flow = DENSITY_ANR_KG_M3 * self.fit.full_flow
        ambient = self.gas.pressure_Pa
        return square_for_flow(flow, ambient, ambient - self.flow_vacuum_Pa, self.gas)

    def threshold_Pa(self) -> float:
        """Threshold with both flow sides at atmosphere; raises InputError where the sealing leaves none."""
        threshold = self.fit.threshold_Pa(self.flow_vacuum_Pa, self.sealing)
        if threshold <= 0.0:
            rule = f"below {self.fit.start_Pa / self.flow_vacuum_Pa:.3f} for a valve that opened at this control vacuum"
            fix = "give this valve's own with --sealing, or measure it with --passed"
            raise InputError(must("sealing", rule, self.sealing, fix))
        return threshold


def _sealing(given: float | None, passed: Path | None, supply_kPa: float | None) -> float:
    if (passed is None) != (supply_kPa is None):
        raise click.UsageError("--passed and --supply-kPa belong together")
    if passed is None or supply_kPa is None:
        return PUBLISHED_SEALING if given is None else given
    if given is not None:
        raise click.UsageError("give --sealing or measure it with --passed, not both")
    control, through = read_columns(passed, ("control_kPa", "passed_kPa"))
    sealing = fit_sealing(control, through, supply_kPa)[1]
    if sealing < 0.0:
        raise InputError(
            must("passed table", "one that needs more control vacuum to pass more", sealing, "check the columns")
        )
    return sealing


def valve_facts(valve: MeasuredValve) -> dict[str, Any]:
    """The valve's numbers, keyed as --json prints them."""
    fit, square = valve.fit, valve.open_channel()
    doubt = [f"misfit: {100 * fit.rms:.0f} % of full flow; a second slope or a sticking membrane is not in the law"]
    return {
        "threshold_kPa": valve.threshold_Pa() / KILO,
        "opens_at_kPa": fit.start_Pa / KILO,
        "opening_span_kPa": fit.opening_span_Pa / KILO,
        "sealing": valve.sealing,
        "leak_fraction": fit.leak_fraction,
        "full_flow_L_min": fit.full_flow / MINUTE_LITRE,
        "open_square_mm": square.side_m / MILLI,
        "open_length_mm": square.length_m / MILLI,
        "misfit": fit.rms,
        "warnings": doubt if fit.rms > GOOD_MISFIT else [],
    }


def _write_picture(
    fit: ValveFit, control_kPa: list[float], flow_L_min: list[float], path: Path, *, force: bool
) -> None:
    from gaitlab.report.air_plots import ValveCurve, valve_plot
    from gaitlab.report.style import figure_bytes

    grid = np.linspace(0.0, 1.03 * max(control_kPa), CURVE_POINTS)
    curve = ValveCurve(
        control_kPa,
        flow_L_min,
        grid.tolist(),
        (fit.flow(KILO * grid) / MINUTE_LITRE).tolist(),
        (fit.start_Pa / KILO, (fit.start_Pa + fit.opening_span_Pa) / KILO),
    )
    write_new(path, figure_bytes(valve_plot(curve), path.suffix.lower()), force=force)


def _print_human(facts: dict[str, Any]) -> None:
    print_facts(
        [
            ("opens at", f"{facts['opens_at_kPa']:.1f} kPa control vacuum as measured"),
            ("full flow", f"{facts['full_flow_L_min']:.4g} L/min ANR"),
            ("misfit", f"{100 * facts['misfit']:.1f} % of full flow (root mean square)"),
        ]
    )
    click.echo("\nFor the robot file:\n\n[ring.valve]")
    for key in ("threshold_kPa", "opening_span_kPa", "sealing", "leak_fraction"):
        click.echo(f"{key} = {facts[key]:.4g}")
    click.echo(f"open = {{ square_mm = {facts['open_square_mm']:.4g}, length_mm = {facts['open_length_mm']:.4g} }}\n")
    click.echo(ESTIMATES)
    for text in facts["warnings"]:
        warn(text)
