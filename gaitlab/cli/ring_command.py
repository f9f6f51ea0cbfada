"""gaitlab ring: does the ring start, and what does it put out under the load of a wiring."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from gaitlab.cli.files import write_new
from gaitlab.cli.options import Number, force_option, json_option, robot_argument, wiring_option
from gaitlab.cli.output import print_facts, print_failure, print_json, print_table
from gaitlab.cli.ring_facts import STAGE_HEADERS, ring_facts, stage_rows, wiring_or_even
from gaitlab.errors import InputError, must
from gaitlab.ring.verdict import OSCILLATES
from gaitlab.robot.fields import KILO
from gaitlab.robot.reader import read_robot
from gaitlab.trust.cautions import ESTIMATES

if TYPE_CHECKING:
    from gaitlab.ring.waves import RingRun
    from gaitlab.robot.records import Robot
    from gaitlab.wiring.wiring import Wiring

IDEAL = "ideal"


@click.command("ring")
@robot_argument
@wiring_option()
@click.option(
    "--sequence",
    metavar="NAME|PHASES",
    default=None,
    help="An ideal sequence instead of the solved ring: natural, alternate, reverse-alternate, or one phase for each output.",
)
@click.option(
    "--period-s", type=Number(above=0, at_most=60), default=None, help="Period of an ideal sequence; default 1 s."
)
@click.option(
    "--vacuum-kPa",
    "vacuum_kPa",
    type=Number(above=0, below=101.3),
    default=None,
    help="Peak of an ideal sequence; default 50.",
)
@click.option(
    "--starts", is_flag=True, help="Also start it evacuated and with 1, 3, 5 … edges on their way: other rhythms?"
)
@click.option(
    "--plot", type=click.Path(path_type=Path), help="Draw two periods in ring order and time order into this PNG."
)
@force_option
@json_option
def command(
    robot_path: Path,
    wiring_text: str | None,
    sequence: str | None,
    period_s: float | None,
    vacuum_kPa: float | None,
    starts: bool,
    plot: Path | None,
    force: bool,
    as_json: bool,
) -> None:
    """Does the ring start, with which period, phases and levels.

    The ring is solved from rest at atmosphere under the load of the wiring (without one: the inlets hung on the outputs one
    after the other). A ring that does not oscillate exits 1, with its outcome and a remedy. Vacuums are gauge, positive.

    \b
      gaitlab ring robots/tray_row5.toml --wiring "a=1 b=3 c=5 d=2 e=4" --plot ring.png
      gaitlab ring robots/tray_row5.toml --sequence reverse-alternate --json
    """
    robot = read_robot(robot_path).robot
    wiring = wiring_or_even(robot, wiring_text)
    run = _ideal(robot, wiring, sequence, period_s, vacuum_kPa) if sequence is not None else _solved(robot, wiring)
    _check_ideal(sequence, period_s, vacuum_kPa, starts)
    facts = ring_facts(run) | {"wiring": wiring.as_dict()}
    if run.outcome != IDEAL:
        facts["margins"] |= _gains(robot, wiring, run)
    if starts:
        facts["starts"] = _other_starts(robot, wiring)
    if run.outcome not in (OSCILLATES, IDEAL):
        print_failure(facts.pop("outcome"), facts.pop("remedy"), as_json=as_json, **facts)
    if plot is not None:
        write_new(plot, _picture(robot, wiring, run), force=force)
    if as_json:
        print_json(facts)
    else:
        _print_human(run, facts)


def _check_ideal(sequence: str | None, period_s: float | None, vacuum_kPa: float | None, starts: bool) -> None:
    if sequence is None and (period_s is not None or vacuum_kPa is not None):
        rule = "given with --sequence: a solved ring has its own period and vacuum"
        raise InputError(must("--period-s and --vacuum-kPa", rule, "no --sequence"))
    if sequence is not None and starts:
        raise InputError(must("--starts", "given without --sequence: an ideal sequence is not started", "both"))


def _solved(robot: Robot, wiring: Wiring) -> RingRun:
    from gaitlab.ring.solve import ring_run

    return ring_run(robot, wiring)


def _ideal(robot: Robot, wiring: Wiring, sequence: str, period_s: float | None, vacuum_kPa: float | None) -> RingRun:
    from gaitlab.ring.sequence import ideal_run

    return ideal_run(robot, wiring, _phases(sequence), period_s or 1.0, (vacuum_kPa or 50.0) * KILO)


def _phases(sequence: str) -> str | list[float]:
    """A name as it is, or numbers separated by commas as a list."""
    try:
        return [float(word) for word in sequence.split(",")]
    except ValueError:
        return sequence


def _gains(robot: Robot, wiring: Wiring, run: RingRun) -> dict[str, float]:
    """The weakest stage's steepest gain at the run's supply vacuum, and what this number of stages needs."""
    from gaitlab.ring.circuit import circuit_of
    from gaitlab.ring.inverter import gain_needed
    from gaitlab.ring.verdict import weakest_gain

    gain = weakest_gain(circuit_of(robot, wiring), max(run.supply_mean_Pa, 1.0))
    return {"gain": gain, "gain_needed": gain_needed(robot.ring.stages)}


def _other_starts(robot: Robot, wiring: Wiring) -> list[dict[str, Any]]:
    """How the ring ends from each of several states."""
    from gaitlab.ring.harmonics import runs_from_several
    from gaitlab.ring.pattern import load_pattern

    return [
        {"start": name, "outcome": run.outcome, "harmonic": run.harmonic, "period_s": run.period_s}
        for name, run in runs_from_several(load_pattern(robot, wiring))
    ]


def _picture(robot: Robot, wiring: Wiring, run: RingRun) -> bytes:
    from gaitlab.report.ring_plots import WavePicture, ring_waves
    from gaitlab.report.style import figure_bytes
    from gaitlab.ring.circuit import circuit_of
    from gaitlab.ring.levels import hold_levels, release_levels

    valves = circuit_of(robot, wiring).valves
    picture = WavePicture(
        vacuum_Pa=run.output_vacuum_Pa,
        phase=run.phase,
        period_s=run.period_s,
        supply_Pa=run.supply_vacuum_Pa,
        hold_Pa=hold_levels(valves, run),
        release_Pa=release_levels(valves, run),
    )
    kind = "ideal sequence, not a solved ring" if run.outcome == IDEAL else f"{wiring.text()}"
    title = f"{robot.name}: {len(run.phase)} stages, period {run.period_s:.3g} s ({kind})"
    return figure_bytes(ring_waves(picture, title=title), ".png")


def _print_human(run: RingRun, facts: dict[str, Any]) -> None:
    supply = facts["supply_vacuum_kPa"]
    rows: list[tuple[str, object]] = [
        ("outcome", run.outcome),
        ("wiring", " ".join(f"{inlet}={source}" for inlet, source in facts["wiring"].items())),
        ("period", f"{run.period_s:.4g} s"),
        ("in time order", " ".join(str(k) for k in facts["alternate_order"])),
    ]
    if run.outcome == OSCILLATES:
        rows += [
            ("from rest to steady", f"{run.start_up_s:.3g} s"),
            ("supply vacuum", f"{supply['mean']:.4g} kPa mean, {supply['min']:.4g} kPa least"),
            ("air per period", f"{facts['air_mg_per_period']:.4g} mg"),
        ]
        rows += [
            (name.removesuffix("_kPa").replace("_", " "), f"{value:.3g}{_unit(name)}")
            for name, value in facts["margins"].items()
        ]
    if "starts" in facts:
        rows.append(("other starts", _starts_text(facts["starts"])))
    rows += [("note", note) for note in facts["notes"]]
    print_facts(rows)
    print_table(STAGE_HEADERS, stage_rows(run))
    click.echo(f"\n{ESTIMATES}")


def _starts_text(starts: list[dict[str, Any]]) -> str:
    """How many starts end in the fundamental, and what the others do."""
    odd = [f"{start['start']}: {start['outcome']}" for start in starts if start["outcome"] != OSCILLATES]
    return "; ".join([f"{len(starts) - len(odd)} of {len(starts)} end in the same rhythm", *odd])


def _unit(name: str) -> str:
    return " kPa" if name.endswith("_kPa") else " s" if name.endswith("_s") else ""
