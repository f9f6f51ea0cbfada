"""From a followed run to the record of it: waveforms sampled from output 1's evacuation edge, and what is read off them."""

from __future__ import annotations

import numpy as np

from gaitlab.ring import measures
from gaitlab.ring.circuit import Circuit
from gaitlab.ring.periodic import Cycle, Settled
from gaitlab.ring.sequence import SAMPLES
from gaitlab.ring.waves import FloatArray, RingRun, Waves

STARTED = 0.01  # a ring has started up when every later period is within this part of the final one


def oscillating_run(circuit: Circuit, run: Settled, cycle: Cycle) -> RingRun:
    """The record of a periodic run, counted as the circuit counts; it is not named yet."""
    states = edge_aligned(circuit, cycle)
    output, bellows, supply = vacuums(circuit, states)
    phase, (rise, fall) = measures.phases(output), measures.rise_and_fall(output)
    return RingRun(
        outcome="",
        remedy="",
        period_s=cycle.period_s,
        phase=phase,
        duty=measures.duty(output),
        peak_vacuum_Pa=output.max(axis=1),
        least_vacuum_Pa=output.min(axis=1),
        rise_s=rise * cycle.period_s,
        fall_s=fall * cycle.period_s,
        start_up_s=start_up(run.cuts_s, cycle.period_s),
        supply_mean_Pa=float(supply.mean()),
        supply_min_Pa=float(supply.min()),
        air_kg_per_period=drawn_air(circuit, cycle, states),
        harmonic=measures.harmonic(phase),
        output_vacuum_Pa=output,
        supply_vacuum_Pa=supply,
        waves=Waves(cycle.period_s, bellows_names(circuit), bellows),
    )


def resting_run(circuit: Circuit, run: Settled, *, outcome: str, remedy: str) -> RingRun:
    """The record of a run that ended at rest (or nowhere): its last state as one sample, nan for what needs a period."""
    output, bellows, supply = vacuums(circuit, run.end[None, :])
    missing = np.full(circuit.network.stages, np.nan)
    return RingRun(
        outcome=outcome,
        remedy=remedy,
        period_s=float("nan"),
        phase=missing,
        duty=missing,
        peak_vacuum_Pa=output[:, 0],
        least_vacuum_Pa=output[:, 0],
        rise_s=missing,
        fall_s=missing,
        start_up_s=float("nan"),
        supply_mean_Pa=float(supply[0]),
        supply_min_Pa=float(supply[0]),
        air_kg_per_period=float("nan"),
        harmonic=0,
        output_vacuum_Pa=output,
        supply_vacuum_Pa=supply,
        waves=Waves(float("nan"), bellows_names(circuit), bellows),
    )


def edge_aligned(circuit: Circuit, cycle: Cycle) -> FloatArray:
    """States (SAMPLES, unknowns) over one period from output 1's evacuation edge."""
    even = np.arange(SAMPLES) / SAMPLES
    rough = vacuums(circuit, cycle.states(even))[0]
    return cycle.states(even + measures.evacuation_edge(rough[0]))


def vacuums(circuit: Circuit, states: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Gauge vacuum of outputs (N, K), bellows (n, K) and supply (K,) from states (K, unknowns)."""
    ambient = circuit.gas.pressure_Pa
    output, _, content, manifold, volume = circuit.network.split(states)
    bellows = circuit.network.chambers.pressures(content)
    return ambient - output.T, ambient - bellows.T, ambient - manifold / volume


def drawn_air(circuit: Circuit, cycle: Cycle, states: FloatArray) -> float:
    """Air [kg] that the stages give the supply in one period: what the source pumps, or what a barrel gains."""
    gained = float(cycle.jump()[-2]) / circuit.gas.RT
    return gained + cycle.period_s * float(pumped(circuit, states).mean())


def pumped(circuit: Circuit, states: FloatArray) -> FloatArray:
    """Mass flow [kg/s] that the source draws out of the manifold in each state (K,)."""
    _, _, _, manifold, volume = circuit.network.split(states)
    return np.array([circuit.network.supply.mass_flow(float(p))[0] for p in manifold / volume])


def start_up(cuts_s: tuple[float, ...], period_s: float) -> float:
    """Time [s] of the first cut after which every period is within STARTED of the final one.

    An estimate: how long outputs that begin alike take to fall into order hangs on how unequal they are.
    """
    off = np.abs(np.diff(cuts_s) / period_s - 1.0) > STARTED
    return float(cuts_s[int(np.flatnonzero(off)[-1]) + 1 if off.any() else 0])


def bellows_names(circuit: Circuit) -> tuple[str, ...]:
    """Names of the bellows in the network's order."""
    return tuple(name for on_output in circuit.inlets for name in on_output)
