"""gaitlab divider: a gauge reading on the bench becomes a resistance."""

from __future__ import annotations

from typing import Any

import click

from gaitlab.air.bench import Resistance, resistance
from gaitlab.air.gas import Gas
from gaitlab.air.validity import duct_warnings
from gaitlab.cli.divider_ways import reading_from
from gaitlab.cli.options import Number, json_option
from gaitlab.cli.output import print_facts, print_json, warn
from gaitlab.robot.fields import DM3_S_BAR, KELVIN_AT_ZERO_C, KILO, MILLI
from gaitlab.trust.cautions import BENCH, ESTIMATES

VACUUM = Number(above=0, below=2000)
MG_PER_KG = 1e6
# What the inputs are called outside, by field of a reading.
INPUT_NAMES = {
    "dead_end_Pa": "dead_end_gauge",
    "reading_Pa": "reading_gauge",
    "free_flow_m3_s": "free_flow",
    "meter_m3_s": "meter",
    "known_reading_Pa": "known_gauge",
    "known_scale": "known_size",
    "volume_m3": "volume",
    "rise_s": "clock",
    "polytropic": "heat_exchange",
}


@click.command("divider")
@click.option("--dead-end-kPa", "dead_end_kPa", type=VACUUM, help="Gauge vacuum with the leg plugged.")
@click.option("--reading-kPa", "reading_kPa", type=VACUUM, required=True, help="Gauge vacuum with the restrictor open.")
@click.option("--free-flow-L-min", "free_flow_L_min", type=Number(above=0), help="Way a: the pump's free-air flow.")
@click.option("--curve", type=click.Choice(["mass", "volume"]), help="How the pump's flow falls (ways a and c).")
@click.option("--meter-L-min", "meter_L_min", type=Number(above=0), help="Way b: flow meter, L/min ANR.")
@click.option("--known-square-mm", type=Number(above=0), help="Way c: side of a known square channel.")
@click.option("--known-bore-mm", type=Number(above=0), help="Way c: bore of a known round tube.")
@click.option("--known-length-mm", type=Number(above=0), help="Way c: its length; default 10.")
@click.option(
    "--known-reading-kPa", "known_reading_kPa", type=VACUUM, help="Way c: gauge vacuum with the known one open."
)
@click.option("--volume-mL", "volume_mL", type=Number(above=0), help="Way d: vessel that fills through the restrictor.")
@click.option("--rise-s", type=Number(above=0), help="Way d: time from the dead-end vacuum to the reading.")
@click.option("--ambient-kPa", "ambient_kPa", type=Number(above=1, at_most=1000), default=101.325, show_default=True)
@click.option("--temperature-C", "temperature_C", type=Number(above=-60, below=100), default=20.0, show_default=True)
@click.option("--gauge-error-kPa", "gauge_error_kPa", type=Number(at_least=0), help="Of each gauge reading; default 1.")
@click.option(
    "--flow-error-percent", type=Number(at_least=0, below=100), help="Pump (default 10) or meter (default 5)."
)
@click.option("--size-error-mm", type=Number(at_least=0), help="Of the known restrictor; default 0.05.")
@click.option("--volume-error-percent", type=Number(at_least=0, below=100), help="Of the vessel; default 2.")
@click.option("--time-error-s", type=Number(at_least=0), help="Of the clock; default 0.1.")
@json_option
def command(ambient_kPa: float, temperature_C: float, as_json: bool, **given: Any) -> None:
    """From a gauge reading on the bench to the resistance of a channel.

    A pump, a T-piece with a gauge, the unknown channel open to the air on the third leg. All pressures are gauge
    vacuums. The gauge alone gives a ratio; one absolute flow more makes it a resistance. Give one of:

    \b
      a  --dead-end-kPa --free-flow-L-min --curve       the pump's own curve
      b  --meter-L-min                                  a flow meter in the line
      c  --dead-end-kPa --curve --known-square-mm (or --known-bore-mm) --known-reading-kPa
      d  --dead-end-kPa --volume-mL --rise-s            a vessel and a clock

    The two curve laws are 40 % apart in mid-curve: measure which one your pump follows. Errors are standard deviations.

    \b
      gaitlab divider --dead-end-kPa 57 --reading-kPa 41 --free-flow-L-min 7 --curve mass
      gaitlab divider --dead-end-kPa 57 --reading-kPa 41 --volume-mL 100 --rise-s 0.47 --json
    """
    gas = Gas(ambient_kPa * KILO, temperature_C + KELVIN_AT_ZERO_C)
    way, reading, errors = reading_from(given)
    found = resistance(reading, gas, errors)
    facts = divider_facts(way, found)
    facts["warnings"] = list(duct_warnings(found.square, gas.pressure_Pa - reading.reading_Pa, gas))
    if as_json:
        print_json(facts)
    else:
        _print_human(facts)


def divider_facts(way: str, found: Resistance) -> dict[str, Any]:
    """The resistance, keyed as --json prints it."""
    return {
        "way": way,
        "mass_flow_mg_s": found.mass_flow_kg_s * MG_PER_KG,
        "flow_fraction": found.flow_fraction,
        "laminar_kg_s_Pa2": found.laminar_kg_s_Pa2,
        "sonic_conductance_dm3_s_bar": found.sonic_conductance_m3_s_Pa / DM3_S_BAR,
        "critical_ratio": found.critical_ratio,
        "equivalent_square_mm": found.square.side_m / MILLI,
        "equivalent_square_range_mm": [side / MILLI for side in found.square_range_m],
        "relative_uncertainty": found.relative_uncertainty,
        "uncertainty_by_input": {INPUT_NAMES[name]: share for name, share in found.shares},
    }


def _print_human(facts: dict[str, Any]) -> None:
    low, high = facts["equivalent_square_range_mm"]
    fraction = facts["flow_fraction"]
    by_input = ", ".join(f"{name} {100 * share:.1f} %" for name, share in facts["uncertainty_by_input"].items())
    print_facts(
        [
            ("way", facts["way"]),
            ("mass flow", f"{facts['mass_flow_mg_s']:.4g} mg/s ± {100 * facts['relative_uncertainty']:.0f} %"),
            ("  of which", by_input),
            ("share of free flow", "not known this way" if fraction is None else f"{100 * fraction:.1f} %"),
            ("like a square of", f"{facts['equivalent_square_mm']:.3f} mm, 10 mm long ({low:.3f} to {high:.3f} mm)"),
            ("sonic conductance", f"{facts['sonic_conductance_dm3_s_bar']:.4g} dm³/(s bar), critical ratio "
                                  f"{facts['critical_ratio']:.3f}"),
            ("if it were laminar", f"{facts['laminar_kg_s_Pa2']:.4g} kg/(s Pa²)"),
        ]
    )  # fmt: skip
    click.echo("The equivalent square assumes a sharp inlet; a rounded one passes up to 10 % more.")
    click.echo(ESTIMATES)
    click.echo(BENCH)
    for text in facts["warnings"]:
        warn(text)
