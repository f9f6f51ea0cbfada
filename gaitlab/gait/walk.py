"""One walk of one wiring: settle, walk whole periods until the travel has settled, measure."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from gaitlab.body.engine import Engine, EngineSettings, advance
from gaitlab.body.engines import open_engine
from gaitlab.body.model import body_model
from gaitlab.gait.judge import fault_of
from gaitlab.gait.measures import settled, steps_per_period
from gaitlab.gait.motion import FloatArray, Motion
from gaitlab.gait.outcomes import NEVER_SETTLED, WALKED
from gaitlab.gait.recorder import Recorder
from gaitlab.gait.records import Trace, Walk
from gaitlab.gait.schedule import Schedule, gait_table, schedule_of, settle_table
from gaitlab.gait.summary import Run, failed_walk, measured_walk, unstarted_walk
from gaitlab.ring.waves import RingRun, Waves
from gaitlab.robot.records import Numerics, Robot
from gaitlab.wiring.wiring import Wiring, wiring_from_text

OSCILLATES = "oscillates"


def walk(
    robot: Robot,
    wiring: Wiring,
    ring: RingRun,
    *,
    engine: str = "pybullet",
    step_s: float | None = None,
    inertia_factor: float | None = None,
    nudge_m: float = 0.0,
    periods: int | None = None,
    start_phase: float = 0.0,
    trace_hz: float = 0.0,
) -> tuple[Walk, Trace | None]:
    """Walk `robot` with the waves that `ring` puts out under `wiring`; a ring that does not run hands on its outcome.

    With `periods` exactly that many are walked and the travel is that of the last of them (of the settled_periods last, but
    never of the first alone unless it is the only one); without, the walk ends when the travel has settled. `step_s` and
    `inertia_factor` default to the file's, `start_phase` is where in the period the gait starts, `nudge_m` moves the start,
    `trace_hz` above 0 records the motion. Raises InputError for a wiring that does not fit the robot.
    """
    wiring_from_text(wiring.text(), robot.inlets(), robot.ring.stages)
    if ring.outcome != OSCILLATES:
        return unstarted_walk(ring, engine, step_s or robot.numerics.step_s), None
    return walk_waves(
        robot,
        ring.waves,
        air_kg_per_period=ring.air_kg_per_period,
        engine=engine,
        step_s=step_s,
        inertia_factor=inertia_factor,
        nudge_m=nudge_m,
        periods=periods,
        start_phase=start_phase,
        trace_hz=trace_hz,
    )


def walk_waves(
    robot: Robot,
    waves: Waves,
    *,
    air_kg_per_period: float = math.nan,
    engine: str = "pybullet",
    step_s: float | None = None,
    inertia_factor: float | None = None,
    nudge_m: float = 0.0,
    periods: int | None = None,
    start_phase: float = 0.0,
    trace_hz: float = 0.0,
) -> tuple[Walk, Trace | None]:
    """As `walk`, driven by any periodic waves (ideal ones for a first look)."""
    numerics = robot.numerics
    schedule = schedule_of(waves.period_s, step_s or numerics.step_s)
    settings = EngineSettings(schedule.step_s, inertia_factor or numerics.inertia_factor, nudge_m)
    plan = _Plan(numerics, schedule, waves, start_phase, periods)
    body = open_engine(engine, body_model(robot), settings)
    try:
        recorder = Recorder(body, schedule, trace_hz)
        outcome = _run(plan, body, recorder)
        run = Run(body.model, schedule, engine, numerics, start_phase, air_kg_per_period)
        return _result(plan, run, recorder, outcome), recorder.trace(plan.table)
    finally:
        body.close()


@dataclass(frozen=True)
class _Plan:
    numerics: Numerics
    schedule: Schedule
    waves: Waves
    start_phase: float
    periods: int | None

    @property
    def table(self) -> FloatArray:
        return gait_table(self.waves, self.schedule, self.start_phase)

    @property
    def most(self) -> int:
        return self.periods or self.numerics.periods_max

    def window(self, walked: int) -> int:
        """How many of the last periods are read: the first one holds the start, so it counts only where it is alone."""
        return max(1, min(self.numerics.settled_periods, walked - 1))

    def done(self, travels_m: FloatArray) -> bool:
        numerics = self.numerics
        return self.periods is None and settled(
            travels_m[1:], periods=numerics.settled_periods, scatter=numerics.settled_scatter
        )


def _run(plan: _Plan, body: Engine, recorder: Recorder) -> str:
    """Settle, then walk; returns the outcome.

    The order in a period is: steps up to the next sample, sample, and so on; the judging comes after the period's last
    sample, because settling, falling and dragging are told from whole periods and a look costs more than a step.
    """
    fault = advance(body, settle_table(plan.waves, plan.numerics.settle_s, plan.schedule.step_s, plan.start_phase))
    if fault:
        return fault
    recorder.sample()
    chunks = np.split(plan.table, plan.schedule.samples)
    for _ in range(plan.most):
        for chunk in chunks:
            fault = advance(body, chunk)
            if fault:
                return fault
            recorder.sample()
        motion = recorder.motion()
        fault = fault_of(motion.last(1))
        if fault:
            return fault
        if plan.done(_travels(motion)):
            return WALKED
    return WALKED if plan.periods is not None else NEVER_SETTLED


def _travels(motion: Motion) -> FloatArray:
    return steps_per_period(motion.position_m, motion.yaw_rad, motion.samples).forward_m


def _result(plan: _Plan, run: Run, recorder: Recorder, outcome: str) -> Walk:
    motion = recorder.motion()
    if outcome in (WALKED, NEVER_SETTLED):
        return measured_walk(run, motion, plan.window(motion.periods), outcome)
    return failed_walk(run, motion, outcome)
