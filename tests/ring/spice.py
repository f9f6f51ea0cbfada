"""The same ring as a netlist for ngspice: behavioural sources from the closed forms, an outside solver for the equations.

Node voltages are absolute pressures in kPa, currents are mass flows in mg/s, capacitances V/(R T) in mg/kPa. Resistors
and valves are known by data-sheet numbers (ISO 6358), tubes are laminar; bellows must stay short of their solid limit.
"""

from __future__ import annotations

import subprocess
from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from gaitlab.air.elements import FlowElements
from gaitlab.air.iso import iso_law
from gaitlab.air.section import section_of
from gaitlab.air.valve import SIDE_BLEND_PA
from gaitlab.ring.circuit import Circuit, circuit_of
from gaitlab.robot.circuit import IsoPart, Pump, RoundDuct, Valve
from gaitlab.robot.records import Robot
from gaitlab.wiring.wiring import Wiring

FloatArray = NDArray[np.float64]
MG, KPA = 1e6, 1e3


RESISTOR, OPEN_VALVE = IsoPart(1.35e-10, 0.35), IsoPart(4.2e-10, 0.35)  # about the flows of the row's own ducts


class ClosedFlows:
    """Resistors and valves by data-sheet numbers, tubes laminar: m = (p_a² − p_b²)/a, each a law with a closed form."""

    def __init__(self, parts: FlowElements, laminar: FloatArray) -> None:
        self.parts, self.laminar = parts, laminar

    def flow(self, p_a: FloatArray, p_b: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Flows and their derivatives with both pressures."""
        k = self.parts.count
        own = self.parts.flow(p_a[:k], p_b[:k])
        a, b = p_a[k:], p_b[k:]
        tubes = (a * a - b * b) / self.laminar, 2.0 * a / self.laminar, -2.0 * b / self.laminar
        flow, by_a, by_b = (np.concatenate(pair) for pair in zip(own, tubes, strict=True))
        return flow, by_a, by_b

    def mass_flow(self, p_a: FloatArray, p_b: FloatArray) -> FloatArray:
        """Flows alone."""
        k = self.parts.count
        tubes = (p_a[k:] ** 2 - p_b[k:] ** 2) / self.laminar
        return np.concatenate((self.parts.mass_flow(p_a[:k], p_b[:k]), tubes))


def laminar_Pa2_s_kg(circuit: Circuit) -> list[float]:
    """a of each tube: the long laminar tube's p_a² − p_b² over mass flow."""
    viscosity, rt = circuit.gas.viscosity_Pa_s(), circuit.gas.RT
    loads = [load for stage in circuit.pattern.stages for load in stage.loads]
    tubes = [section_of(RoundDuct(circuit.pattern.bore_m, load.tube_m)) for load in loads]
    return [tube.laminar_Pa2_s_per_kg(viscosity, rt) for tube in tubes]


def iso_circuit(robot: Robot, wiring: Wiring) -> Circuit:
    """The robot's ring with flow laws in closed form, as the network solves it."""
    valve = replace(robot.ring.valve, open=OPEN_VALVE)
    circuit = circuit_of(replace(robot, ring=replace(robot.ring, resistor=RESISTOR, valve=valve)), wiring)
    n = circuit.network.stages
    parts = FlowElements.of([RESISTOR] * n + [OPEN_VALVE] * n, circuit.gas)
    flows = ClosedFlows(parts, np.array(laminar_Pa2_s_kg(circuit)))
    return replace(circuit, network=replace(circuit.network, flows=flows))


def flow_expression(part: IsoPart, circuit: Circuit, a: str, b: str) -> str:
    """Signed flow in mg/s from node a to node b: De = (pu − z)(pu + z − 2 b pu)/(1 − b), m = 2 De/(a + √(a² + 4 c De))."""
    law = iso_law(part, circuit.gas)
    ratio = law.critical_ratio
    up, down = f"max(v({a}),v({b}))", f"min(v({a}),v({b}))"
    lower = f"max({down},{ratio}*{up})"
    ellipse = f"(({up}-{lower})*({up}+{lower}-{2 * ratio}*{up})/{1 - ratio})"
    linear, square = law.linear_Pa2_s_kg / KPA**2 / MG, law.square_Pa2_s2_kg2 / KPA**2 / MG**2
    size = f"(2*{ellipse}/({linear}+sqrt({linear**2}+{4 * square}*{ellipse})))"
    return f"(v({a})>v({b}) ? {size} : -{size})"


def target_expression(valve: Valve, ambient_kPa: float, control: str, output: str, opening: str) -> str:
    """Where the membrane wants to be, as `gaitlab.air.valve` has it with atmosphere on one flow side."""
    blend = SIDE_BLEND_PA / KPA
    out = f"({ambient_kPa}-v({output}))"
    apart = f"(sqrt({out}*{out}+{blend**2})-{blend})"
    threshold = f"({valve.threshold_Pa / KPA}+0.5*{out}+{valve.sealing - 0.5}*{apart})"
    raised = f"({ambient_kPa}-v({control})-{threshold}+{valve.hysteresis_Pa / KPA}*v({opening}))"
    x = f"min(max({raised}/{valve.opening_span_Pa / KPA},0),1)"
    return f"({valve.leak_fraction}+{1 - valve.leak_fraction}*{x}*{x}*(3-2*{x}))"


def netlist(
    circuit: Circuit, start: FloatArray, *, end_s: float, step_s: float, out: Path, accuracy: float = 1e-5
) -> str:
    """The whole circuit as ngspice text; it writes time and every output's pressure to `out`."""
    lines = ["* vacuum ring", f"vatm atm 0 {circuit.gas.pressure_Pa / KPA}"]
    for stage in range(circuit.network.stages):
        lines += _stage(circuit, stage, start)
    lines += _manifold(circuit, start)
    for place in range(circuit.network.bellows):
        lines += _bellows(circuit, place, start)
    outputs = " ".join(f"v(p{k})" for k in range(circuit.network.stages))
    lines += [
        f".options reltol={accuracy} abstol=1e-9 vntol=1e-7 method=gear maxord=2",
        f".tran {step_s} {end_s} 0 {step_s} uic",
        ".control",
        "set wr_singlescale",
        "set numdgt=10",
        "run",
        f"wrdata {out} {outputs}",
        "quit",
        ".endc",
        ".end",
    ]
    return "\n".join(lines) + "\n"


def _stage(circuit: Circuit, k: int, start: FloatArray) -> list[str]:
    net, parts, valve = circuit.network, circuit.pattern.stages[k], circuit.valves[k]
    n, gas = net.stages, circuit.gas
    assert isinstance(parts.resistor, IsoPart) and isinstance(valve.open, IsoPart)
    capacity = net.volume_m3[k] / gas.RT * MG * KPA
    target = target_expression(valve, gas.pressure_Pa / KPA, f"p{(k - 1) % n}", f"p{k}", f"x{k}")
    return [
        f"cp{k} p{k} 0 {capacity} ic={start[k] / KPA}",
        f"br{k} p{k} man i={flow_expression(parts.resistor, circuit, f'p{k}', 'man')}",
        f"bv{k} atm p{k} i=v(x{k})*{flow_expression(valve.open, circuit, 'atm', f'p{k}')}",
        f"cx{k} x{k} 0 {valve.travel_s} ic={start[n + k]}",
        f"bx{k} 0 x{k} i={target}-v(x{k})",
    ]


def _manifold(circuit: Circuit, start: FloatArray) -> list[str]:
    pump, gas = circuit.pattern.supply, circuit.gas
    assert isinstance(pump, Pump) and pump.law == "mass"
    full = gas.density_kg_m3(gas.pressure_Pa) * pump.free_flow_m3_s * MG
    ambient, dead_end = gas.pressure_Pa / KPA, pump.dead_end_vacuum_Pa / KPA
    capacity = circuit.manifold.volume_m3 / gas.RT * MG * KPA
    return [
        f"cman man 0 {capacity} ic={start[-2] / start[-1] / KPA}",
        f"bpump man 0 i={full}*max(0,1-({ambient}-v(man))/{dead_end})",
    ]


def _bellows(circuit: Circuit, j: int, start: FloatArray) -> list[str]:
    """dp/dt = flow over d(p V)/dp = r − s p_atm + 2 s p, the volume falling by s a kPa of vacuum; a tube of p_a² − p_b² = a m."""
    net, law, gas = circuit.network, circuit.bellows[j], circuit.gas
    k, ambient = int(net.fed_by[j]), gas.pressure_Pa / KPA
    per_kPa = -float(law.volume(1e3)[1]) / gas.RT * MG * KPA * KPA  # mg per kPa²
    linear = law.rest_m3 / gas.RT * MG * KPA - per_kPa * ambient
    pressure = float(net.chambers.pressure(start[2 * net.stages : -2])[0][j]) / KPA
    flow = f"(v(p{k})*v(p{k})-v(b{j})*v(b{j}))*{MG * KPA**2 / laminar_Pa2_s_kg(circuit)[j]}"
    return [
        f"cb{j} b{j} 0 1 ic={pressure}",
        f"bt{j} p{k} 0 i={flow}",
        f"bu{j} 0 b{j} i={flow}/({linear}+{2 * per_kPa}*v(b{j}))",
    ]


@dataclass(frozen=True)
class SpiceRun:
    """Time (T,) and output pressures (N, T) in Pa."""

    time_s: FloatArray
    output_Pa: FloatArray


def ngspice(text: str, folder: Path, out: Path) -> SpiceRun:
    """Run ngspice in batch mode on a netlist and read back what it wrote."""
    source = folder / "ring.cir"
    source.write_text(text)
    done = subprocess.run(["ngspice", "-b", str(source)], capture_output=True, text=True, timeout=300, check=False)
    assert out.exists(), done.stdout[-2000:] + done.stderr[-2000:]
    table = np.loadtxt(out)
    return SpiceRun(table[:, 0], table[:, 1:].T * KPA)
