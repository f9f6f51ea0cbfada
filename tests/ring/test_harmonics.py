"""Rings started from several states: small ones always fall back, a long one can carry more edges."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from gaitlab.air.valve import valve_numbers
from gaitlab.ring.circuit import circuit_of, circuit_of_pattern
from gaitlab.ring.harmonics import edges, runs_from_several, starts
from gaitlab.ring.pattern import load_pattern
from gaitlab.ring.periodic import nudged
from gaitlab.ring.solve import run_from
from gaitlab.ring.verdict import travelling_edges
from gaitlab.robot.circuit import StageOverride
from gaitlab.robot.records import Robot
from tests.ring.robots import in_order, tray, unloaded, with_ring, with_supply


def plain(stages: int) -> Robot:
    """N equal stages with 3 mL at each port and a pump to match."""
    robot = with_ring(tray(), stages=stages, port_m3=3e-6)
    return with_supply(robot, free_flow_m3_s=stages * 3e-5)


@pytest.mark.parametrize("stages", [3, 5, 7])
def test_small_prime_rings_always_fall_back(stages: int) -> None:
    """From rest, evacuated, and any number of edges: one period, one rhythm."""
    found = runs_from_several(load_pattern(plain(stages), unloaded(plain(stages))))
    periods = np.array([run.period_s for _, run in found])
    assert len(found) == 2 + (stages - 1) // 2
    assert {run.outcome for _, run in found} == {"oscillates"}
    assert periods == pytest.approx(np.full(len(found), periods[0]), rel=1e-3)


def test_edges_are_counted_as_put() -> None:
    """The start with h edges has h neighbours on one side of the level."""
    circuit = circuit_of_pattern(load_pattern(plain(9), unloaded(plain(9))))
    for h in (1, 3, 5, 7):
        assert travelling_edges(circuit, edges(circuit, h)) == h
    assert [s.name for s in starts(circuit)] == ["at rest", "evacuated", "one edge", "3 edges", "5 edges", "7 edges"]


def test_an_output_is_held_against_the_valve_it_feeds() -> None:
    """Valve 2 switches at 30 kPa, the others at 16: output 2 at 25 kPa opens valve 3 and counts as high, by hand one edge."""
    valve = replace(valve_numbers(tray().ring.valve), threshold_Pa=13e3, opening_span_Pa=6e3)
    stiff = StageOverride(2, valve=replace(valve, threshold_Pa=27e3))
    circuit = circuit_of(with_ring(tray(), valve=valve, overrides=(stiff,)), in_order(tray()))
    ambient = circuit.gas.pressure_Pa
    state = circuit.state(ambient - 1e3 * np.array([0.0, 25.0, 0.0, 0.0, 25.0]), ambient - 50e3, 0.0)
    assert travelling_edges(circuit, state) == 1


@pytest.mark.slow
def test_a_long_ring_can_carry_three_edges() -> None:
    """Fifteen equal stages started with three even edges keep them (composite N, as the theory of odd rings has it)."""
    circuit = circuit_of_pattern(load_pattern(plain(15), unloaded(plain(15))))
    run = run_from(circuit, nudged(circuit, edges(circuit, 3), 1e-2))
    assert (run.outcome, run.harmonic) == ("higher_harmonic", 3)
    assert "edge" in run.remedy
    assert run_from(circuit, nudged(circuit, circuit.rest(), 1e-2)).outcome == "oscillates"
