"""gaitlab match: measured pressure traces become as-built parameters and a diagnosis."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import click

from gaitlab.cli.options import json_option, robot_argument, wiring_for, wiring_option
from gaitlab.cli.output import print_failure, print_json, print_table, progress, warn
from gaitlab.ring.solve import ring_run
from gaitlab.ring.waves import RingRun
from gaitlab.robot.fields import ML
from gaitlab.robot.reader import read_robot
from gaitlab.robot.records import Robot
from gaitlab.trust.as_built import conductance_factor
from gaitlab.trust.as_built_toml import as_built_toml
from gaitlab.trust.cautions import BENCH, ESTIMATES
from gaitlab.trust.diagnosis import Finding, cannot_tell, counted_backwards, findings, resting_words
from gaitlab.trust.matching import ROUNDS_MAX, Fitted, Match, decided_build, matched, unknowns_of
from gaitlab.trust.trace_csv import read_traces
from gaitlab.trust.trace_reading import TraceReading, read_rhythm
from gaitlab.wiring.wiring import OPEN, Wiring

UNITS = {
    "opening": "× drawn side or bore",
    "leak": "of the open valve",
    "volume": "mL",
    "supply flow": "× drawn",
    "valve threshold": "× drawn",
}
POOR_FIT = "poor_fit"
POOR_FIT_REMEDY = (
    "the model cannot follow these traces by resistors, leaks, volumes, supply and thresholds alone: check that the columns name "
    "the right stages, that --wiring is what hangs on the ring, and that the gauges were zeroed and read at the same instants"
)
BACKWARDS = "the phases fit the ring counted the other way round: check which gauge hangs on which stage"
SOUND = (
    "The ring is as drawn, as far as these gauges tell. If legs are weak all the same, look behind the ports: log "
    "inlet_NAME_kPa at the weak legs, a leak or a pinched tube shows there."
)


@click.command("match")
@robot_argument
@click.argument("traces_path", metavar="TRACES.csv", type=click.Path(path_type=Path))
@wiring_option()
@json_option
def command(robot_path: Path, traces_path: Path, wiring_text: str | None, as_json: bool) -> None:
    """Measured pressure traces of a ring become as-built parts of each stage and a diagnosis in words.

    TRACES.csv: a first row of names, then one row per instant. time_s [s], rising; stage_1_kPa, stage_2_kPa … at the
    output ports, at least one; inlet_NAME_kPa at a bellows and supply_kPa at the manifold where measured. Pressures are
    gauge vacuum in kPa, positive below atmosphere, all read at the same instants; empty cells are gaps, lines that
    begin with # are notes. Log at least three periods, from well after the start-up, twenty samples a period or more.

    --wiring says what hung on the ring during the test; left out, the ring ran without bellows. Refused (exit 2): a file
    without these columns, times that do not rise. A ring that rests, too short a log, a model that cannot follow: exit 1.

    \b
      gaitlab match robots/tray_row5.toml bench.csv --wiring "a=1 b=3 c=5 d=2 e=4"
      gaitlab match robots/tray_row5.toml ring_alone.csv --json
    """
    robot = read_robot(robot_path).robot
    wiring = _wiring(robot, wiring_text)
    reading = read_rhythm(read_traces(traces_path, stages=robot.ring.stages, inlets=robot.inlets()))
    measured = {"measured": _measured_facts(reading)}
    if reading.outcome != "oscillates":
        words = resting_words(robot, reading) if reading.outcome == "rests" else ()
        print_failure(
            reading.outcome, "; ".join([*words, reading.remedy]), as_json=as_json, diagnosis=words, **measured
        )
    expected = ring_run(robot, wiring)
    match = _matched(robot, wiring, reading)
    told = findings(robot, wiring, reading, match)
    facts = measured | _match_facts(robot, match, told, expected, reading)
    if counted_backwards(expected, reading):
        warn(BACKWARDS)
    if match.outcome == POOR_FIT:
        print_failure(POOR_FIT, POOR_FIT_REMEDY, as_json=as_json, **{k: v for k, v in facts.items() if k != "outcome"})
    if as_json:
        print_json(facts)
    else:
        _print(robot, reading, expected, match, told)


def _wiring(robot: Robot, text: str | None) -> Wiring:
    return wiring_for(robot, text) if text is not None else Wiring(tuple((inlet, OPEN) for inlet in robot.inlets()))


def _matched(robot: Robot, wiring: Wiring, reading: TraceReading) -> Match:
    solves = ROUNDS_MAX * (len(unknowns_of(robot, reading)) + 1)
    with progress(solves, "ring solved") as bar:
        return matched(robot, wiring, reading, tell=lambda done: bar.advance())


def _measured_facts(reading: TraceReading) -> dict[str, Any]:
    return {
        "outcome": reading.outcome,
        "period_s": reading.period_s,
        "period_scatter_s": reading.period_scatter_s,
        "periods": reading.periods,
        "level_kPa": {str(k): level / 1e3 for k, level in reading.levels_Pa},
        "phase": {str(k): g.phase for k, g in reading.stages},
        "peak_vacuum_kPa": {str(k): g.peak_Pa / 1e3 for k, g in reading.stages},
        "least_vacuum_kPa": {str(k): g.least_Pa / 1e3 for k, g in reading.stages},
        "rise_s": {str(k): g.rise_s for k, g in reading.stages},
        "inlet_peak_vacuum_kPa": {name: g.peak_Pa / 1e3 for name, g in reading.inlets},
        "supply_vacuum_kPa": None if reading.supply_Pa is None else float(reading.supply_Pa.mean()) / 1e3,
    }


def _match_facts(
    robot: Robot, match: Match, told: tuple[Finding, ...], expected: RingRun, reading: TraceReading
) -> dict[str, Any]:
    return {
        "outcome": match.outcome,
        "expected": {
            "outcome": expected.outcome,
            "period_s": expected.period_s,
            "phase": expected.phase,
            "peak_vacuum_kPa": expected.peak_vacuum_Pa / 1e3,
        },
        "as_built": {
            "stages": [_stage_facts(robot, match, stage) for stage in range(1, robot.ring.stages + 1)],
            "supply_flow_factor": match.built.supply_factor,
            "valve_threshold_factor": match.built.threshold_factor,
        },
        "errors": [
            {
                "name": f.name,
                "value": f.value,
                "standard_error": f.error,
                "decided": f.decided,
                "written": f.stands_out,
                "unit": "m3" if f.kind == "volume" else UNITS[f.kind],
            }
            for f in match.fitted
        ],
        "period_error": {
            "before": _period_error(expected, reading),
            "after": _period_error(match.run, reading),
        },
        "residual_kPa": {"before": match.before_Pa / 1e3, "after": match.residual_Pa / 1e3},
        "diagnosis": [{"where": f.where, "standard_errors": f.errors, "words": f.words} for f in told],
        "cannot_tell": cannot_tell(match, reading),
        "counted_backwards": counted_backwards(expected, reading),
        "as_built_toml": _toml(robot, match),
        "cautions": [ESTIMATES, BENCH],
    }


def _stage_facts(robot: Robot, match: Match, stage: int) -> dict[str, Any]:
    build = match.built.stages[stage - 1]
    return {
        "stage": stage,
        "resistor_conductance_factor": conductance_factor(robot, stage, build),
        "resistor_opening_factor": build.opening_factor,
        "leak_fraction": build.leak_fraction,
        "extra_volume_mL": build.extra_m3 * 1e6,
    }


def _print(robot: Robot, reading: TraceReading, expected: RingRun, match: Match, told: tuple[Finding, ...]) -> None:
    click.echo(
        f"period {reading.period_s:.4g} s measured over {reading.periods} periods (scatter {reading.period_scatter_s * 1e3:.2g} ms), "
        f"{_period_words(expected, reading)} as drawn, {_period_words(match.run, reading)} as fitted"
    )
    headers = ("stage", "phase", "drawn", "peak kPa", "drawn", "rise s", "drawn")
    print_table(headers, [_compared(k, reading, expected) for k, _ in reading.stages])
    click.echo(
        f"\nAs built (gauges followed to {match.residual_Pa / 1e3:.2g} kPa, {match.before_Pa / 1e3:.2g} kPa as drawn, "
        "each compared over its own period: the period's error is not in these):"
    )
    print_table(("number", "value", "± (1 σ)", "unit", "decided", "for the file"), map(_fitted_row, match.fitted))
    click.echo("\nDiagnosis:" if told else f"\n{SOUND}")
    for finding in told:
        click.echo(f"  - {finding.words} ({finding.errors:.0f} standard errors).")
    click.echo("\nSuch traces cannot tell:")
    for words in cannot_tell(match, reading):
        click.echo(f"  - {words}")
    click.echo("\nFor the robot file:\n")
    click.echo(_toml(robot, match))
    click.echo(f"{ESTIMATES}\n{BENCH}")


def _compared(stage: int, reading: TraceReading, expected: RingRun) -> tuple[object, ...]:
    gauge = dict(reading.stages)[stage]
    reference = reading.reference_stage - 1
    drawn = expected.phase[stage - 1] - expected.phase[reference]
    peak, rise = expected.peak_vacuum_Pa[stage - 1], expected.rise_s[stage - 1]
    return (stage, gauge.phase, drawn % 1.0, gauge.peak_Pa / 1e3, peak / 1e3, gauge.rise_s, rise)


def _fitted_row(item: Fitted) -> tuple[object, ...]:
    scale = ML if item.kind == "volume" else 1.0
    kept = "as fitted" if item.stands_out else "as drawn"
    name = item.name.replace("volume", "extra volume")
    return (name, item.value / scale, item.error / scale, UNITS[item.kind], item.decided, kept)


def _toml(robot: Robot, match: Match) -> str:
    """The ring for the robot file: what the traces did not decide is as drawn, and is named in a comment."""
    left = [f.name for f in match.fitted if not f.stands_out]
    note = f"# not decided (within one standard error of the drawing, or unseen), left as drawn: {', '.join(left)}\n"
    return (note if left else "") + as_built_toml(robot, decided_build(match))


def _period_error(run: RingRun, reading: TraceReading) -> float:
    """The model's period over the measured one, less 1."""
    return run.period_s / reading.period_s - 1.0


def _period_words(run: RingRun, reading: TraceReading) -> str:
    if not math.isfinite(run.period_s):
        return "none"
    return f"{run.period_s:.4g} s ({100 * _period_error(run, reading):+.1f} %)"
