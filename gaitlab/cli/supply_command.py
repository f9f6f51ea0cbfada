"""gaitlab supply: the air budget of a ring, the smallest pump that keeps it alive, the periods in a syringe's stroke."""

from __future__ import annotations

import math
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click
import numpy as np

from gaitlab.air.gas import DENSITY_ANR_KG_M3
from gaitlab.cli.files import write_new
from gaitlab.cli.options import force_option, json_option, robot_argument, wiring_option
from gaitlab.cli.output import print_facts, print_failure, print_json
from gaitlab.cli.ring_facts import margin_notes, wiring_or_even
from gaitlab.robot.circuit import Pump, PumpTable, Syringe
from gaitlab.robot.fields import KILO, MILLI, MINUTE_LITRE
from gaitlab.robot.reader import read_robot
from gaitlab.trust.cautions import BENCH, ESTIMATES

if TYPE_CHECKING:
    from matplotlib.figure import Figure

    from gaitlab.ring.budget import AirBudget
    from gaitlab.ring.pattern import LoadPattern
    from gaitlab.ring.waves import FloatArray, RingRun
    from gaitlab.robot.records import Robot
    from gaitlab.wiring.wiring import Wiring

DEMAND_POINTS = 4  # vacuums, besides the working point, at which the ring's demand is drawn
MOST_OF_DEAD_END = 0.95


@click.command("supply")
@robot_argument
@wiring_option()
@click.option(
    "--plot", type=click.Path(path_type=Path), help="Draw the pump at work, or the syringe's stroke, into this PNG."
)
@force_option
@json_option
def command(robot_path: Path, wiring_text: str | None, plot: Path | None, force: bool, as_json: bool) -> None:
    """The air a running ring draws, where that puts the pump, and the smallest pump that keeps it alive.

    Flows are free air (ISO 8778: 20 °C, 100 kPa), vacuums gauge. The smallest pump has the file's dead end, curve law and
    buffer. A syringe: how many periods a pull carries, where the ring dies, and how far the robot gets (with --wiring).
    Without a wiring the inlets hang on the outputs one after the other.

    \b
      gaitlab supply robots/tray_row5.toml --plot pump.png
      gaitlab supply robots/tray_row5.toml --wiring "a=1 b=3 c=5 d=2 e=4" --json
    """
    from gaitlab.ring.budget import air_budget, dead_end
    from gaitlab.ring.pattern import load_pattern
    from gaitlab.ring.solve import ring_run

    robot = read_robot(robot_path).robot
    wiring = wiring_or_even(robot, wiring_text)
    run, pattern = ring_run(robot, wiring), load_pattern(robot, wiring)
    budget = air_budget(pattern, run)
    facts = supply_facts(run, budget)
    if isinstance(robot.supply, Syringe):
        facts |= _stroke_facts(robot, wiring, run, walked=wiring_text is not None)
    if not budget.alive:
        if not as_json:
            _print_starved(facts, dead_end(pattern))
        print_failure(run.outcome, run.remedy, as_json=as_json, **facts)
    if plot is not None:
        write_new(plot, _picture(robot, pattern, run, budget), force=force)
    if as_json:
        print_json({"outcome": run.outcome, **facts})
    else:
        _print_human(facts)


def supply_facts(run: RingRun, budget: AirBudget) -> dict[str, Any]:
    """The budget as --json prints it; `pump_ok` where the supply meets the rule that the smallest pump is found by."""
    return {
        "mean_flow_L_min_ANR": budget.flow_m3_s_ANR / MINUTE_LITRE,
        "working_vacuum_kPa": budget.working_Pa / KILO,
        "least_vacuum_kPa": budget.least_Pa / KILO,
        "pump_ok": budget.enough,
        "smallest_free_flow_L_min": budget.smallest_m3_s / MINUTE_LITRE,
        "period_s": run.period_s,
        "notes": margin_notes(run),
    }


def _stroke_facts(robot: Robot, wiring: Wiring, run: RingRun, *, walked: bool) -> dict[str, Any]:
    details = dict(run.details)
    periods = details.get("periods_per_stroke", 0.0)
    travel = _travel_m(robot, wiring, run) if walked and periods else float("nan")
    return {
        "periods_per_stroke": periods,
        "dies_at_s": details.get("dies_at_s", float("nan")),
        "dies_at_vacuum_kPa": details.get("dies_at_supply_Pa", float("nan")) / KILO,
        "travel_mm_per_stroke": travel * periods / MILLI,
    }


def _travel_m(robot: Robot, wiring: Wiring, run: RingRun) -> float:
    """Travel per period on the waves of the middle of the stroke; nan where the robot does not walk on them."""
    from gaitlab.gait.walk import walk

    return walk(robot, wiring, run)[0].travel_m


