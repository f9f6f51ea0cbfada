"""Ideal phase sequences of a ring: what a perfect ring would put out, for first looks only.

A solved ring (gaitlab.ring.solve) has unequal loads, sagging supply and sharp edges; these have equal steps and a smooth
raised cosine, and are called ideal wherever they are shown.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from gaitlab.errors import InputError, must
from gaitlab.ring import measures
from gaitlab.ring.waves import FloatArray, RingRun, Waves
from gaitlab.robot.records import Robot
from gaitlab.wiring.wiring import HELD, OPEN, Wiring

SEQUENCES = ("natural", "alternate", "reverse-alternate")
SAMPLES = 512  # per period (chosen by us: an edge of 2 % of a period spans ten of them)


def alternate_order(stages: int) -> tuple[int, ...]:
    """Outputs in time order: the odd ones, then the even ones.

    Stages two apart in an odd ring follow each other after 1/N of a period, so this list read forwards is the smooth wave.

    >>> alternate_order(5)
    (1, 3, 5, 2, 4)
    """
    return (*range(1, stages + 1, 2), *range(2, stages + 1, 2))


def natural_lag(stages: int) -> float:
    """Lag of each stage behind the one before it, as a fraction of a period: π + π/N, that is 1/2 + 1/(2 N).

    >>> natural_lag(5)
    0.6
    """
    return 0.5 + 0.5 / stages


def ideal_phases(sequence: str | Sequence[float], stages: int) -> FloatArray:
    """Phases (N,) in [0, 1) of the outputs behind output 1: a named sequence, or a list of N phases taken as it is.

    natural: each stage lags the one before by π + π/N; alternate: equal steps of 1/N along 1, 3, 5, …, 2, 4, …;
    reverse-alternate: the same list read backwards. For odd N the first two are one and the same wave, described once
    along the ring and once along time. Raises InputError for an unknown name or a list of the wrong length.
    """
    if isinstance(sequence, str):
        return _named_phases(sequence, stages)
    phases = np.asarray(sequence, dtype=float)
    if phases.shape != (stages,) or not np.all(np.isfinite(phases)):
        raise InputError(must("sequence", f"a list of {stages} phases, one for each output", list(sequence)))
    return np.asarray(np.mod(phases, 1.0))


def _named_phases(name: str, stages: int) -> FloatArray:
    if name == "natural":
        return _wrapped(natural_lag(stages) * np.arange(stages, dtype=float))
    if name not in SEQUENCES:
        raise InputError(must("sequence", "one of " + ", ".join(SEQUENCES), name))
    phases = np.empty(stages)
    phases[np.array(alternate_order(stages)) - 1] = np.arange(stages) / stages
    return phases if name == "alternate" else _wrapped(-phases)


def _wrapped(phases: FloatArray) -> FloatArray:
    """Phases in [0, 1), rounded to 12 digits first so that 2.9999999999999996 becomes 0 and not nearly 1."""
    return np.asarray(np.mod(np.round(phases, 12), 1.0))


def raised_cosine(phase: FloatArray, vacuum_Pa: float) -> FloatArray:
    """Vacuum between 0 and `vacuum_Pa` whose rising passage through half swing is at phase 0: (1 + sin 2πφ)/2."""
    return 0.5 * vacuum_Pa * (1.0 + np.sin(2.0 * np.pi * phase))


def ideal_waves(
    robot: Robot,
    wiring: Wiring,
    sequence: str | Sequence[float],
    period_s: float,
    vacuum_Pa: float,
    *,
    samples: int = SAMPLES,
) -> Waves:
    """Ideal waves at the inlets: raised cosines of `vacuum_Pa` [Pa gauge] peak, `period_s` long, phased as `sequence`.

    Open inlets stay at 0, held ones at `vacuum_Pa`. Raises InputError where period or vacuum is not above zero.
    """
    for name, value in (("period_s", period_s), ("vacuum_Pa", vacuum_Pa)):
        if not value > 0:
            raise InputError(must(name, "above 0", value))
    phases = ideal_phases(sequence, robot.ring.stages)
    time = np.arange(samples) / samples
    rows = {OPEN: np.zeros(samples), HELD: np.full(samples, vacuum_Pa)}
    inlets = robot.inlets()
    vacuum = np.array(
        [
            rows[source] if isinstance(source, str) else raised_cosine(time - phases[source - 1], vacuum_Pa)
            for source in (wiring.source(inlet) for inlet in inlets)
        ]
    ).reshape(len(inlets), samples)
    return Waves(period_s=period_s, inlets=inlets, vacuum_Pa=vacuum)


def ideal_run(
    robot: Robot, wiring: Wiring, sequence: str | Sequence[float], period_s: float, vacuum_Pa: float
) -> RingRun:
    """An ideal sequence in the form of a ring's run, its outcome `ideal`: nothing of it was solved."""
    stages = robot.ring.stages
    waves = ideal_waves(robot, wiring, sequence, period_s, vacuum_Pa)
    phase = ideal_phases(sequence, stages)
    output = raised_cosine(np.arange(SAMPLES) / SAMPLES - phase[:, None], vacuum_Pa)
    edge = np.full(stages, period_s * 2.0 * np.arcsin(0.8) / (2.0 * np.pi))  # 10 to 90 % of (1 + sin)/2
    return RingRun(
        outcome="ideal",
        remedy="",
        period_s=period_s,
        phase=np.mod(phase - phase[0], 1.0),
        duty=np.full(stages, 0.5),
        peak_vacuum_Pa=np.full(stages, vacuum_Pa),
        least_vacuum_Pa=np.zeros(stages),
        rise_s=edge,
        fall_s=edge,
        start_up_s=0.0,
        supply_mean_Pa=vacuum_Pa,
        supply_min_Pa=vacuum_Pa,
        air_kg_per_period=float("nan"),
        harmonic=measures.harmonic(np.mod(phase - phase[0], 1.0)),
        output_vacuum_Pa=output,
        supply_vacuum_Pa=np.full(SAMPLES, vacuum_Pa),
        waves=waves,
    )
