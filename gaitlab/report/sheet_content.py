"""What the bench sheet says: tubes to cut, order of work, what gauges should show, and what to look at when it fails."""

from __future__ import annotations

import math
from dataclasses import dataclass

from gaitlab.report.pump_plot import L_MIN_ANR
from gaitlab.report.run_folder import SavedRun
from gaitlab.report.words import (
    KPA,
    MM,
    course_text,
    number,
    rechecks_text,
    reversed_text,
    source_text,
    speed_estimate,
    speed_text,
)
from gaitlab.ring.tubing import tube_lengths
from gaitlab.ring.waves import RingRun
from gaitlab.robot.circuit import FixedVacuum, Pump, PumpTable
from gaitlab.robot.records import Robot
from gaitlab.wiring.wiring import OPEN

WIRING_LETTERS = 70  # a longer wiring is left to the table
CUT_STEP_M = 0.001  # tubes are cut to the millimetre


@dataclass(frozen=True)
class TubeRow:
    """One tube: from which source to which inlet, how long, and what a gauge on it shows [Pa], [s]; nan where it rests."""

    source: int | str
    inlet: str
    length_m: float
    phase: float
    delay_s: float
    least_Pa: float
    peak_Pa: float


@dataclass(frozen=True)
class SheetContent:
    """Everything on the sheet, as rows and lines of text."""

    title: str
    subtitle: str
    tubes: tuple[TubeRow, ...]
    open_inlets: tuple[str, ...]
    bore_m: float
    expected: tuple[tuple[str, str], ...]
    orientation: tuple[str, ...]
    assembly: tuple[str, ...]
    faults: tuple[tuple[str, str], ...]


def sheet_content(run: SavedRun) -> SheetContent:
    """The sheet of the best wiring of a run."""
    robot, best = run.robot, run.best
    return SheetContent(
        title=robot.name,
        subtitle=_subtitle(run),
        tubes=tuple(row for row in tube_rows(run) if row.source != OPEN),
        open_inlets=best.wiring.inlets_on(OPEN),
        bore_m=robot.tubes.bore_m,
        expected=_expected(run),
        orientation=_orientation(run),
        assembly=_assembly(run),
        faults=_faults(run),
    )


def _subtitle(run: SavedRun) -> str:
    wiring = run.best.wiring.text()
    about = f"{run.robot_path} · {run.created} · gaitlab {run.version}"
    return f"wiring {wiring} · {about}" if len(wiring) <= WIRING_LETTERS else about


def tube_rows(run: SavedRun) -> tuple[TubeRow, ...]:
    """One row per inlet, outputs first in ring order, then what hangs on atmosphere or supply."""
    lengths = tube_lengths(run.robot)
    rows = [_tube_row(run.ring, inlet, source, lengths[inlet]) for inlet, source in run.best.wiring.pairs]
    return tuple(sorted(rows, key=lambda row: (isinstance(row.source, str), str(row.source).zfill(3), row.inlet)))


def _tube_row(ring: RingRun, inlet: str, source: int | str, length_m: float) -> TubeRow:
    cut = CUT_STEP_M * math.ceil(length_m / CUT_STEP_M - 1e-6)
    if isinstance(source, str):
        level = 0.0 if source == OPEN else ring.supply_mean_Pa
        return TubeRow(source, inlet, cut, math.nan, math.nan, level, level)
    k = source - 1
    phase = float(ring.phase[k])
    least, peak = float(ring.least_vacuum_Pa[k]), float(ring.peak_vacuum_Pa[k])
    return TubeRow(source, inlet, cut, phase, phase * ring.period_s, least, peak)


