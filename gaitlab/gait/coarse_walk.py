"""Coarse walks: many waves at once on a coarse body, for the order of wirings; their lengths are less to be trusted than an engine's."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from gaitlab.body.coarse import CoarseBodies
from gaitlab.body.coarse_frames import Frames
from gaitlab.body.model import body_model
from gaitlab.body.records import BodyModel
from gaitlab.gait.judge import RUBBING_GAP_M, RUBBING_SHARE, TILT_MAX_RAD
from gaitlab.gait.measures import air_kg_per_m, mean_over_periods, steps_per_period
from gaitlab.gait.motion import FloatArray
from gaitlab.gait.outcomes import DIVERGED, DRAGGING, FELL_OVER, WALKED, remedy_of
from gaitlab.gait.records import Walk
from gaitlab.gait.schedule import settle_table, vacuum_table
from gaitlab.gait.summary import unstarted_walk
from gaitlab.gait.walk import OSCILLATES
from gaitlab.ring.waves import RingRun
from gaitlab.robot.records import Robot

ENGINE = "coarse"
# Chosen by us; tests/benchmarks/coarse_settings.py prints how finer and coarser ones rank.
SEGMENTS = 2  # of a bellows at most
STEPS = 64  # in a period
SETTLE_STEPS = 20
PERIODS = 2  # the second is read: the first holds the start
UNSOLVED_SHARE = 0.02  # of the steps; more, and the walk counts as diverged


def coarse_walks(robot: Robot, rings: Sequence[RingRun]) -> list[Walk]:
    """A walk for each ring run, in order: travel, drift and turn of the second period, and what else a root's path tells.

    Measures that need footfalls are nan or empty. A ring that does not run hands on its outcome.
    """
    running = [ring for ring in rings if ring.outcome == OSCILLATES]
    walked = iter(_walked(_coarser(robot), running) if running else ())
    return [next(walked) if ring.outcome == OSCILLATES else unstarted_walk(ring, ENGINE, math.nan) for ring in rings]


def _coarser(robot: Robot) -> Robot:
    """The robot with its bellows cut into fewer segments."""
    bellows = tuple(replace(one, segments=min(SEGMENTS, one.segments)) for one in robot.bellows)
    return replace(robot, bellows=bellows)


@dataclass(frozen=True)
class _Paths:
    """Paths of the roots from the gait's start on: place (T, B, 3), turn (T, B, 3, 3), height of the lowest corner (T, B)."""

    place_m: FloatArray
    turn: FloatArray
    clearance_m: FloatArray
    unsolved: FloatArray


def _walked(robot: Robot, rings: Sequence[RingRun]) -> list[Walk]:
    model, settle_s = body_model(robot), robot.numerics.settle_s
    with np.errstate(over="ignore", invalid="ignore"):  # a copy that runs away is told by its nan
        paths = _paths(model, rings, settle_s)
    return [_read(model, ring, paths, copy, settle_s) for copy, ring in enumerate(rings)]


def _paths(model: BodyModel, rings: Sequence[RingRun], settle_s: float) -> _Paths:
    periods_s = np.array([ring.waves.period_s for ring in rings])
    rows = [[ring.waves.inlets.index(inlet) for inlet in model.inlets] for ring in rings]
    phases = np.arange(1, STEPS + 1) / STEPS
    table = np.array([vacuum_table(ring.waves, phases)[:, row] for ring, row in zip(rings, rows, strict=True)])
    ramp = [
        settle_table(ring.waves, settle_s, settle_s / SETTLE_STEPS, 0.0)[:, row]
        for ring, row in zip(rings, rows, strict=True)
    ]
    bodies = CoarseBodies(model, len(rings))
    for vacuum_Pa in np.swapaxes(np.array(ramp), 0, 1):
        bodies.step(vacuum_Pa, np.full(len(rings), settle_s / SETTLE_STEPS))
    places, turns, clearances = [bodies.place_m.copy()], [bodies.turn.copy()], [clearance(model, bodies.frames())]
    for step in range(PERIODS * STEPS):
        bodies.step(table[:, step % STEPS], periods_s / STEPS)
        places.append(bodies.place_m.copy())
        turns.append(bodies.turn.copy())
        clearances.append(clearance(model, bodies.frames()))
    return _Paths(np.array(places), np.array(turns), np.array(clearances), bodies.unsolved)


def clearance(model: BodyModel, frames: Frames) -> FloatArray:
    """Height (B,) of the lowest corner of any block: z − Σ |R_zj| size_j / 2."""
    boxes = [look for look in model.looks if look.part.kind == "box"]
    links = [look.link for look in boxes]
    half = 0.5 * np.array([look.part.size_m for look in boxes])
    upward = frames.turn[:, links, 2]
    centre = frames.origin_m[:, links, 2] + np.sum(upward * np.array([look.centre_m for look in boxes]), axis=-1)
    return np.asarray(np.min(centre - np.sum(np.abs(upward) * half, axis=-1), axis=1))


def _read(model: BodyModel, ring: RingRun, paths: _Paths, copy: int, settle_s: float) -> Walk:
    place, turn = paths.place_m[:, copy], paths.turn[:, copy]
    outcome = _outcome(turn, paths.clearance_m[:, copy], int(paths.unsolved[copy]))
    period_s = ring.waves.period_s
    walk = replace(
        unstarted_walk(ring, ENGINE, period_s / STEPS),
        outcome=outcome,
        remedy=remedy_of(outcome),
        period_s=period_s,
        simulated_s=settle_s + PERIODS * period_s,
    )
    if outcome != WALKED:
        return walk
    steps = steps_per_period(place, np.arctan2(turn[:, 1, 0], turn[:, 0, 0]), STEPS)
    read = slice(-STEPS - 1, None)
    travel = float(steps.forward_m[-1])
    return replace(
        walk,
        travel_m=travel,
        travels_m=tuple(steps.forward_m.tolist()),
        drift_m=float(steps.left_m[-1]),
        turn_rad=float(steps.turn_rad[-1]),
        body_length_m=model.length_m,
        pitch_rad=mean_over_periods(np.arcsin(np.clip(turn[read, 2, 0], -1.0, 1.0))),
        height_mean_m=mean_over_periods(place[read, 2]),
        height_min_m=float(np.min(place[read, 2])),
        air_kg_per_m=air_kg_per_m(ring.air_kg_per_period, travel),
        warnings=model.warnings,
    )


def _outcome(turn: FloatArray, clearance_m: FloatArray, unsolved: int) -> str:
    if not np.all(np.isfinite(turn)) or unsolved > UNSOLVED_SHARE * (len(turn) - 1):
        return DIVERGED
    if np.min(turn[:, 2, 2]) < math.cos(TILT_MAX_RAD):
        return FELL_OVER
    if np.mean(clearance_m < RUBBING_GAP_M) > RUBBING_SHARE:
        return DRAGGING
    return WALKED
