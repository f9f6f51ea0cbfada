"""A ring on a syringe: the vacuum comes with the stroke and is used up period by period, until the ring dies.

There is no closed period here. Each passage from cut to cut is kept as a nearly closed one; the one in the middle stands
for the stroke where a single period is asked for.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace

import numpy as np

from gaitlab.air.supply import SyringeLaw, supply_law
from gaitlab.errors import InputError, must
from gaitlab.ring.circuit import Circuit
from gaitlab.ring.manifold import syringe_strokes
from gaitlab.ring.network import Network
from gaitlab.ring.periodic import Cycle, characteristic_time, cut_fraction, first_level, nudged
from gaitlab.ring.rosenbrock import Step, steps
from gaitlab.ring.waves import FloatArray
from gaitlab.robot.circuit import Syringe

TOLERANCE = 5e-4  # full swings a step (chosen by us, between the loose and the tight of a settled run)
DEAD_AFTER = 3.0  # longest periods without a cut, after the last movement of the plunger, that end a run
LONGEST_S = 3600.0  # no run is followed further (chosen by us)
CUTS_MAX = 2000


@dataclass(frozen=True)
class StrokeRun:
    """A ring on a syringe from its first movement to its death.

    `cuts_s` are the moments at which output 1's vacuum rose through its valve's opening, `supply_Pa` the gauge vacuum in the
    barrel then; `cycles` the passages between them. `strokes` counts the pulls in the schedule.
    """

    cuts_s: tuple[float, ...]
    supply_Pa: tuple[float, ...]
    cycles: tuple[Cycle, ...]
    strokes: int
    end: FloatArray

    @property
    def periods_per_stroke(self) -> float:
        """Whole periods over pulls."""
        return len(self.cycles) / self.strokes


def stroke_run(circuit: Circuit, start: FloatArray) -> StrokeRun:
    """Follow a circuit on a syringe through the whole schedule and on, plunger held, until it has died.

    Raises InputError where the supply is no syringe.
    """
    law = supply_law(circuit.pattern.supply, circuit.gas)
    if not isinstance(law, SyringeLaw):
        raise InputError(must("supply", "a syringe", type(circuit.pattern.supply).__name__))
    return _Log(circuit, law, start).followed()


def pulls(syringe: Syringe) -> int:
    """How many times the plunger is pulled: runs of rising volume in the schedule, at least 1."""
    rising = np.diff(syringe.schedule_m3) > 0
    return max(1, int(np.sum(rising & ~np.concatenate(([False], rising[:-1])))))


class _Log:
    """A stroke run as it goes."""

    def __init__(self, circuit: Circuit, law: SyringeLaw, start: FloatArray) -> None:
        self.circuit, self.law = circuit, law
        self.level, self.pace = first_level(circuit), characteristic_time(circuit)
        self.state, self.time = start, law.times_s[0]
        self.cuts: list[tuple[float, float]] = []
        self.cycles: list[Cycle] = []
        self.kept: list[Step] = []

    def followed(self) -> StrokeRun:
        """Every piece of the schedule, then the plunger held."""
        for piece in syringe_strokes(self.law):
            self._through(replace(self.circuit.network, swept_m3_s=piece.manifold.swept_m3_s), piece.end_s)
        self._until_dead(replace(self.circuit.network, swept_m3_s=0.0))
        cuts_s, supply = tuple(t for t, _ in self.cuts), tuple(v for _, v in self.cuts)
        syringe = self.circuit.pattern.supply
        assert isinstance(syringe, Syringe)
        return StrokeRun(cuts_s, supply, tuple(self.cycles), pulls(syringe), self.state)

    def _steps(self, network: Network) -> Iterator[Step]:
        return steps(
            network,
            self.state,
            scale=self.circuit.scale(),
            tolerance=TOLERANCE,
            first_s=1e-2 * self.pace,
            longest_s=self.pace,
            start_s=self.time,
        )

    def _through(self, network: Network, end_s: float) -> None:
        for step in self._steps(network):
            part = min(1.0, (end_s - step.start_s) / step.length_s)
            self._noted(step, part)
            self.state, self.time = step.state(part), step.start_s + part * step.length_s
            if part < 1.0 or step.end_s >= end_s:
                return

    def _until_dead(self, network: Network) -> None:
        held_s = self.time
        for step in self._steps(network):
            self._noted(step, 1.0)
            self.state, self.time = step.after, step.end_s
            longest = max(8.0 * network.stages * self.pace, *(c.period_s for c in self.cycles), 0.0)
            last = max(held_s, self.cuts[-1][0]) if self.cuts else held_s
            if self.time - last > DEAD_AFTER * longest or self.time > LONGEST_S or len(self.cuts) >= CUTS_MAX:
                return

    def _noted(self, step: Step, part: float) -> None:
        """Keep a step; where output 1 is cut within its first `part`, close a passage and begin the next."""
        self.kept.append(step)
        theta = cut_fraction(step, self.level)
        if theta is None or theta > part:
            return
        at_s, state = step.start_s + theta * step.length_s, step.state(theta)
        if self.cuts:
            start_s = self.cuts[-1][0]
            self.cycles.append(Cycle(start_s, at_s - start_s, tuple(self.kept), float("nan")))
        self.cuts.append((at_s, self.circuit.gas.pressure_Pa - float(state[-2] / state[-1])))
        self.kept = [step]


def syringe_start(circuit: Circuit) -> FloatArray:
    """A syringe's start: at rest at atmosphere, plunger where the schedule begins, outputs a little unequal."""
    return nudged(circuit, circuit.rest(), 1e-2)
