"""Following a ring from some state until it repeats itself, rests, or does neither.

A run is cut where output 1's vacuum rises through the middle of its last swing. Two cuts in a row at the same state
make a period. The way there is followed loosely (only its end matters), the last periods tightly.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from gaitlab.ring.circuit import Circuit
from gaitlab.ring.rosenbrock import Step, steps
from gaitlab.ring.waves import FloatArray

RENEWALS_MAX = 6  # times that a run without cuts is given a new level and double the time
BISECTIONS = 40  # of a step: finds a cut to 1e-12 of it
OFF_MIDDLE = 0.2  # of a swing that the level may be off its middle: moving it makes cuts hard to compare
# A manifold whose change from cut to cut shrinks by a steady ratio in this range is moved ahead, if the change is at least
# SLOW_LEAST full swings; the clock is moved by the periods after which SLOW_LEFT full swings are left. All chosen by us.
SLOW_FROM, SLOW_TO, SLOW_STEADY = 0.6, 0.995, 0.05
SLOW_LEAST, SLOW_LEFT = 2e-3, 5e-3
TIGHTEST = 1e-8  # error of a step, in full swings, below which rounding takes over
STILL = 1e-6  # full swings per characteristic time that count as standing still
KICKS_MAX, KICK = 3, 1e-2  # how often, and by how many full swings, a ring balanced on a ridge is moved off it


@dataclass(frozen=True)
class Settings:
    """Numerical settings of a run, as fractions of a full swing.

    `loose` and `tight` bound the error of one step on the way and in the periods that are kept; `near` and `closed` say how
    well two cuts must agree to turn from one to the other and to stop. All chosen by us: halving `tight` and `closed`
    moves the period of the demo robots by less than 1e-4 (tests/ring/test_accuracy.py).
    """

    loose: float = 5e-3
    tight: float = 2e-4
    near: float = 1e-2
    closed: float = 2e-4
    cuts_max: int = 40


@dataclass(frozen=True)
class Cycle:
    """One closed period: where it was cut (time and state), its length and its steps; `gap` is how far it is from closing."""

    start_s: float
    period_s: float
    steps: tuple[Step, ...]
    gap: float

    def states(self, phase: FloatArray) -> FloatArray:
        """States (K, unknowns) at phases [0, 1) from the cut, with the gap spread evenly over the period."""
        starts = np.array([step.start_s for step in self.steps])
        time = self.start_s + np.mod(phase, 1.0) * self.period_s
        index = np.clip(np.searchsorted(starts, time, side="right") - 1, 0, len(self.steps) - 1)
        lengths = np.array([step.length_s for step in self.steps])
        theta = ((time - starts[index]) / lengths[index])[:, None]
        before, after, third, fourth = (
            np.array([getattr(step, name) for step in self.steps])[index]
            for name in ("before", "after", "third", "fourth")
        )
        rest = 1.0 - theta
        values = before * rest + theta * (after + rest * (third + theta * fourth))
        return np.asarray(values - np.mod(phase, 1.0)[:, None] * self.jump())

    def jump(self) -> FloatArray:
        """What each unknown has changed by over the period; next to nothing where it closes."""
        first, last = self.steps[0], self.steps[-1]
        begin = first.state((self.start_s - first.start_s) / first.length_s)
        end = last.state((self.start_s + self.period_s - last.start_s) / last.length_s)
        return end - begin


@dataclass(frozen=True)
class Settled:
    """How a run ended: `periodic` with its cycle, `rest` at a stable state, or `wandering`; and when it passed each cut."""

    kind: str
    cuts_s: tuple[float, ...]
    end: FloatArray
    cycle: Cycle | None = None


def characteristic_time(circuit: Circuit) -> float:
    """Time [s] for one resistor to evacuate its own output by a quarter of the supply's vacuum (mean over stages)."""
    net, n = circuit.network, circuit.network.stages
    ambient, low = circuit.gas.pressure_Pa, circuit.manifold.dead_end_Pa
    state = circuit.state(ambient, low, 0.0)
    into = -net.rates(state)[:n] * net.volume_m3
    volume = net.volume_m3 + np.bincount(net.fed_by, [law.rest_m3 for law in circuit.bellows], n)
    return float(np.mean(0.25 * (ambient - low) * volume / into))


def settled(circuit: Circuit, start: FloatArray, settings: Settings = Settings()) -> Settled:
    """Follow the circuit from `start` until it is periodic, at rest for good, or neither after all patience."""
    run = _Run(circuit, start, settings)
    while run.kind == "going":
        run.approach()
        if run.kind == "near":
            run.close()
    return Settled(run.kind, tuple(run.cuts_s), run.state, run.cycle)


