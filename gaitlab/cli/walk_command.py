"""gaitlab walk: one wiring of a robot, walked until its travel per period has settled."""

from __future__ import annotations

import time
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from gaitlab.cli.files import write_new
from gaitlab.cli.options import (
    Number,
    WholeNumber,
    engine_option,
    force_option,
    json_option,
    robot_argument,
    wiring_for,
    wiring_option,
)
from gaitlab.cli.output import json_text, print_facts, print_failure, print_json, print_table, warn
from gaitlab.cli.walk_facts import footfall_rows, walk_facts, walk_rows
from gaitlab.errors import InputError, RunFolderError, must
from gaitlab.gait.outcomes import WALKED
from gaitlab.robot.checks import require_odd_ring
from gaitlab.robot.reader import read_robot
from gaitlab.trust.cautions import DISTANCES, ESTIMATES

if TYPE_CHECKING:
    from gaitlab.gait.records import Trace, Walk
    from gaitlab.robot.records import Robot
    from gaitlab.wiring.wiring import Wiring

TRACE_HZ = 60.0  # of a saved walk: smooth at any usual frame rate (chosen by us)


@click.command("walk")
@robot_argument
@wiring_option(required=True)
@click.option(
    "--periods",
    type=WholeNumber(1, 500),
    default=None,
    help="Walk exactly this many periods and read the last; default: until the travel has settled.",
)
@engine_option
@click.option("--step-ms", type=Number(above=0, at_most=20), default=None, help="Step; default: the robot file's.")
@click.option(
    "--sequence",
    metavar="NAME|PHASES",
    default=None,
    help="Ideal waves instead of the solved ring, for a first look: natural, alternate, reverse-alternate, or a phase for "
    "each output such as 0,0.6,0.2,0.8,0.4.",
)
@click.option("--period-s", type=Number(above=0, at_most=60), default=None, help="Period of ideal waves; default 1 s.")
@click.option(
    "--vacuum-kPa",
    "vacuum_kPa",
    type=Number(above=0, below=101.3),
    default=None,
    help="Peak of ideal waves; default 50.",
)
@click.option(
    "--save",
    type=click.Path(path_type=Path),
    default=None,
    help="Folder to write walk.json and the motion, walk.npz, to.",
)
@force_option
@json_option
def command(
    robot_path: Path,
    wiring_text: str,
    periods: int | None,
    engine: str,
    step_ms: float | None,
    sequence: str | None,
    period_s: float | None,
    vacuum_kPa: float | None,
    save: Path | None,
    force: bool,
    as_json: bool,
) -> None:
    """Walk one wiring and measure it: travel, speed, drift, slip, footfalls, wave, margins.

    The ring is solved under the load of this wiring and drives the body. Distances are estimates, good to 20–30 %. Refused
    (exit 2): a wiring that does not fit the robot, an even ring (unless --sequence stands in for it). A ring that does not
    run, a fall, a walk that never settles: exit 1, with its outcome and a remedy.

    \b
      gaitlab walk robots/tray_row5.toml --wiring "a=1 b=3 c=5 d=2 e=4"
      gaitlab walk robots/tray_row5.toml --wiring "a=1 b=3 c=5 d=2 e=4" --engine mujoco --json
    """
    file = read_robot(robot_path)
    wiring = wiring_for(file.robot, wiring_text)
    _check_ideal(sequence, period_s, vacuum_kPa)
    if sequence is None:
        require_odd_ring(file.robot)
    started = time.perf_counter()
    how = {
        "engine": engine,
        "step_s": None if step_ms is None else step_ms * 1e-3,
        "periods": periods,
        "trace_hz": TRACE_HZ if save is not None else 0.0,
    }
    if sequence is None:
        walk, trace = _ring_walk(file.robot, wiring, how)
    else:
        walk, trace = _ideal_walk(file.robot, wiring, sequence, (period_s or 1.0, (vacuum_kPa or 50.0) * 1e3), how)
    facts = walk_facts(walk) | {"wiring": wiring.as_dict(), "sequence": sequence or "ring"}
    if save is not None:
        _save(save, facts, trace, force=force)
    _print(walk, facts | {"wall_s": time.perf_counter() - started}, as_json=as_json)


def _check_ideal(sequence: str | None, period_s: float | None, vacuum_kPa: float | None) -> None:
    if sequence is None and (period_s is not None or vacuum_kPa is not None):
        rule = "given with --sequence: a solved ring has its own period and vacuum"
        raise InputError(must("--period-s and --vacuum-kPa", rule, "no --sequence"))


def _ring_walk(robot: Robot, wiring: Wiring, how: dict[str, Any]) -> tuple[Walk, Trace | None]:
    from gaitlab.gait.walk import walk
    from gaitlab.ring.solve import ring_run

    return walk(robot, wiring, ring_run(robot, wiring), **how)


def _ideal_walk(
    robot: Robot, wiring: Wiring, sequence: str, period_and_vacuum: tuple[float, float], how: dict[str, Any]
) -> tuple[Walk, Trace | None]:
    from gaitlab.gait.walk import walk_waves
    from gaitlab.ring.sequence import ideal_waves

    waves = ideal_waves(robot, wiring, _phases(sequence), *period_and_vacuum)
    return walk_waves(robot, waves, **how)


def _phases(sequence: str) -> str | list[float]:
    """A name as it is, or numbers separated by commas as a list."""
    try:
        return [float(word) for word in sequence.split(",")]
    except ValueError:
        return sequence


def _save(folder: Path, facts: dict[str, Any], trace: Trace | None, *, force: bool) -> None:
    from gaitlab.gait.trace_file import trace_bytes

    try:
        folder.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        raise RunFolderError(must("--save", "a folder that can be written", str(folder), str(error.strerror))) from None
    if trace is not None:
        write_new(folder / "walk.npz", trace_bytes(trace), force=force)
    write_new(folder / "walk.json", json_text(facts) + "\n", force=force)


def _print(walk: Walk, facts: dict[str, Any], *, as_json: bool) -> None:
    for text in walk.warnings:
        warn(text)
    if walk.outcome != WALKED and as_json:
        print_failure(walk.outcome, walk.remedy, as_json=True, **{k: v for k, v in facts.items() if k != "outcome"})
    if as_json:
        print_json(facts)
        return
    if walk.duty_factor:  # a walk that never settled was measured all the same
        _print_people(facts)
    if walk.outcome != WALKED:
        print_failure(walk.outcome, walk.remedy, as_json=False)


def _print_people(facts: dict[str, Any]) -> None:
    print_facts([("wiring", " ".join(f"{i}={s}" for i, s in facts["wiring"].items())), *walk_rows(facts)])
    click.echo()
    print_table(["foot", "duty", "stance (phases)"], footfall_rows(facts))
    click.echo(f"\n{DISTANCES}\n{ESTIMATES}")
