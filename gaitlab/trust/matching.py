"""As-built parts of a ring from its measured waveforms: least squares through the ring's own model.

Unknown are, for each measured stage, the opening of its resistor, a leak at its output and extra volume there, and for all
together the supply's flow and the valves' threshold. Each is held near the file's value by a prior, so that what the data
do not decide stays where the drawing has it, and is reported as undecided.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.optimize import least_squares

from gaitlab.ring.measures import crossings
from gaitlab.ring.periodic import Settings
from gaitlab.ring.solve import ring_run
from gaitlab.ring.waves import RingRun
from gaitlab.robot.circuit import Syringe
from gaitlab.robot.records import Robot
from gaitlab.trust.as_built import AsBuilt, StageBuild, built_robot, stage_parts
from gaitlab.trust.trace_reading import PHASES, TraceReading, middle_and_swing
from gaitlab.wiring.wiring import Wiring

FloatArray = NDArray[np.float64]
Solve = Callable[[Robot, Wiring], RingRun]

OSCILLATES = "oscillates"
GAUGE_PA = (
    300.0  # what an averaged trace is trusted to; chosen by us: a digital gauge of class 0.25, zeroed before the test
)
PERIOD_SHARE = 0.005  # what a measured period is trusted to; chosen by us
SILENT_PERIOD = 20.0  # residual of the period where the model's ring stands still: worse than any running one
ROUNDS_MAX = 10  # trust-region rounds; chosen by us
REST = 10.0  # fitted numbers are priors' widths counted from here, so that a relative step is an even one
DIFFERENCE = 0.01  # relative: a tenth of a prior's width, far above the 0.1 % a period is solved to
UNDECIDED = 0.7  # an error above this share of the prior's width says that the data added nothing; chosen by us


@dataclass(frozen=True)
class Unknown:
    """One fitted number: `kind` (opening, leak, volume, supply, threshold), its stage or 0, its prior's standard deviation."""

    kind: str
    stage: int
    prior: float

    @property
    def name(self) -> str:
        """For people: ``opening of stage 3``."""
        return f"{self.kind} of stage {self.stage}" if self.stage else self.kind


# Priors (standard deviations) chosen by us: ln opening 0.1 (flow ±25 %), leak ln(1 + leak/0.01) 1, volume as a share of a
# bellows' worth of gas 0.2, ln supply flow 0.2, ln threshold 0.15.
PRIORS = {"opening": 0.10, "leak": 1.0, "volume": 0.2, "supply flow": 0.2, "valve threshold": 0.15}
FACTORS = ("opening", "supply flow", "valve threshold")  # kinds that are 1 as drawn; the others are 0
LEAK_SCALE = 0.01
QUICK = Settings(loose=2e-3, tight=1e-3, near=2e-2, closed=5e-4)  # chosen by us, see quick_ring


@dataclass(frozen=True)
class Fitted:
    """One fitted number with its standard error: factors on opening, supply flow and threshold; leak as a fraction of the
    open valve; volume [m³]. `decided` is False where the data added nothing to the prior."""

    kind: str
    stage: int
    value: float
    error: float
    decided: bool

    @property
    def name(self) -> str:
        """For people: ``opening of stage 3``."""
        return f"{self.kind} of stage {self.stage}" if self.stage else self.kind

    @property
    def away(self) -> float:
        """How far the value is from the drawing."""
        return self.value - (1.0 if self.kind in FACTORS else 0.0)

    @property
    def stands_out(self) -> bool:
        """Whether the traces decided it and it is at least one standard error from the drawing: worth writing down."""
        return self.decided and abs(self.away) >= self.error


@dataclass(frozen=True)
class Match:
    """The fit: the ring as built, each fitted number, and which of them are confounded.

    `residual_Pa` is the root mean square of model less measurement over all gauges, `before_Pa` the same for the file's
    robot. Both compare shapes, each over its own period: an error of the period is not in them. `confounded` are pairs
    whose errors go together (correlation at least 0.9 either way). `outcome` is matched, or poor_fit where the model
    cannot follow the gauges.
    """

    outcome: str
    built: AsBuilt
    run: RingRun
    fitted: tuple[Fitted, ...]
    residual_Pa: float
    before_Pa: float
    confounded: tuple[tuple[str, str, float], ...]
    solves: int


def quick_ring(robot: Robot, wiring: Wiring) -> RingRun:
    """The ring solved as closely as a fit to gauges needs: the period to 0.1 %."""
    return ring_run(robot, wiring, settings=QUICK)


