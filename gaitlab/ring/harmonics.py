"""Other ways in which the same ring may run: it is started from several states and each is followed to its end.

A ring of N stages carries one travelling edge at its fundamental; three, five, … edges at once are the higher harmonics.
Edges that are evenly spread may live on in a long ring, or for a while, if the start put them there.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from gaitlab.ring.circuit import Circuit, circuit_of_pattern
from gaitlab.ring.pattern import LoadPattern
from gaitlab.ring.periodic import Settings, nudged
from gaitlab.ring.solve import run_from
from gaitlab.ring.waves import FloatArray, RingRun


@dataclass(frozen=True)
class Start:
    """A state to start from, and what it is."""

    name: str
    state: FloatArray


def starts(circuit: Circuit) -> tuple[Start, ...]:
    """Rest at atmosphere, everything evacuated, and each number of edges h below N, odd like N or even, spread evenly.

    All are nudged off exact evenness, as real parts are: only what lives on by itself is found.
    """
    low = circuit.manifold.dead_end_Pa
    evacuated = circuit.state(low, low, 0.0)
    stages = circuit.network.stages
    counted = range(2 - stages % 2, stages, 2)
    return (
        Start("at rest", nudged(circuit, circuit.rest(), 1e-2)),
        Start("evacuated", nudged(circuit, evacuated, 1e-2)),
        *(Start(_edges(h), nudged(circuit, edges(circuit, h), 1e-2)) for h in counted),
    )


def edges(circuit: Circuit, count: int) -> FloatArray:
    """The state in which harmonic `count` would be caught in the act: output k at phase k (N + count)/(2 N) of a square wave.

    The supply is at its dead end, each valve as its control wants it, each bellows at its output's pressure.
    """
    n = circuit.network.stages
    phase = np.mod(np.arange(n) * (n + count) / (2.0 * n), 1.0)
    high = np.mod(-phase, 1.0) < 0.5
    low_Pa, ambient = circuit.manifold.dead_end_Pa, circuit.gas.pressure_Pa
    return circuit.state(np.where(high, low_Pa, ambient), low_Pa, np.roll(high, 1).astype(float))


def runs_from_several(pattern: LoadPattern, *, settings: Settings = Settings()) -> tuple[tuple[str, RingRun], ...]:
    """What the ring does from each of `starts`, by the start's name."""
    circuit = circuit_of_pattern(pattern)
    return tuple((start.name, run_from(circuit, start.state, settings=settings)) for start in starts(circuit))


def _edges(count: int) -> str:
    return "one edge" if count == 1 else f"{count} edges"
