"""The network's equations: Jacobian against differences, elimination against a dense solve, gas neither made nor lost."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from numpy.typing import NDArray

from gaitlab.air.supply import supply_law
from gaitlab.ring.chambers import Chambers, content
from gaitlab.ring.circuit import Circuit, circuit_of
from gaitlab.ring.periodic import nudged
from gaitlab.ring.rosenbrock import steps
from gaitlab.ring.stroke import syringe_strokes
from gaitlab.robot.circuit import FixedVacuum, PumpTable, Syringe
from tests.ring.robots import in_order, tray, unloaded, with_ring, with_supply

SUPPLIES = {
    "pump": None,
    "table": PumpTable((0.0, 30e3, 55e3), (2e-4, 1e-4, 0.0), 50e-6),
    "house line": FixedVacuum(50e3),
    "syringe": Syringe(20e-6, (0.0, 2.0), (0.0, 300e-6)),
}


def circuit_on(name: str) -> Circuit:
    supply = SUPPLIES[name]
    robot = tray() if supply is None else with_supply(tray(), supply)
    return circuit_of(robot, in_order(robot))


def mixed_state(circuit: Circuit) -> NDArray[np.float64]:
    """A state with every valve part open and every pressure different."""
    n, ambient = circuit.network.stages, circuit.gas.pressure_Pa
    output = ambient - np.linspace(8e3, 38e3, n)
    state = circuit.state(output, ambient - 41e3, np.linspace(0.2, 0.8, n))
    state[2 * n : -2] *= 1.03
    return state


@pytest.mark.parametrize("name", SUPPLIES)
def test_jacobian_against_central_differences(name: str) -> None:
    """Every entry, in full swings per full swing, to the accuracy of differences."""
    circuit = circuit_on(name)
    state, scale, net = mixed_state(circuit), circuit.scale(), circuit.network
    exact = net.linearised(state).matrix() * scale / scale[:, None]
    by_differences = np.empty_like(exact)
    for k, size in enumerate(scale):
        move = np.zeros(state.size)
        move[k] = 1e-6 * size
        by_differences[:, k] = (net.rates(state + move) - net.rates(state - move)) / 2e-6 / scale
    assert np.max(np.abs(exact - by_differences)) < 1e-6 * np.max(np.abs(exact))


@pytest.mark.parametrize("name", SUPPLIES)
@pytest.mark.parametrize("shift", [3.0, 300.0, 3e5])
def test_elimination_against_a_dense_solve(name: str, shift: float) -> None:
    """(shift − J)⁻¹ r by elimination is what numpy finds from the full matrix."""
    circuit = circuit_on(name)
    state, scale = mixed_state(circuit), circuit.scale()
    linear = circuit.network.linearised(state)
    right = np.random.default_rng(1).normal(size=state.size) * scale
    dense = np.linalg.solve(shift * np.eye(state.size) - linear.matrix(), right)
    assert np.max(np.abs((linear.solver(shift)(right) - dense) / scale)) < 1e-9


@pytest.mark.parametrize("name", SUPPLIES)
def test_rates_are_the_same_with_and_without_slopes(name: str) -> None:
    """The short path, which asks flows and valves for values alone, gives the linearisation's own rates."""
    circuit = circuit_on(name)
    state = mixed_state(circuit)
    assert circuit.network.rates(state) == pytest.approx(circuit.network.linearised(state).rates, rel=1e-13)


def test_an_isolated_circuit_keeps_its_gas() -> None:
    """Everything that leaves one chamber enters another: with atmosphere and pump shut off, the sum of p V stays to rounding."""
    circuit = circuit_on("syringe")
    net, n = circuit.network, circuit.network.stages
    state = mixed_state(circuit)
    state[n : 2 * n] = 0.0  # valves shut for good: no leak
    rates = net.rates(state)
    gained = float(rates[:n] @ net.volume_m3 + rates[2 * n : -1].sum())
    assert abs(gained) < 1e-12 * float(np.abs(rates[2 * n : -1]).sum())


def test_pressures_stay_between_the_rails() -> None:
    """From rest through start-up no output, bellows or manifold leaves the range from dead end to atmosphere."""
    circuit = circuit_on("pump")
    net, n, ambient = circuit.network, circuit.network.stages, circuit.gas.pressure_Pa
    low, scale = circuit.manifold.dead_end_Pa, circuit.scale()
    slack = 2e-3 * (ambient - low)  # the tolerance of a step
    for step in steps(net, nudged(circuit, circuit.rest(), 1e-2), scale=scale, tolerance=1e-3, first_s=1e-3):
        output, opening, held, manifold, volume = net.split(step.after)
        pressures = np.concatenate((output, net.chambers.pressure(held)[0], [manifold / volume]))
        assert low - slack < pressures.min() and pressures.max() < ambient + slack
        assert opening.min() > -2e-3 and opening.max() < 1.002
        if step.end_s > 3.0:
            break
    assert n == 5


def test_a_chain_of_two_inverters_passes_a_step_on_with_the_right_signs() -> None:
    """Input at atmosphere: first output high, second low; input evacuated: the other way round.

    Stage 1 of three is made an input by giving it a vessel of a cubic metre; stages 2 and 3 are the chain.
    """
    robot = with_ring(with_supply(tray(), FixedVacuum(45e3)), stages=3)
    circuit = circuit_of(robot, unloaded(robot))
    volume = circuit.network.volume_m3.copy()
    volume[0] = 1.0
    net, ambient = replace(circuit.network, volume_m3=volume), circuit.gas.pressure_Pa
    supply = ambient - 45e3
    for given, expected in ((0.0, (45e3, 3e3)), (45e3, (3e3, 45e3))):
        start = circuit.state(np.array([ambient - given, ambient - 20e3, ambient - 20e3]), supply, 0.5)
        for step in steps(net, start, scale=circuit.scale(), tolerance=1e-4, first_s=1e-4):
            if step.end_s > 5.0:
                break
        vacuum = ambient - step.after[:3]
        assert vacuum[0] == pytest.approx(given, abs=100.0)
        assert vacuum[1:] == pytest.approx(expected, abs=4e3)


def test_bellows_table_against_the_law() -> None:
    """p(E) from the table puts back the pressure that made E = p V(p); its slope is 1/(V + p dV/dp)."""
    circuit = circuit_on("pump")
    law, ambient = circuit.bellows[0], circuit.gas.pressure_Pa
    chambers = Chambers.of([law], ambient)
    for pressure in np.linspace(0.15, 1.1, 41) * ambient:
        held, slope = content(law, np.array([pressure]), ambient)
        found, found_slope = chambers.pressure(held)
        assert found[0] == pytest.approx(pressure, rel=5e-6)
        assert found_slope[0] == pytest.approx(1.0 / slope[0], rel=1e-3)


def test_a_syringe_alone_follows_boyle() -> None:
    """p (V_d + V_s) stays: 20 mL pulled to 320 mL with every leak shut ends at p0/16 (isothermal)."""
    circuit = circuit_on("syringe")
    law = supply_law(circuit.pattern.supply, circuit.gas)
    stroke = syringe_strokes(law)[0]  # type: ignore[arg-type]
    assert stroke.manifold.dead_end_Pa == pytest.approx(circuit.gas.pressure_Pa / 16.0)
    assert stroke.manifold.swept_m3_s == pytest.approx(150e-6)
