"""From recorded motion to the record of a walk: which measure is read over which periods."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from gaitlab.body.dynamics import link_origins
from gaitlab.body.records import BodyModel
from gaitlab.gait import measures
from gaitlab.gait.footfalls import duty_factors, folded, stance_intervals, swing_phases
from gaitlab.gait.motion import FloatArray, Motion
from gaitlab.gait.outcomes import remedy_of
from gaitlab.gait.records import Walk, WaveReading
from gaitlab.gait.schedule import Schedule
from gaitlab.gait.stability import projected, smallest_margin, stability_margins
from gaitlab.gait.wave_reading import wave_reading
from gaitlab.ring.waves import RingRun
from gaitlab.robot.records import Numerics

NAN = math.nan
NO_WAVE = WaveReading("none", NAN, 0.0)


@dataclass(frozen=True)
class Run:
    """What a walk was run with."""

    model: BodyModel
    schedule: Schedule
    engine: str
    numerics: Numerics
    start_phase: float
    air_kg_per_period: float

    def simulated_s(self, motion: Motion) -> float:
        """Simulated time, settling included."""
        return self.numerics.settle_s + motion.periods * self.schedule.period_s


def measured_walk(run: Run, motion: Motion, window: int, outcome: str) -> Walk:
    """The walk with all measures read over the last `window` periods of the motion."""
    every = measures.steps_per_period(motion.position_m, motion.yaw_rad, motion.samples)
    read = motion.last(window)
    travel = float(np.mean(every.forward_m[-window:]))
    names = [foot.name for foot in run.model.feet]
    return Walk(
        outcome=outcome,
        remedy=remedy_of(outcome),
        engine=run.engine,
        step_s=run.schedule.step_s,
        period_s=run.schedule.period_s,
        travel_m=travel,
        travel_scatter_m=float(np.std(every.forward_m[-window:], ddof=1)) if window > 1 else NAN,
        travels_m=tuple(every.forward_m.tolist()),
        drift_m=float(np.mean(every.left_m[-window:])),
        turn_rad=float(np.mean(every.turn_rad[-window:])),
        slip=measures.slip(read.sole_m_s, read.loaded, read.sample_s, travel * window),
        duty_factor=tuple(zip(names, duty_factors(read.loaded).tolist(), strict=True)),
        stance=_stances(run, read),
        wave=_wave(run.model, read, run.start_phase),
        body_length_m=run.model.length_m,
        pitch_rad=measures.mean_over_periods(read.pitch_rad),
        height_mean_m=measures.mean_over_periods(read.position_m[:, 2]),
        height_min_m=float(np.min(read.position_m[:, 2])),
        stability_margin_m=_margin(run.model, read),
        air_kg_per_m=measures.air_kg_per_m(run.air_kg_per_period, travel),
        simulated_s=run.simulated_s(motion),
        warnings=run.model.warnings,
    )


def _stances(run: Run, read: Motion) -> tuple[tuple[str, tuple[tuple[float, float], ...]], ...]:
    share = folded(read.loaded, read.samples)
    return tuple(
        (foot.name, stance_intervals(share[:, index], start_phase=run.start_phase))
        for index, foot in enumerate(run.model.feet)
    )


def _wave(model: BodyModel, read: Motion, start_phase: float) -> WaveReading:
    velocity = np.gradient(read.foot_m[..., :2], read.sample_s, axis=0)
    cos, sin = np.cos(read.yaw_rad)[:, None], np.sin(read.yaw_rad)[:, None]
    along = velocity[..., 0] * cos + velocity[..., 1] * sin
    across = velocity[..., 1] * cos - velocity[..., 0] * sin
    phase, mark = swing_phases(read.loaded, np.stack([along, across], axis=-1), read.samples)
    places = feet_at_rest(model)
    return wave_reading(phase + start_phase, mark, places[:, 0], np.sign(np.round(places[:, 1], 6)))


def feet_at_rest(model: BodyModel) -> FloatArray:
    """Middles (F, 3) of the feet in the root's frame with all joints at zero."""
    origins = link_origins(model)
    return np.array([origins[foot.link] + np.mean(foot.centres_m, axis=0) for foot in model.feet])


def _margin(model: BodyModel, read: Motion) -> float:
    plumb = projected(read.centre_m, model.slope_rad)
    contacts, standing = read.contact_m[read.look_at], read.contact_loaded[read.look_at]
    return smallest_margin(stability_margins(contacts, standing, plumb))


def failed_walk(run: Run, motion: Motion, outcome: str) -> Walk:
    """The walk that ended early: its name and remedy, the travels so far, nothing else."""
    every = measures.steps_per_period(motion.position_m, motion.yaw_rad, motion.samples)
    return _blank(
        outcome,
        remedy_of(outcome),
        engine=run.engine,
        step_s=run.schedule.step_s,
        period_s=run.schedule.period_s,
        travels_m=tuple(every.forward_m.tolist()),
        body_length_m=run.model.length_m,
        simulated_s=run.simulated_s(motion),
        warnings=run.model.warnings,
    )


def unstarted_walk(ring: RingRun, engine: str, step_s: float) -> Walk:
    """A walk that never began because the ring does not run: it carries the ring's outcome and remedy."""
    return _blank(ring.outcome, ring.remedy, engine=engine, step_s=step_s, period_s=ring.period_s)


def _blank(
    outcome: str,
    remedy: str,
    *,
    engine: str,
    step_s: float,
    period_s: float,
    travels_m: tuple[float, ...] = (),
    body_length_m: float = NAN,
    simulated_s: float = 0.0,
    warnings: tuple[str, ...] = (),
) -> Walk:
    return Walk(
        outcome=outcome,
        remedy=remedy,
        engine=engine,
        step_s=step_s,
        period_s=period_s,
        travel_m=NAN,
        travel_scatter_m=NAN,
        travels_m=travels_m,
        drift_m=NAN,
        turn_rad=NAN,
        slip=NAN,
        duty_factor=(),
        stance=(),
        wave=NO_WAVE,
        body_length_m=body_length_m,
        pitch_rad=NAN,
        height_mean_m=NAN,
        height_min_m=NAN,
        stability_margin_m=NAN,
        air_kg_per_m=NAN,
        simulated_s=simulated_s,
        warnings=warnings,
    )