def _print_human(facts: dict[str, Any]) -> None:
    rows: list[tuple[str, object]] = [
        ("mean draw", f"{facts['mean_flow_L_min_ANR']:.4g} L/min free air (ANR)"),
        ("supply vacuum", f"{facts['working_vacuum_kPa']:.4g} kPa mean, {facts['least_vacuum_kPa']:.4g} kPa least"),
        ("period", f"{facts['period_s']:.4g} s"),
    ]
    if "periods_per_stroke" in facts:
        rows += [
            ("periods per pull", facts["periods_per_stroke"]),
            ("dies after", f"{facts['dies_at_s']:.4g} s at {facts['dies_at_vacuum_kPa']:.4g} kPa"),
            ("travel per pull", _travel_words(facts["travel_mm_per_stroke"])),
        ]
    else:
        rows.append(("smallest pump", _smallest_words(facts)))
    rows += [("note", note) for note in facts["notes"]]
    print_facts(rows)
    click.echo(f"\n{ESTIMATES}\n{BENCH}")


def _print_starved(facts: dict[str, Any], dead_end_Pa: float) -> None:
    """What a supply that does not carry the ring leaves, and the pump that would."""
    if "periods_per_stroke" not in facts:
        vacuum = f"{facts['working_vacuum_kPa']:.4g} kPa mean, {facts['least_vacuum_kPa']:.4g} kPa least"
        rows = [("supply vacuum", vacuum), ("dead end", f"{dead_end_Pa / KILO:.4g} kPa")]
        print_facts([*rows, ("smallest pump", _smallest_words(facts))])
    click.echo(f"\n{ESTIMATES}\n{BENCH}\n")


def _smallest_words(facts: dict[str, Any]) -> str:
    smallest = facts["smallest_free_flow_L_min"]
    if math.isnan(smallest):
        return "none with this dead end keeps the ring alive"
    return f"{smallest:.3g} L/min free flow, same dead end"


def _travel_words(travel_mm: float) -> str:
    return "not walked: give --wiring" if math.isnan(travel_mm) else f"{travel_mm:.3g} mm (good to 20–30 %)"


def _picture(robot: Robot, pattern: LoadPattern, run: RingRun, budget: AirBudget) -> bytes:
    from gaitlab.report.style import figure_bytes

    if isinstance(robot.supply, Syringe):
        return figure_bytes(_stroke_figure(robot, pattern), ".png")
    return figure_bytes(_pump_figure(robot, pattern, run, budget), ".png")


def _pump_figure(robot: Robot, pattern: LoadPattern, run: RingRun, budget: AirBudget) -> Figure:
    """The file's pump (none for a house line), the smallest one, and what the ring asks for at several vacuums."""
    from gaitlab.report.supply_plots import PumpPicture, pump_picture
    from gaitlab.ring.budget import dead_end, demand, free_flow, least_vacuum, pump_curve

    deepest = MOST_OF_DEAD_END * dead_end(pattern)
    asked = np.linspace(min(1.04 * least_vacuum(pattern), deepest), deepest, DEMAND_POINTS)
    vacuum, flow = np.append(asked, budget.working_Pa), np.append(demand(pattern, asked), budget.flow_kg_s)
    order = np.argsort(vacuum)
    own = pump_curve(pattern) if isinstance(robot.supply, Pump | PumpTable) else None
    least = pump_curve(pattern, budget.smallest_m3_s / free_flow(pattern.supply))
    picture = PumpPicture(
        pump=own and _anr(*own),
        smallest=_anr(*least),
        ring=_anr(vacuum[order], flow[order]),
        working=(budget.working_Pa, budget.flow_m3_s_ANR),
        smallest_free_m3_s=budget.smallest_m3_s,
    )
    return pump_picture(picture, title=f"{robot.name}: what the ring draws")


def _anr(vacuum_Pa: FloatArray, flow_kg_s: FloatArray) -> tuple[FloatArray, FloatArray]:
    return vacuum_Pa, flow_kg_s / DENSITY_ANR_KG_M3


def _stroke_figure(robot: Robot, pattern: LoadPattern) -> Figure:
    from gaitlab.report.supply_plots import stroke_picture
    from gaitlab.ring.circuit import circuit_of_pattern
    from gaitlab.ring.stroke import stroke_run, syringe_start

    circuit = circuit_of_pattern(pattern)
    stroke = stroke_run(circuit, syringe_start(circuit))
    return stroke_picture(stroke.cuts_s, stroke.supply_Pa, title=f"{robot.name}: one filling of the syringe")
