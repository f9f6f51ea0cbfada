"""gaitlab duct: steady flow through one channel or tube."""

from __future__ import annotations

import math
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import click
import numpy as np

from gaitlab.air.bench import sonic_numbers
from gaitlab.air.fanno import DuctState, duct_flow
from gaitlab.air.friction import regime
from gaitlab.air.gas import DENSITY_ANR_KG_M3, Gas
from gaitlab.air.section import SMOOTH_WALL_M, Duct, Section, section_of
from gaitlab.air.validity import duct_warnings
from gaitlab.cli.duct_options import duct_from_sizes
from gaitlab.cli.files import write_new
from gaitlab.cli.options import Number, force_option, json_option
from gaitlab.cli.output import print_facts, print_json, warn
from gaitlab.robot.circuit import RoundDuct, SquareDuct
from gaitlab.robot.fields import DM3_S_BAR, KELVIN_AT_ZERO_C, KILO, MILLI, MINUTE_LITRE

MICRO = 1e-6
MG_PER_KG = 1e6
CURVE_POINTS = 121
PRESSURE = Number(above=0, at_most=2000)


@click.command("duct")
@click.option("--square-mm", type=Number(above=0, at_most=100), help="Side of a square channel.")
@click.option("--width-mm", type=Number(above=0, at_most=100), help="Width of a rectangular channel.")
@click.option("--height-mm", type=Number(above=0, at_most=100), help="Height of a rectangular channel.")
@click.option("--bore-mm", type=Number(above=0, at_most=100), help="Bore of a round tube.")
@click.option("--length-mm", type=Number(above=0, at_most=100_000), required=True, help="Length of the straight run.")
@click.option("--from-kPa", "from_kPa", type=PRESSURE, required=True, help="Absolute pressure at one end.")
@click.option("--to-kPa", "to_kPa", type=PRESSURE, required=True, help="Absolute pressure at the other end.")
@click.option(
    "--inlet-loss", type=Number(at_least=0, at_most=5), default=0.5, show_default=True, help="0.05 if rounded."
)
@click.option("--temperature-C", "temperature_C", type=Number(above=-60, below=100), default=20.0, show_default=True)
@click.option(
    "--roughness-um",
    type=Number(at_least=0, at_most=1000),
    default=SMOOTH_WALL_M / MICRO,
    show_default=True,
    help="Height of the wall's roughness.",
)
@click.option("--plot", type=click.Path(path_type=Path), help="Draw flow over downstream pressure into this PNG file.")
@force_option
@json_option
def command(
    square_mm: float | None, width_mm: float | None, height_mm: float | None, bore_mm: float | None, length_mm: float,
    from_kPa: float, to_kPa: float, inlet_loss: float, temperature_C: float, roughness_um: float,
    plot: Path | None, force: bool, as_json: bool,
) -> None:  # fmt: skip
    """Steady air flow through one straight channel or tube, laminar to choked.

    Give one of --square-mm, --width-mm with --height-mm, --bore-mm. Pressures are absolute: 101.325 kPa is the air
    outside, a gauge vacuum of 57 kPa is 44.325 kPa absolute. A flow towards --from-kPa is negative.

    \b
      gaitlab duct --square-mm 0.5 --length-mm 10 --from-kPa 101.325 --to-kPa 44.325
      gaitlab duct --bore-mm 1 --length-mm 200 --from-kPa 101.325 --to-kPa 60 --json
    """
    duct = duct_from_sizes(square_mm, width_mm, height_mm, bore_mm, length_mm, inlet_loss)
    gas = Gas(temperature_K=temperature_C + KELVIN_AT_ZERO_C)
    case = DuctCase(duct, from_kPa * KILO, to_kPa * KILO, gas, roughness_um * MICRO)
    facts = duct_facts(case)
    if plot is not None:
        _write_picture(case, plot, force=force)
    if as_json:
        print_json(facts)
    else:
        _print_human(facts)


@dataclass(frozen=True)
class DuctCase:
    """One question: this duct, between these absolute pressures, with this gas and wall."""

    duct: Duct
    from_Pa: float
    to_Pa: float
    gas: Gas
    roughness_m: float

    @property
    def up_Pa(self) -> float:
        """The higher pressure."""
        return max(self.from_Pa, self.to_Pa)

    @property
    def down_Pa(self) -> float:
        """The lower pressure."""
        return min(self.from_Pa, self.to_Pa)

    @property
    def section(self) -> Section:
        """The duct's cross section with its wall."""
        return section_of(self.duct, roughness_m=self.roughness_m)

    def state(self, down_Pa: float) -> DuctState:
        """Flow from the higher pressure down to `down_Pa`."""
        return duct_flow(self.section, self.up_Pa, down_Pa, self.gas)

    def laminar_Pa2_s_per_kg(self) -> float:
        """a of the laminar limit p_u² − p_d² = a m."""
        return self.section.laminar_Pa2_s_per_kg(self.gas.viscosity_Pa_s(), self.gas.RT)