class _Run:
    """One run as it goes: the state at the last cut, when the cuts were, and the level that makes them."""

    def __init__(self, circuit: Circuit, start: FloatArray, settings: Settings) -> None:
        self.circuit, self.settings = circuit, settings
        self.scale, self.pace = circuit.scale(), characteristic_time(circuit)
        self.state, self.time, self.length = start, 0.0, 1e-2 * self.pace
        self.cuts_s: list[float] = []
        self.level = self.low = self.high = first_level(circuit)
        self.kind, self.kicks = "going", 0
        self.cycle: Cycle | None = None
        self.drift = self.ratio = 0.0

    def approach(self) -> None:
        """Run loosely until two cuts agree, or the ring stands still for good, or patience ends."""
        patience, renewals = 8.0 * self.circuit.network.stages * self.pace, 0
        self._restart(self.settings.loose)
        seen_s = 0.0
        while self.kind == "going":
            step = next(self.stream)
            theta = self._cut(step)
            if theta is not None:
                self._passed(step, theta)
                seen_s = step.end_s
            elif self._still(step):
                self._rested(step)
            elif step.end_s - seen_s > patience:
                renewals, patience, seen_s = renewals + 1, 2.0 * patience, step.end_s
                self._renew_level()
                if renewals > RENEWALS_MAX:
                    self.kind, self.state = "wandering", step.after

    def close(self) -> None:
        """Tight periods from the last cut until one closes, the level left alone; a ring that dies away goes on.

        Where gaps shrink by a factor ρ a period, gap ρ/(1 − ρ) is left; that or the gap itself must be below `closed`. Gaps
        that do not shrink are the integrator's own noise: it is run more tightly then.
        """
        gap, tolerance = 0.0, self.settings.tight
        while self.kind == "near":
            start_s, start = self.time, self.state
            kept = self._one_period(tolerance)
            before, gap = gap, self._apart(start)
            if self.kind != "near" or self._skipped(start, self.settings.closed):
                break
            if gap < self.settings.closed * max(1.0, (before - gap) / gap):
                self.kind = "periodic"
                self.cycle = Cycle(start_s, self.time - start_s, tuple(kept), gap)
            elif len(self.cuts_s) >= 2 * self.settings.cuts_max:
                self.kind = "wandering"
            elif 0.0 < before < 2.0 * gap:
                tolerance = max(TIGHTEST, 0.25 * tolerance)

    def _one_period(self, tolerance: float) -> list[Step]:
        """The steps to the next cut; if the ring stands still instead, the run is sent back on its way (`kind`)."""
        self._restart(tolerance)
        kept: list[Step] = []
        while True:
            kept.append(next(self.stream))
            theta = self._cut(kept[-1])
            if theta is not None:
                self._moved_to(kept[-1], theta)
                return kept
            if self._still(kept[-1]):
                self.state, self.time, self.kind = kept[-1].after, kept[-1].end_s, "going"
                return kept

    def _restart(self, tolerance: float) -> None:
        self.stream = steps(
            self.circuit.network,
            self.state,
            scale=self.scale,
            tolerance=tolerance,
            first_s=self.length,
            longest_s=self.pace,
            start_s=self.time,
        )

    def _cut(self, step: Step) -> float | None:
        """Fraction of the step at which output 1's pressure falls through the level, or None."""
        after = float(step.after[0])
        self.low, self.high = min(self.low, after), max(self.high, after)
        return cut_fraction(step, self.level)

    def _moved_to(self, step: Step, theta: float) -> None:
        self.state, self.time, self.length = step.state(theta), step.start_s + theta * step.length_s, step.length_s
        self.cuts_s.append(self.time)

    def _apart(self, earlier: FloatArray) -> float:
        """Largest change of any pressure or gas content since an earlier cut, in full swings.

        Membranes are left out: they follow the pressures, and one on its way would turn 0.1 ms into a hundredth.
        """
        n = self.circuit.network.stages
        moved = np.abs(self.state - earlier) / self.scale
        return float(max(moved[:n].max(), moved[2 * n :].max()))

    def _passed(self, step: Step, theta: float) -> None:
        """A cut on the way: near enough to the one before, or one more."""
        earlier = self.state
        self._moved_to(step, theta)
        if len(self.cuts_s) > 2 and self._skipped(earlier, SLOW_LEAST):
            self._restart(self.settings.loose)
        elif len(self.cuts_s) > 2 and self._apart(earlier) < self.settings.near and not self._far():
            self.kind = "near"
        elif len(self.cuts_s) >= self.settings.cuts_max:
            self.kind = "wandering"
        else:
            self._renew_level()

    def _skipped(self, earlier: FloatArray, least: float) -> bool:
        """Whether a slowly filling manifold was moved to where it is heading, and the clock by the periods that would take.

        Its content then changes by a steady ratio from cut to cut, and the rest of that series is known: everything else
        in a ring forgets within a few periods and follows. Changes below `least` full swings are let be.
        """
        content = self.state.size - 2
        drift = float(self.state[content] - earlier[content]) / float(self.scale[content])
        ratio = drift / self.drift if self.drift else 0.0
        steady = SLOW_FROM < ratio < SLOW_TO and abs(ratio - self.ratio) < SLOW_STEADY
        self.drift, self.ratio = drift, ratio
        if not steady or abs(drift) < least:
            return False
        period, way = self.cuts_s[-1] - self.cuts_s[-2], drift * ratio / (1.0 - ratio)
        self.state = self.state.copy()
        self.state[content] += way * self.scale[content]
        self.time += period * max(0.0, float(np.log(SLOW_LEFT / abs(way)) / np.log(ratio)))
        self.drift = self.ratio = 0.0
        self.kind = "going"
        return True

    def _far(self) -> bool:
        """Whether the manifold, going on as it does, would still move by more than `near`."""
        slow = SLOW_FROM < self.ratio < SLOW_TO
        return slow and abs(self.drift) > self.settings.near * (1.0 - self.ratio)

    def _renew_level(self) -> None:
        """Take the middle of the swing since the last cut as the new level, if the old one is far off it."""
        middle, swing = 0.5 * (self.low + self.high), self.high - self.low
        if abs(self.level - middle) > OFF_MIDDLE * swing:
            self.level = middle
        self.low = self.high = self.level

    def _still(self, step: Step) -> bool:
        """Whether the step moved nothing worth speaking of (the syringe's own volume apart)."""
        moved = np.abs(step.after - step.before)[:-1] / self.scale[:-1]
        return float(moved.max()) * self.pace < STILL * step.length_s

    def _rested(self, step: Step) -> None:
        """Standing still: for good if the state is stable; if it is balanced on a ridge, kick it off."""
        self.state, self.time = step.after, step.end_s
        if self.kicks >= KICKS_MAX or stable(self.circuit, step.after):
            self.kind = "rest"
            return
        self.kicks += 1
        self.state, self.length = nudged(self.circuit, step.after, KICK), 1e-2 * self.pace
        self._restart(self.settings.loose)


