"""The ring of a robot under one wiring: solved by its load pattern, then counted as the robot counts."""

from __future__ import annotations

from collections.abc import MutableMapping
from dataclasses import replace

import numpy as np
from scipy.interpolate import CubicSpline

from gaitlab.ring.circuit import Circuit, circuit_of_pattern
from gaitlab.ring.levels import margins
from gaitlab.ring.pattern import LoadPattern, Placement, placed_pattern
from gaitlab.ring.periodic import Settings, Settled, nudged, settled
from gaitlab.ring.reading import oscillating_run, resting_run
from gaitlab.ring.stroke import StrokeRun, stroke_run
from gaitlab.ring.verdict import (
    BEATEN,
    REMEDIES,
    SHORT_STROKE,
    beaten_stage,
    rest_outcome,
    run_outcome,
    travelling_edges,
)
from gaitlab.ring.waves import FloatArray, RingRun, Waves
from gaitlab.robot.circuit import Syringe
from gaitlab.robot.records import Robot
from gaitlab.wiring.wiring import HELD, OPEN, Source, Wiring

START_NUDGE = 1e-2  # full swings: how unequal the outputs are at the start; real stages differ by more
BEATEN_STAGE = "beaten_stage"  # among the details: the stage, from 1, whose valve does not beat its resistor
CYCLES_LEAST = 3  # periods that a stroke must hold for its middle one to be called an oscillation (chosen by us)


def ring_run(
    robot: Robot,
    wiring: Wiring,
    *,
    runs: MutableMapping[str, RingRun] | None = None,
    settings: Settings = Settings(),
) -> RingRun:
    """What the robot's ring does under this wiring, started from rest at atmosphere.

    Wirings of one load pattern share one solve, so their waves are the same bytes. `runs` keeps solves by
    `LoadPattern.key()`: any mapping, such as a dict or `gaitlab.ring.store.RunStore`.
    """
    pattern, placement = placed_pattern(robot, wiring)
    key = pattern.key()
    run = runs.get(key) if runs is not None else None
    if run is None:
        run = pattern_run(pattern, settings=settings)
        if runs is not None:
            runs[key] = run
    return placed(run, placement, robot, wiring)


def pattern_run(pattern: LoadPattern, *, settings: Settings = Settings()) -> RingRun:
    """The run of a load pattern from rest, counted as the pattern counts; its waves are named output/place."""
    circuit = circuit_of_pattern(pattern)
    start = nudged(circuit, circuit.rest(), START_NUDGE)
    if isinstance(pattern.supply, Syringe):
        return stroke_record(circuit, stroke_run(circuit, start))
    return run_from(circuit, start, settings=settings)


def run_from(circuit: Circuit, start: FloatArray, *, settings: Settings = Settings()) -> RingRun:
    """The run of a circuit from any state, counted as the circuit counts."""
    followed = settled(circuit, start, settings)
    if followed.cycle is None:
        outcome, remedy = rest_outcome(circuit, followed, settings)
        run = resting_run(circuit, followed, outcome=outcome, remedy=remedy)
        return replace(run, harmonic=_edges(circuit, followed), details=_blame(circuit, followed, remedy))
    run = oscillating_run(circuit, followed, followed.cycle)
    outcome, remedy = run_outcome(circuit, run)
    return replace(run, outcome=outcome, remedy=remedy, details=margins(circuit.valves, run))


def _edges(circuit: Circuit, followed: Settled) -> int:
    return travelling_edges(circuit, followed.end) if followed.kind == "wandering" else 0


def _blame(circuit: Circuit, followed: Settled, remedy: str) -> tuple[tuple[str, float], ...]:
    """The stage that a remedy speaks of, counted from 1."""
    stage = beaten_stage(circuit, followed) if remedy == BEATEN else None
    return () if stage is None else ((BEATEN_STAGE, stage + 1.0),)