def duct_facts(case: DuctCase) -> dict[str, Any]:
    """The flow through a duct, keyed as --json prints it."""
    state = case.state(case.down_Pa)
    sonic, ratio = sonic_numbers(case.section, case.gas, case.up_Pa)
    flow = math.copysign(state.mass_flow_kg_s, case.from_Pa - case.to_Pa)
    return {
        "mass_flow_mg_s": flow * MG_PER_KG,
        "flow_L_min_ANR": flow / DENSITY_ANR_KG_M3 / MINUTE_LITRE,
        "reynolds": state.reynolds,
        "inlet_mach": state.inlet_mach,
        "exit_mach": state.exit_mach,
        "choked": state.choked,
        "sonic_conductance_dm3_s_bar": sonic / DM3_S_BAR,
        "critical_ratio": ratio,
        "laminar_Pa2_s_per_kg": case.laminar_Pa2_s_per_kg(),
        "regime": regime(state.reynolds, case.section),
        "warnings": list(duct_warnings(case.duct, case.down_Pa, case.gas, roughness_m=case.roughness_m)),
    }


def _write_picture(case: DuctCase, path: Path, *, force: bool) -> None:
    from gaitlab.report.air_plots import DuctCurve, duct_plot
    from gaitlab.report.style import figure_bytes

    # Closer together towards equal pressures, where the curve is steepest.
    pressures = case.up_Pa * (1.0 - 0.99 * np.linspace(1.0, 0.0, CURVE_POINTS) ** 2)
    curve = DuctCurve(
        title=_title(case.duct),
        up_Pa=case.up_Pa,
        down_Pa=pressures.tolist(),
        flow_kg_s=[case.state(float(p)).mass_flow_kg_s for p in pressures],
        laminar_kg_s=((case.up_Pa**2 - pressures**2) / case.laminar_Pa2_s_per_kg()).tolist(),
        choking_Pa=case.up_Pa * sonic_numbers(case.section, case.gas, case.up_Pa)[1],
        point_down_Pa=case.down_Pa,
        point_flow_kg_s=case.state(case.down_Pa).mass_flow_kg_s,
    )
    write_new(path, figure_bytes(duct_plot(curve), path.suffix.lower()), force=force)


def _title(duct: Duct) -> str:
    length = f"{duct.length_m / MILLI:.4g} mm long"
    if isinstance(duct, RoundDuct):
        return f"Round tube, {duct.bore_m / MILLI:.4g} mm bore, {length}"
    if isinstance(duct, SquareDuct):
        return f"Square channel, {duct.side_m / MILLI:.4g} mm, {length}"
    return f"Channel {duct.width_m / MILLI:.4g} × {duct.height_m / MILLI:.4g} mm, {length}"


def _print_human(facts: dict[str, Any]) -> None:
    state = "choked: less pressure behind it changes nothing" if facts["choked"] else "not choked"
    print_facts(
        [
            ("mass flow", f"{facts['mass_flow_mg_s']:.4g} mg/s"),
            ("free air", f"{facts['flow_L_min_ANR']:.4g} L/min ANR (20 °C, 100 kPa, 65 % humidity)"),
            ("flow is", f"{facts['regime']}, Reynolds {facts['reynolds']:.0f}, {state}"),
            ("Mach number", f"{facts['inlet_mach']:.3g} at the inlet, {facts['exit_mach']:.3g} at the outlet"),
            ("sonic conductance", f"{facts['sonic_conductance_dm3_s_bar']:.4g} dm³/(s bar)"),
            ("critical ratio", f"{facts['critical_ratio']:.3f} (chokes below this share of the upstream pressure)"),
            ("laminar limit", f"{facts['laminar_Pa2_s_per_kg']:.4g} Pa² s/kg"),
        ]
    )
    click.echo("An estimate: 0.05 mm on a 0.5 mm channel moves the flow by a fifth; measure it (gaitlab divider).")
    for text in facts["warnings"]:
        warn(text)
