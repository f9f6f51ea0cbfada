"""What a run is called and what to do about it."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from gaitlab.air.valve import threshold_Pa
from gaitlab.ring.circuit import Circuit, circuit_of_pattern
from gaitlab.ring.inverter import InverterCurve, inverter_curve
from gaitlab.ring.manifold import stiffened
from gaitlab.ring.periodic import Settings, Settled, nudged, settled
from gaitlab.ring.waves import FloatArray, RingRun

OSCILLATES, HIGHER_HARMONIC = "oscillates", "higher_harmonic"
LATCHES, SETTLES, TOO_WEAK, STARVES, WANDERS = "latches", "settles", "too_weak", "starves", "wanders"
SHORT_STROKE = "short_stroke"

BEATEN = (
    "a stage's open valve does not beat its resistor: its low level keeps the next valve open; give that stage "
    "(margins.beaten_stage) a larger resistor or a wider valve"
)
REMEDIES = {
    OSCILLATES: "",
    HIGHER_HARMONIC: "the ring carries more than one travelling edge; vent all outputs and start again with one output "
    "held at vacuum, or use a prime number of stages",
    LATCHES: "an even ring has two resting states and stays in one; add or take away one stage",
    SETTLES: "one inverter's gain is below what this number of stages needs; use more stages, a larger resistor or "
    "a valve that opens over a narrower span",
    TOO_WEAK: "the supply cannot pull an output past the next valve's threshold; use a deeper vacuum, a softer valve "
    "(lower threshold or sealing) or a tighter one (less leak)",
    STARVES: "the ring draws the manifold down until it stops or loses its order; use a stronger pump or larger resistors "
    "(gaitlab supply names the smallest free flow that keeps it alive)",
    SHORT_STROKE: "the syringe's stroke does not carry the ring through three periods; use a longer stroke, less dead "
    "volume or a smaller load",
    WANDERS: "no steady period was found; look for stages that differ a lot or loads far larger than the rest",
}


def run_outcome(circuit: Circuit, run: RingRun) -> tuple[str, str]:
    """Outcome and remedy of a periodic run: the fundamental oscillates.

    Anything else is a higher harmonic, or a ring whose supply has sagged so far that its stages follow the manifold
    instead of one another.
    """
    name = OSCILLATES if run.harmonic == 1 else _disordered_name(circuit, run.supply_mean_Pa)
    return name, REMEDIES[name]


def _disordered_name(circuit: Circuit, supply_Pa: float) -> str:
    return HIGHER_HARMONIC if lifts(circuit, supply_Pa) else STARVES


def rest_outcome(circuit: Circuit, run: Settled, settings: Settings) -> tuple[str, str]:
    """Outcome and remedy of a run that did not end in a period.

    One that never came to rest `starves` if the manifold has sagged below what lifts a valve, else carries a
    `higher_harmonic` if more than one edge is on its way, else `wanders`. One at rest `latches` if the ring is even; is
    `too_weak` if even at the supply's dead end a shut stage does not lift the next valve; `starves` if the same
    ring on a house line of that vacuum runs; else `settles`.
    """
    name = _unsteady_name(circuit, run) if run.kind == "wandering" else _rest_name(circuit, settings)
    if name == SETTLES and beaten_stage(circuit, run) is not None:
        return name, BEATEN
    return name, REMEDIES[name]


def beaten_stage(circuit: Circuit, run: Settled) -> int | None:
    """The first stage (0…N−1) whose open valve leaves the next valve open too, so that it never passes a change on; or None."""
    supply = circuit.gas.pressure_Pa - float(run.end[-2] / run.end[-1])
    valves = circuit.valves
    for stage, after in enumerate(valves[1:] + valves[:1]):
        low = curve_of(circuit, stage, supply).low_Pa
        if low >= after.threshold_Pa + 0.5 * after.opening_span_Pa - after.hysteresis_Pa:
            return stage
    return None


def _unsteady_name(circuit: Circuit, run: Settled) -> str:
    if not lifts(circuit, circuit.gas.pressure_Pa - float(run.end[-2] / run.end[-1])):
        return STARVES
    return HIGHER_HARMONIC if travelling_edges(circuit, run.end) > 1 else WANDERS


def travelling_edges(circuit: Circuit, state: FloatArray) -> int:
    """How many edges are on their way round the ring: neighbours on the same side of the level that switches the next valve."""
    vacuum = circuit.gas.pressure_Pa - circuit.network.split(state)[0]
    fed = circuit.valves[1:] + circuit.valves[:1]
    high = vacuum > np.array([valve.threshold_Pa + 0.5 * valve.opening_span_Pa for valve in fed])
    return int(np.sum(high == np.roll(high, 1)))


def _rest_name(circuit: Circuit, settings: Settings) -> str:
    stages = circuit.network.stages
    if stages % 2 == 0:
        return LATCHES
    if stages == 1:
        return SETTLES
    if not lifts(circuit, dead_end(circuit)):
        return TOO_WEAK
    return STARVES if _runs_on_house_line(circuit, settings) else SETTLES


def lifts(circuit: Circuit, supply_Pa: float) -> bool:
    """Whether at this supply vacuum each stage, shut, opens the next valve at least half way."""
    valves = circuit.valves
    for stage, after in enumerate(valves[1:] + valves[:1]):
        high = curve_of(circuit, stage, supply_Pa).high_Pa
        if high <= threshold_Pa(after, 0.0, high) + 0.5 * after.opening_span_Pa:
            return False
    return True


def _runs_on_house_line(circuit: Circuit, settings: Settings) -> bool:
    stiff = circuit_of_pattern(replace(circuit.pattern, supply=stiffened(dead_end(circuit))))
    return settled(stiff, nudged(stiff, stiff.rest(), 1e-2), settings).kind == "periodic"


def dead_end(circuit: Circuit) -> float:
    """Gauge vacuum [Pa] that the supply reaches with nothing to draw."""
    return circuit.gas.pressure_Pa - circuit.manifold.dead_end_Pa


def curve_of(circuit: Circuit, stage: int, supply_Pa: float) -> InverterCurve:
    """The curve of one stage (0…N−1) at a supply vacuum."""
    return inverter_curve(circuit.pattern.stages[stage].resistor, circuit.valves[stage], supply_Pa, circuit.gas)


def weakest_gain(circuit: Circuit, supply_Pa: float) -> float:
    """Smallest peak gain among the ring's stages at a supply vacuum."""
    stages = circuit.pattern.stages
    distinct = {(stage.resistor, stage.valve): k for k, stage in enumerate(stages)}
    return min(curve_of(circuit, k, supply_Pa).gain_max for k in distinct.values())