def stroke_record(circuit: Circuit, stroke: StrokeRun) -> RingRun:
    """A syringe's run as one period, that in the middle of the stroke, with the whole stroke's figures in `details`."""
    whole = Settled("periodic" if stroke.cycles else "rest", stroke.cuts_s, stroke.end)
    if len(stroke.cycles) < CYCLES_LEAST:
        return resting_run(circuit, whole, outcome=SHORT_STROKE, remedy=REMEDIES[SHORT_STROKE])
    middle = stroke.cycles[len(stroke.cycles) // 2]
    run = oscillating_run(circuit, whole, middle)
    outcome, remedy = run_outcome(circuit, run)
    details = (
        ("periods_per_stroke", stroke.periods_per_stroke),
        ("dies_at_s", stroke.cuts_s[-1]),
        ("dies_at_supply_Pa", stroke.supply_Pa[-1]),
    )
    return replace(
        run, outcome=outcome, remedy=remedy, start_up_s=stroke.cuts_s[0], details=details + margins(circuit.valves, run)
    )


def placed(run: RingRun, placement: Placement, robot: Robot, wiring: Wiring) -> RingRun:
    """A pattern's run counted as the robot counts: stages turned back, time from the robot's output 1, inlets by name."""
    turn, stages = placement.turn, len(run.phase)
    first = (-turn) % stages
    shift = float(run.phase[first]) if np.isfinite(run.period_s) else 0.0
    output, supply, bellows = (
        _shifted(w, shift) for w in (run.output_vacuum_Pa, run.supply_vacuum_Pa, run.waves.vacuum_Pa)
    )
    turned = {
        name: np.roll(getattr(run, name), turn)
        for name in ("duty", "peak_vacuum_Pa", "least_vacuum_Pa", "rise_s", "fall_s")
    }
    return replace(
        run,
        **turned,
        phase=_phases_from(np.roll(run.phase, turn)),
        output_vacuum_Pa=np.roll(output, turn, axis=0),
        supply_vacuum_Pa=supply,
        waves=_inlet_waves(run, bellows, placement, robot, wiring),
        details=tuple((name, _counted(name, value, turn, stages)) for name, value in run.details),
    )


def _counted(name: str, value: float, turn: int, stages: int) -> float:
    """A detail as the robot counts: stage numbers are turned, everything else is left."""
    return (value - 1.0 + turn) % stages + 1.0 if name == BEATEN_STAGE else value


def _inlet_waves(run: RingRun, bellows: FloatArray, placement: Placement, robot: Robot, wiring: Wiring) -> Waves:
    """One row for each of the robot's inlets: a bellows' wave, nothing if open, the mean supply vacuum if held."""
    names = [name for on_output in placement.inlets for name in on_output]
    row = dict(zip(names, bellows, strict=True))
    constant: dict[Source, float] = {OPEN: 0.0, HELD: run.supply_mean_Pa}
    samples = run.output_vacuum_Pa.shape[1]
    inlets = robot.inlets()
    rows = [row[inlet] if inlet in row else np.full(samples, constant[wiring.source(inlet)]) for inlet in inlets]
    return Waves(run.period_s, inlets, np.array(rows).reshape(len(inlets), samples))


def _phases_from(phase: FloatArray) -> FloatArray:
    lag = np.mod(phase - phase[0], 1.0)
    return np.where(lag > 1.0 - 1e-12, 0.0, lag)


def _shifted(waves: FloatArray, shift: float) -> FloatArray:
    """Periodic waves (…, K) begun `shift` of a period later, by a periodic cubic spline; the very same array if shift is 0."""
    samples = waves.shape[-1]
    if shift == 0.0 or samples == 1 or waves.size == 0:
        return waves
    knots = np.arange(samples + 1) / samples
    closed = np.concatenate((waves, waves[..., :1]), axis=-1)
    spline = CubicSpline(knots, closed, axis=-1, bc_type="periodic")
    return np.asarray(spline(np.mod(knots[:-1] + shift, 1.0)))
