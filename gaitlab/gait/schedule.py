"""When what pressure: a period cut into whole steps and samples, its table of vacuum, and the ramp that settles the robot."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from scipy.interpolate import CubicSpline

from gaitlab.errors import InputError, must
from gaitlab.gait.motion import FloatArray
from gaitlab.ring.waves import Waves

# The body is looked at this often: duty factors and stances are told to about 1 % of a usual period, and what a walk
# with its measures costs over bare steps is printed by tests/benchmarks/body_speed.py (chosen by us).
SAMPLE_S = 0.008
SAMPLES_MIN = 20  # per period; fewer cannot tell a duty factor to 5 % (chosen by us)
RAMP_SHARE = 0.6  # of the settling time goes into the ramp, the rest lets the body come to rest (chosen by us)


@dataclass(frozen=True)
class Schedule:
    """One period as `samples` × `steps_per_sample` steps of `step_s`.

    The step is the asked one made shorter, by under one sample in a period, so that a period is a whole number of steps:
    one table of pressures then serves every period exactly and no phase error builds up.
    """

    period_s: float
    step_s: float
    samples: int
    steps_per_sample: int

    @property
    def steps(self) -> int:
        """Steps in a period."""
        return self.samples * self.steps_per_sample

    @property
    def sample_s(self) -> float:
        """Time between two looks at the body."""
        return self.step_s * self.steps_per_sample


def schedule_of(period_s: float, step_s: float) -> Schedule:
    """The period cut into samples of about `SAMPLE_S` and steps of at most `step_s`.

    Raises InputError where a period has no room for `SAMPLES_MIN` steps.
    """
    if not (math.isfinite(period_s) and period_s >= SAMPLES_MIN * step_s):
        rule = f"at least {SAMPLES_MIN} steps of {step_s * 1e3:g} ms"
        raise InputError(must("period", rule, f"{period_s * 1e3:g} ms", "shorten step_ms"))
    per_sample = min(max(1, round(SAMPLE_S / step_s)), max(1, math.floor(period_s / (SAMPLES_MIN * step_s))))
    samples = math.ceil(period_s / (per_sample * step_s) - 1e-9)
    return Schedule(period_s, period_s / (samples * per_sample), samples, per_sample)


def vacuum_table(waves: Waves, phases: FloatArray) -> FloatArray:
    """Vacuum of every inlet at these phases, (phases, inlets), by a periodic cubic through the wave's points.

    Not below zero: where a wave touches atmosphere the cubic's ripple is cut off.
    """
    count = waves.vacuum_Pa.shape[1]
    if count < 4:
        return np.repeat(waves.vacuum_Pa[:, :1].T, len(phases), axis=0)
    closed = np.concatenate([waves.vacuum_Pa, waves.vacuum_Pa[:, :1]], axis=1)
    spline = CubicSpline(np.arange(count + 1) / count, closed, axis=1, bc_type="periodic")
    return np.ascontiguousarray(np.maximum(spline(np.mod(phases, 1.0)), 0.0).T)


def gait_table(waves: Waves, schedule: Schedule, start_phase: float) -> FloatArray:
    """Vacuum at the middle of every step of one period, (steps, inlets), from `start_phase` on."""
    phases = start_phase + (np.arange(schedule.steps) + 0.5) / schedule.steps
    return vacuum_table(waves, phases)


def settle_table(waves: Waves, settle_s: float, step_s: float, start_phase: float) -> FloatArray:
    """Vacuum while the robot settles, (steps, inlets): a smooth ramp from rest to the wave's value at `start_phase`, then held.

    The ramp is 10 s³ − 15 s⁴ + 6 s⁵ (no jump in speed or acceleration at its ends).
    """
    steps = round(settle_s / step_s)
    s = np.minimum((np.arange(steps) + 1.0) / max(1.0, RAMP_SHARE * steps), 1.0)
    ramp = s**3 * (10.0 - 15.0 * s + 6.0 * s**2)
    table: FloatArray = ramp[:, None] * vacuum_table(waves, np.array([start_phase]))
    return table
