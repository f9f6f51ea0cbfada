"""What a run is called and what to do about it."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from gaitlab.air.valve import threshold_Pa
from gaitlab.ring.circuit import Circuit, circuit_of_pattern
from gaitlab.ring.inverter import InverterCurve, inverter_curve
from gaitlab.ring.manifold import stiffened
from gaitlab.ring.periodic import Settled, Settings, nudged, settled
from gaitlab.ring.waves import RingRun

OSCILLATES, HIGHER_HARMONIC = "oscillates", "higher_harmonic"
LATCHES, SETTLES, TOO_WEAK, STARVES, WANDERS = "latches", "settles", "too_weak", "starves", "wanders"

REMEDIES = {
    OSCILLATES: "",
    HIGHER_HARMONIC: "the ring carries more than one travelling edge; vent all outputs and start again with one output "
    "held at vacuum, or use a prime number of stages",
    LATCHES: "an even ring has two resting states and stays in one; add or take away one stage",
    SETTLES: "one inverter's gain is below what this number of stages needs; use more stages, a larger resistor or "
    "a valve that opens over a narrower span",
    TOO_WEAK: "the supply cannot pull an output past the next valve's threshold; use a deeper vacuum, a softer valve "
    "(lower threshold or sealing) or a tighter one (less leak)",
    STARVES: "the ring draws the manifold down until it stops; use a stronger pump or larger resistors "
    "(gaitlab supply names the smallest free flow that keeps it alive)",
    WANDERS: "no steady period was found; look for stages that differ a lot or loads far larger than the rest",
}


def run_outcome(run: RingRun) -> tuple[str, str]:
    """Outcome and remedy of a periodic run: the fundamental oscillates, anything else is a higher harmonic."""
    name = OSCILLATES if run.harmonic == 1 else HIGHER_HARMONIC
    return name, REMEDIES[name]


def rest_outcome(circuit: Circuit, run: Settled, settings: Settings) -> tuple[str, str]:
    """Outcome and remedy of a run that did not end in a period.

    In this order: `wanders` if it never came to rest; `latches` for an even ring; `too_weak` if at the supply's dead end
    a shut stage does not lift the next valve off its seat; `starves` if the same ring on a house line of that vacuum
    runs; else `settles`.
    """
    name = WANDERS if run.kind == "wandering" else _rest_name(circuit, settings)
    return name, REMEDIES[name]


def _rest_name(circuit: Circuit, settings: Settings) -> str:
    stages = circuit.network.stages
    if stages % 2 == 0:
        return LATCHES
    if stages == 1:
        return SETTLES
    if not all(_lifts(circuit, k) for k in range(stages)):
        return TOO_WEAK
    return STARVES if _runs_on_house_line(circuit, settings) else SETTLES


def _lifts(circuit: Circuit, stage: int) -> bool:
    """Whether this stage's high level at the dead end reaches half way through the next valve's opening span."""
    following = circuit.valves[(stage + 1) % len(circuit.valves)]
    high = curve_of(circuit, stage, dead_end(circuit)).high_Pa
    return high > threshold_Pa(following, 0.0, high) + 0.5 * following.opening_span_Pa


def _runs_on_house_line(circuit: Circuit, settings: Settings) -> bool:
    stiff = circuit_of_pattern(replace(circuit.pattern, supply=stiffened(dead_end(circuit))))
    return settled(stiff, nudged(stiff, stiff.rest(), 1e-2), settings).kind == "periodic"


def dead_end(circuit: Circuit) -> float:
    """Gauge vacuum [Pa] that the supply reaches with nothing to draw."""
    return circuit.gas.pressure_Pa - circuit.manifold.dead_end_Pa


def curve_of(circuit: Circuit, stage: int, supply_Pa: float) -> InverterCurve:
    """The curve of one stage (0…N−1) at a supply vacuum."""
    return inverter_curve(circuit.pattern.stages[stage].resistor, circuit.valves[stage], supply_Pa, circuit.gas)


def margins(circuit: Circuit, run: RingRun) -> tuple[tuple[str, float], ...]:
    """How far the levels in motion are from failing, worst stage, gauge [Pa].

    `high_margin_Pa`: peak of an output above the control that opens the next valve half way while that one's own output
    is at its peak. `low_margin_Pa`: how far an output falls below the control that lets the next valve go half shut
    while that one's own output is at its least.
    """
    peak, least = run.peak_vacuum_Pa, run.least_vacuum_Pa
    half = np.array([valve.threshold_Pa + 0.5 * valve.opening_span_Pa for valve in circuit.valves])
    sealing = np.array([valve.sealing for valve in circuit.valves])
    hysteresis = np.array([valve.hysteresis_Pa for valve in circuit.valves])
    # The valve that an output drives is the next stage's, so an output stands against the valve's values rolled back by one.
    high = peak - np.roll(half + sealing * peak, -1)
    low = np.roll(half - hysteresis + sealing * least, -1) - least
    return ("high_margin_Pa", float(high.min())), ("low_margin_Pa", float(low.min()))


def weakest_gain(circuit: Circuit, supply_Pa: float) -> float:
    """Smallest peak gain among the ring's stages at a supply vacuum."""
    stages = circuit.pattern.stages
    distinct = {(stage.resistor, stage.valve): k for k, stage in enumerate(stages)}
    return min(curve_of(circuit, k, supply_Pa).gain_max for k in distinct.values())