def matched(
    robot: Robot,
    wiring: Wiring,
    reading: TraceReading,
    *,
    solve: Solve = quick_ring,
    tell: Callable[[int], None] = lambda n: None,
) -> Match:
    """Fit the as-built ring to a reading that oscillates; `tell` is called with the number of ring solutions so far."""
    unknowns = unknowns_of(robot, reading)
    target = _Target(robot, wiring, reading, unknowns, solve, tell)
    start = np.array([REST + (0.1 if u.kind == "leak" else 0.0) for u in unknowns])
    low = np.array([REST if u.kind == "leak" else REST - 4 for u in unknowns])
    before = target.data_residuals(np.full(len(unknowns), REST))
    fit = least_squares(target.residuals, start, bounds=(low, REST + 4), diff_step=DIFFERENCE, max_nfev=ROUNDS_MAX)
    after = target.data_residuals(fit.x)
    covariance = np.linalg.pinv(fit.jac.T @ fit.jac)
    errors = np.sqrt(np.diag(covariance))
    return Match(
        outcome="matched" if _rms(after) <= 2 * GAUGE_PA else "poor_fit",
        built=built_from(robot, unknowns, fit.x - REST),
        run=target.run(fit.x),
        fitted=_fitted(robot, unknowns, fit.x - REST, errors),
        residual_Pa=_rms(after),
        before_Pa=_rms(before),
        confounded=_confounded(unknowns, covariance),
        solves=target.solves,
    )


def unknowns_of(robot: Robot, reading: TraceReading) -> tuple[Unknown, ...]:
    """What the measured gauges could tell: three numbers per measured stage, the supply's and the valves'."""
    found = [Unknown(kind, k, PRIORS[kind]) for k, _ in reading.stages for kind in ("opening", "leak", "volume")]
    shared = ["valve threshold"] if isinstance(robot.supply, Syringe) else ["supply flow", "valve threshold"]
    return (*found, *(Unknown(kind, 0, PRIORS[kind]) for kind in shared))


def decided_build(match: Match) -> AsBuilt:
    """The fitted ring with every number that does not stand out put back to the drawing."""
    out = {(f.kind, f.stage) for f in match.fitted if f.stands_out}
    stages = tuple(
        StageBuild(
            build.opening_factor if ("opening", k) in out else 1.0,
            build.leak_fraction if ("leak", k) in out else 0.0,
            build.extra_m3 if ("volume", k) in out else 0.0,
        )
        for k, build in enumerate(match.built.stages, start=1)
    )
    supply = match.built.supply_factor if ("supply flow", 0) in out else 1.0
    return AsBuilt(stages, supply, match.built.threshold_factor if ("valve threshold", 0) in out else 1.0)


def built_from(robot: Robot, unknowns: Sequence[Unknown], x: FloatArray) -> AsBuilt:
    """The ring as built at fitted numbers `x`, in priors' widths from the file's values."""
    value = {(u.kind, u.stage): float(v) * u.prior for u, v in zip(unknowns, x, strict=True)}
    gas_m3 = typical_volume_m3(robot)
    stages = tuple(
        StageBuild(
            opening_factor=math.exp(value.get(("opening", k), 0.0)),
            leak_fraction=LEAK_SCALE * math.expm1(value.get(("leak", k), 0.0)),
            extra_m3=max(gas_m3 * value.get(("volume", k), 0.0), -0.95 * stage_parts(robot, k)[2]),
        )
        for k in range(1, robot.ring.stages + 1)
    )
    factors = (math.exp(value.get((kind, 0), 0.0)) for kind in ("supply flow", "valve threshold"))
    return AsBuilt(stages, *factors)


def _fitted(robot: Robot, unknowns: Sequence[Unknown], x: FloatArray, errors: FloatArray) -> tuple[Fitted, ...]:
    built = built_from(robot, unknowns, x)
    found = []
    for unknown, error in zip(unknowns, errors, strict=True):
        value, scale = _physical(robot, built, unknown)
        found.append(
            Fitted(unknown.kind, unknown.stage, value, scale * unknown.prior * float(error), error <= UNDECIDED)
        )
    return tuple(found)


