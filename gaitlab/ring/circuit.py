"""From a robot and a wiring to the gas network that is solved: parts become laws, tubes and ports become volumes."""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from gaitlab.air.elements import FlowElements
from gaitlab.air.gas import Gas, gas_of
from gaitlab.air.valve import valve_numbers
from gaitlab.body.bellows import BellowsLaw, bellows_law
from gaitlab.ring.chambers import Chambers, content
from gaitlab.ring.manifold import Manifold, manifold_of
from gaitlab.ring.membranes import Membranes
from gaitlab.ring.network import Network
from gaitlab.ring.pattern import Load, LoadPattern, counted_pattern
from gaitlab.ring.waves import FloatArray
from gaitlab.robot.circuit import FlowPart, RoundDuct, Valve, ValveGeometry
from gaitlab.robot.parts import Bellows
from gaitlab.robot.records import Robot
from gaitlab.wiring.wiring import Wiring


@dataclass(frozen=True)
class Circuit:
    """A ring with its loads as the gas network and the laws it was made from.

    `inlets` names the bellows on each output in the order of the network's bellows; `held` those on the supply.
    """

    pattern: LoadPattern
    inlets: tuple[tuple[str, ...], ...]
    held: tuple[str, ...]
    gas: Gas
    valves: tuple[Valve, ...]
    bellows: tuple[BellowsLaw, ...]
    manifold: Manifold
    network: Network

    def rest(self) -> FloatArray:
        """The state at rest: every chamber at atmosphere, every valve shut."""
        leak = np.array([valve.leak_fraction for valve in self.valves])
        return self.state(self.gas.pressure_Pa, self.gas.pressure_Pa, leak)

    def state(self, output_Pa: float | FloatArray, manifold_Pa: float, opening: float | FloatArray) -> FloatArray:
        """The state with these absolute pressures and openings; each bellows is at its output's pressure."""
        net, n = self.network, self.network.stages
        state = np.empty(2 * n + net.bellows + 2)
        state[:n], state[n : 2 * n] = output_Pa, opening
        inside = state[:n][net.fed_by]
        laws = zip(self.bellows, inside, strict=True)
        state[2 * n : -2] = [content(law, np.asarray(p), self.gas.pressure_Pa)[0] for law, p in laws]
        state[-2], state[-1] = manifold_Pa * self.manifold.volume_m3, self.manifold.volume_m3
        return state

    def scale(self) -> FloatArray:
        """Size of a full swing of each unknown: errors are measured against it."""
        net, n = self.network, self.network.stages
        swing = self.gas.pressure_Pa - self.manifold.dead_end_Pa
        scale = np.ones(2 * n + net.bellows + 2)
        scale[:n] = swing
        scale[2 * n : -2] = [swing * law.rest_m3 for law in self.bellows]
        scale[-2:] = swing * self.manifold.volume_m3, self.manifold.volume_m3
        return scale


def circuit_of(robot: Robot, wiring: Wiring) -> Circuit:
    """The circuit in the robot's own counting: outputs 1…N as the file has them."""
    return circuit_of_pattern(*counted_pattern(robot, wiring))


def circuit_of_pattern(
    pattern: LoadPattern, inlets: tuple[tuple[str, ...], ...] | None = None, held: tuple[str, ...] = ()
) -> Circuit:
    """The circuit of a load pattern; inlets are named output/place where no names are given."""
    gas = gas_of(pattern.ambient)
    if inlets is None:
        inlets = tuple(tuple(f"{k + 1}/{j + 1}" for j in range(len(s.loads))) for k, s in enumerate(pattern.stages))
    valves = tuple(_numbers(stage.valve) for stage in pattern.stages)
    laws = tuple(_law(load.bellows) for stage in pattern.stages for load in stage.loads)
    manifold = manifold_of(pattern.supply, gas, held_m3=_held_volume(pattern))
    network = _network(pattern, gas, valves, laws, manifold)
    return Circuit(pattern, inlets, held, gas, valves, laws, manifold, network)


def _network(
    pattern: LoadPattern, gas: Gas, valves: tuple[Valve, ...], laws: tuple[BellowsLaw, ...], manifold: Manifold
) -> Network:
    fed_by = np.array([k for k, stage in enumerate(pattern.stages) for _ in stage.loads], dtype=np.int64)
    return Network(
        gas_J_kg=gas.RT,
        ambient_Pa=gas.pressure_Pa,
        volume_m3=np.array(output_volumes(pattern)),
        travel_s=np.array([valve.travel_s for valve in valves]),
        fed_by=fed_by,
        flows=FlowElements.of(flow_parts(pattern, valves), gas),
        openings=Membranes.of(valves, gas.pressure_Pa),
        chambers=Chambers.of(laws, gas.pressure_Pa),
        supply=manifold.source,
        swept_m3_s=manifold.swept_m3_s,
    )


def flow_parts(pattern: LoadPattern, valves: tuple[Valve, ...]) -> list[FlowPart]:
    """Flow elements in the network's order: N resistors, N open valves, n tubes."""
    tubes = [_tube(pattern, load) for stage in pattern.stages for load in stage.loads]
    return [*(stage.resistor for stage in pattern.stages), *(valve.open for valve in valves), *tubes]


def output_volumes(pattern: LoadPattern) -> list[float]:
    """Rigid volume [m³] at each output: port, control chamber of the next valve, bores of the tubes to its bellows."""
    following = pattern.stages[1:] + pattern.stages[:1]
    pairs = zip(pattern.stages, following, strict=True)
    return [own.port_m3 + after.control_m3 + sum(_bore(pattern, load) for load in own.loads) for own, after in pairs]


def _held_volume(pattern: LoadPattern) -> float:
    """Volume [m³] that held bellows add to the manifold: they stand still, so their rest volume is near enough."""
    return sum(load.bellows.rest_volume_m3 + _bore(pattern, load) for load in pattern.held)


def _bore(pattern: LoadPattern, load: Load) -> float:
    return math.pi * pattern.bore_m**2 / 4.0 * load.tube_m


def _tube(pattern: LoadPattern, load: Load) -> RoundDuct:
    return RoundDuct(pattern.bore_m, load.tube_m, pattern.inlet_loss)


@lru_cache(maxsize=256)
def _law(bellows: Bellows) -> BellowsLaw:
    return bellows_law(bellows)


@lru_cache(maxsize=256)
def _numbers(valve: Valve | ValveGeometry) -> Valve:
    return valve_numbers(valve)