def _expected(run: SavedRun) -> tuple[tuple[str, str], ...]:
    ring, walk, estimate = run.ring, run.best.walk, speed_estimate(run)
    flow = L_MIN_ANR * ring.air_kg_per_period / ring.period_s
    facts = [
        ("Period", f"{number(ring.period_s, 2)} s ({number(60.0 / ring.period_s, 0)} per minute)"),
        ("Start-up", f"swinging within {number(ring.start_up_s)} s of vacuum on"),
        ("Supply", f"{number(ring.supply_mean_Pa / KPA)} kPa mean, {number(ring.supply_min_Pa / KPA)} kPa least"),
        ("Air drawn", f"{number(flow, 2)} L/min ANR from {_supply_text(run.robot)}"),
        (
            "Travel",
            f"{number(MM * walk.travel_m)} mm per period, ±{number(MM * walk.travel_scatter_m)} between periods",
        ),
        ("Course", course_text(walk)),
        ("Speed", speed_text(estimate)),
    ]
    if estimate is not None:
        facts.append(("Interval", estimate.basis))
        facts += [("Doubt", warning) for warning in estimate.warnings]
    if run.rechecks:
        facts.append(("Rechecks", rechecks_text(run)))
    return tuple(facts)


def _supply_text(robot: Robot) -> str:
    supply = robot.supply
    if isinstance(supply, Pump):
        flow, dead = supply.free_flow_m3_s * 60e3, supply.dead_end_vacuum_Pa / KPA
        return f"a pump of {number(flow)} L/min free, {number(dead, 0)} kPa dead end"
    if isinstance(supply, PumpTable):
        return f"a pump of {number(supply.table_flow_m3_s[0] * 60e3)} L/min free (measured curve)"
    if isinstance(supply, FixedVacuum):
        return f"a vacuum line held at {number(supply.vacuum_Pa / KPA, 0)} kPa"
    return "a syringe"


def _orientation(run: SavedRun) -> tuple[str, ...]:
    stages = run.robot.ring.stages
    order = " → ".join(str(k + 1) for k in range(stages)) if stages <= 9 else f"1 → 2 → … → {stages}"
    lines = [
        f"Mount the ring block so that its stages run {order} → 1 along the arrow on the block; mark output 1. "
        "Counted the other way round, the wave runs backwards.",
        reversed_text(run.best),
    ]
    if run.best.reversed_wiring is not None:
        lines.append(f"Reversed on purpose: {run.best.reversed_wiring.text()}.")
    return tuple(lines)


def _assembly(run: SavedRun) -> tuple[str, ...]:
    """Common practice, no source."""
    ring, robot = run.ring, run.robot
    hold = 0.5 * float(ring.peak_vacuum_Pa.max()) / KPA
    return (
        "Cut all tubes square to the lengths above and label both ends with output and inlet.",
        f"Test every bellows alone: draw to {number(hold, 0)} kPa, clamp; a gauge that falls within 10 s shows a leak.",
        f"Run the bare ring on the supply: all {robot.ring.stages} outputs must swing, faster than {number(ring.period_s, 2)} s "
        "because no bellows hang on it.",
        "Plug in the tubes in the order of the table, ring running; after each one all outputs must still swing.",
        "Put a T-piece with a gauge on each output in turn and fill in the last two columns (a slow dial shows the middle).",
        "Set it on the clean tray, let three periods pass, then time ten periods and measure the way.",
    )


def _faults(run: SavedRun) -> tuple[tuple[str, str], ...]:
    """What to check first, most frequent first: common practice, no source; numbers from this run."""
    ring = run.ring
    low, high = float(ring.least_vacuum_Pa.max()) / KPA, float(ring.peak_vacuum_Pa.min()) / KPA
    return (
        (
            "Nothing swings",
            f"manifold below {number(ring.supply_min_Pa / KPA, 0)} kPa? Look for a leak, a kinked hose, a pump too small.",
        ),
        (
            "One output rests",
            f"its valve or resistor is blocked or leaks: it should pass {number(low, 0)} to {number(high, 0)} kPa.",
        ),
        (
            "Swings, does not get on",
            "block turned end for end or two tubes exchanged: check the table row by row; then feet: clean, dry, equal.",
        ),
        (
            "Period off by over 15 %",
            "slower: leak or narrow resistor; faster: a bellows not connected, or a wider resistor.",
        ),
        (
            "One leg lazy",
            "tube kinked or too long, bellows cracked: swap its tube with a neighbour's and look what moves.",
        ),
        ("Turns or drifts", "compare bends of left and right legs at the same vacuum; check that the tray is level."),
    )


def row_text(row: TubeRow) -> tuple[str, str]:
    """From and to, as the table says it."""
    return source_text(row.source), row.inlet