def cut_fraction(step: Step, level: float) -> float | None:
    """Fraction of a step at which output 1's pressure falls through `level` (its vacuum rises), or None."""
    if not float(step.before[0]) > level >= float(step.after[0]):
        return None
    left, right = 0.0, 1.0
    for _ in range(BISECTIONS):
        middle = 0.5 * (left + right)
        left, right = (middle, right) if step.component(0, middle) > level else (left, middle)
    return right


def stable(circuit: Circuit, state: FloatArray) -> bool:
    """Whether small changes of a resting state die out: no eigenvalue of the Jacobian has a positive real part."""
    matrix = circuit.network.linearised(state).matrix()[:-1, :-1]
    scale = circuit.scale()[:-1]
    return bool(np.max(np.linalg.eigvals(matrix * scale / scale[:, None]).real) <= 0.0)


def nudged(circuit: Circuit, state: FloatArray, size: float) -> FloatArray:
    """The state with each output's pressure lowered by its own part of `size` full swings, the same in every run.

    Equal stages started equal would stay equal for ever; real ones never are. The parts are the golden-ratio
    sequence, which favours no harmonic.
    """
    n = circuit.network.stages
    parts = np.mod(np.arange(1, n + 1) * 0.5 * (np.sqrt(5.0) - 1.0), 1.0)
    moved = state.copy()
    moved[:n] -= size * circuit.scale()[:n] * parts
    return moved


def first_level(circuit: Circuit) -> float:
    """Where output 1 must pass for the ring to run at all: the middle of its valve's opening span."""
    valve = circuit.valves[1 % len(circuit.valves)]
    return circuit.gas.pressure_Pa - valve.threshold_Pa - 0.5 * valve.opening_span_Pa