def _physical(robot: Robot, built: AsBuilt, unknown: Unknown) -> tuple[float, float]:
    """The value in its own unit, and that unit per unit of the fitted number."""
    if unknown.kind == "supply flow":
        return built.supply_factor, built.supply_factor
    if unknown.kind == "valve threshold":
        return built.threshold_factor, built.threshold_factor
    stage = built.stages[unknown.stage - 1]
    return {
        "opening": (stage.opening_factor, stage.opening_factor),
        "leak": (stage.leak_fraction, LEAK_SCALE + stage.leak_fraction),
        "volume": (stage.extra_m3, typical_volume_m3(robot)),
    }[unknown.kind]


def typical_volume_m3(robot: Robot) -> float:
    """The gas a stage moves: port and one mean bellows at rest. Extra volumes are measured by it."""
    mean = sum(b.rest_volume_m3 for b in robot.bellows) / max(1, len(robot.bellows))
    return robot.ring.port_m3 + mean


class _Target:
    """Residuals of one robot, wiring and reading; remembers the last solution so that a point is solved once."""

    def __init__(
        self,
        robot: Robot,
        wiring: Wiring,
        reading: TraceReading,
        unknowns: tuple[Unknown, ...],
        solve: Solve,
        tell: Callable[[int], None],
    ) -> None:
        self._robot, self._wiring, self._reading, self._unknowns = robot, wiring, reading, unknowns
        self._solve, self._tell = solve, tell
        self._last: tuple[bytes, RingRun] | None = None
        self.solves = 0

    def run(self, x: FloatArray) -> RingRun:
        """The model's ring at `x`."""
        if self._last is None or self._last[0] != x.tobytes():
            self.solves += 1
            self._tell(self.solves)
            robot = built_robot(self._robot, built_from(self._robot, self._unknowns, x - REST))
            self._last = (x.tobytes(), self._solve(robot, self._wiring))
        return self._last[1]

    def data_residuals(self, x: FloatArray) -> FloatArray:
        """Model less measurement at every phase of every gauge [Pa]."""
        pairs = gauge_pairs(self.run(x), self._reading)
        return np.concatenate([model - measured for model, measured in pairs])

    def residuals(self, x: FloatArray) -> FloatArray:
        """Weighted residuals: gauges, period, priors."""
        run = self.run(x)
        waves = self.data_residuals(x) / GAUGE_PA / math.sqrt(PHASES / 8)  # eight independent points to a period
        period = SILENT_PERIOD
        if run.outcome == OSCILLATES:
            period = math.log(run.period_s / self._reading.period_s) / PERIOD_SHARE
            period = max(-SILENT_PERIOD, min(SILENT_PERIOD, period))
        return np.concatenate([waves, [period], x - REST])


def gauge_pairs(run: RingRun, reading: TraceReading) -> list[tuple[FloatArray, FloatArray]]:
    """(model, measured) of every gauge at PHASES phases from the reference stage's edge on [Pa].

    Gauges at bellows are left out: what happens behind a port must not be blamed on the ring (`diagnosis` compares them).
    """
    shift = _reference_edge(run, reading.reference_stage)
    pairs = [(_resampled(run.output_vacuum_Pa[k - 1], shift), g.vacuum_Pa) for k, g in reading.stages]
    if reading.supply_Pa is not None:
        pairs.append((_resampled(np.atleast_1d(run.supply_vacuum_Pa), shift), reading.supply_Pa))
    return pairs


def _reference_edge(run: RingRun, stage: int) -> float:
    wave = run.output_vacuum_Pa[stage - 1]
    if run.outcome != OSCILLATES or len(wave) < 4:
        return 0.0
    up, _ = crossings(wave, middle_and_swing(wave)[0])
    return float(up[0]) if len(up) else 0.0


def _resampled(wave: FloatArray, shift: float) -> FloatArray:
    count = len(wave)
    phases = (np.arange(PHASES) / PHASES + shift) * count
    return np.asarray(np.interp(phases, np.arange(2 * count + 1), np.resize(wave, 2 * count + 1)))


def _rms(values: FloatArray) -> float:
    return float(np.sqrt(np.mean(values**2)))


def _confounded(unknowns: Sequence[Unknown], covariance: FloatArray) -> tuple[tuple[str, str, float], ...]:
    scale = np.sqrt(np.maximum(np.diag(covariance), 1e-300))
    correlation = covariance / np.outer(scale, scale)
    pairs = [
        (unknowns[i].name, unknowns[j].name, float(correlation[i, j]))
        for i in range(len(unknowns))
        for j in range(i)
        if abs(correlation[i, j]) >= 0.9
    ]
    return tuple(sorted(pairs, key=lambda p: -abs(p[2])))
