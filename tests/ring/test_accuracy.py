"""The period and the waves against tight tolerances and against scipy's integrators; gas in against gas out."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from gaitlab.ring.circuit import Circuit, circuit_of
from gaitlab.ring.periodic import Cycle, Settings, nudged, settled
from gaitlab.ring.reading import pumped
from gaitlab.ring.waves import FloatArray
from tests.ring.robots import in_order, tray

TIGHT = Settings(loose=1e-4, tight=1e-7, near=1e-3, closed=1e-7)


def cycle_of(circuit: Circuit, settings: Settings) -> Cycle:
    followed = settled(circuit, nudged(circuit, circuit.rest(), 1e-2), settings)
    assert followed.cycle is not None
    return followed.cycle


@pytest.fixture(scope="module")
def circuit() -> Circuit:
    return circuit_of(tray(), in_order(tray()))


@pytest.fixture(scope="module")
def tight(circuit: Circuit) -> Cycle:
    """The reference: errors of a step two thousand times smaller than the default's."""
    return cycle_of(circuit, TIGHT)


@pytest.mark.slow
def test_period_to_a_tenth_of_a_percent(circuit: Circuit, tight: Cycle) -> None:
    """Default settings against the reference: 0.1 % is asked, ten times better is found."""
    assert cycle_of(circuit, Settings()).period_s == pytest.approx(tight.period_s, rel=1e-4)


@pytest.mark.slow
def test_period_against_lsoda(circuit: Circuit, tight: Cycle) -> None:
    """scipy's LSODA, without our Jacobian, from the reference's start at rtol 1e-8: back after the same period."""
    scale, net = circuit.scale(), circuit.network
    begin = tight.states(np.zeros(1))[0] / scale
    level = begin[0]

    def crossing(_: float, y: FloatArray) -> float:
        return float(y[0] - level)

    crossing.direction = -1.0  # type: ignore[attr-defined]
    found = solve_ivp(
        lambda _, y: net.rates(y * scale) / scale,
        (0.0, 1.05 * tight.period_s),
        begin,
        method="LSODA",
        rtol=1e-8,
        atol=1e-9,
        events=crossing,
    )
    period = found.t_events[0][-1]
    assert period == pytest.approx(tight.period_s, rel=2e-5)
    # Membranes move in 8 ms, so a cut 1e-5 of a period late moves them by 1e-3; pressures and gas return to 2e-5.
    n = net.stages
    moved = np.abs(found.y_events[0][-1] - begin)
    assert np.max(np.delete(moved, np.arange(n, 2 * n))) < 1e-4


@pytest.mark.slow
def test_gas_in_is_gas_out(circuit: Circuit, tight: Cycle) -> None:
    """What the valves let in over a period is what the pump takes out, to 1e-6, by a quadrature of its own (even sums)."""
    count = 16_384
    states = tight.states(np.arange(count) / count)
    out = float(pumped(circuit, states).mean()) * tight.period_s
    into = float(np.mean([let_in(circuit, state) for state in states])) * tight.period_s
    held = float(np.abs(tight.jump()[:5] @ circuit.network.volume_m3)) / circuit.gas.RT
    assert into == pytest.approx(out, rel=1e-6)
    assert held < 1e-6 * out


def let_in(circuit: Circuit, state: FloatArray) -> float:
    """Mass flow [kg/s] from the air through all valves."""
    net, n = circuit.network, circuit.network.stages
    output, opening, content, manifold, volume = net.split(state)
    places = net.places
    pressure = np.concatenate((output, net.chambers.pressure(content)[0], [manifold / volume, net.ambient_Pa]))
    flow = net.flows.flow(pressure[places.side_a], pressure[places.side_b])[0]
    return float(opening @ flow[n : 2 * n])
