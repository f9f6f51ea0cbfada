"""Rings as a whole: what they are called, how they answer to pump and load, and that turning one only shifts time."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from gaitlab.ring.circuit import circuit_of
from gaitlab.ring.periodic import nudged
from gaitlab.ring.solve import ring_run, run_from
from gaitlab.ring.waves import RingRun
from gaitlab.robot.circuit import FixedVacuum, SquareDuct, StageOverride
from gaitlab.robot.records import Robot
from gaitlab.wiring.wiring import Wiring, wiring_from_text
from tests.ring.robots import in_order, tray, unloaded, with_ring, with_supply, with_valve


@pytest.fixture(scope="module")
def base() -> RingRun:
    """The row of five, inlets in order."""
    return ring_run(tray(), in_order(tray()))


def test_the_row_runs(base: RingRun) -> None:
    """It oscillates at its fundamental, levels clear of the valves, everything finite and in range."""
    assert (base.outcome, base.harmonic) == ("oscillates", 1)
    assert 0.5 < base.period_s < 2.0
    assert base.output_vacuum_Pa.shape == (5, 512) and base.waves.vacuum_Pa.shape == (5, 512)
    assert np.all(base.peak_vacuum_Pa < base.supply_mean_Pa * 1.02) and np.all(base.least_vacuum_Pa > 0.0)
    assert dict(base.details)["high_margin_Pa"] > 5e3 and dict(base.details)["low_margin_Pa"] > 5e3
    assert base.supply_min_Pa <= base.supply_mean_Pa < 60e3
    assert base.phase[0] == 0.0 and np.all((base.phase >= 0.0) & (base.phase < 1.0))


def test_stages_lag_by_about_216_degrees(base: RingRun) -> None:
    """Equal stages, nearly equal loads: each lag within 3° of π + π/5, their sum exactly three turns (arithmetic)."""
    lags = np.mod(np.diff(np.append(base.phase, 1.0)), 1.0) * 360.0
    assert lags == pytest.approx(np.full(5, 216.0), abs=3.0)
    assert lags.sum() == pytest.approx(1080.0)


def test_the_bellows_feels_the_output_and_not_the_supply(base: RingRun) -> None:
    """A bellows behind a short wide tube peaks with its output, below the supply's dead end."""
    row = base.waves.vacuum_Pa[base.waves.inlets.index("a")]
    assert row.max() == pytest.approx(base.peak_vacuum_Pa[0], rel=5e-3)
    assert row.max() < 0.9 * 60e3


@pytest.mark.parametrize("steps", [1, 3])
def test_turning_the_wiring_shifts_time_only(base: RingRun, steps: int) -> None:
    """Outputs renumbered: same period to the bit, and the inlets' waves are the same up to one shift in time."""
    turned = ring_run(tray(), in_order(tray()).turned(steps, 5))
    assert turned.period_s == base.period_s
    shift = base.phase[(-steps) % 5]
    at = np.arange(512) / 512
    for k in range(5):
        expected = np.interp(
            np.mod(at + shift, 1.0), np.append(at, 1.0), np.append(base.waves.vacuum_Pa[k], base.waves.vacuum_Pa[k, 0])
        )
        assert turned.waves.vacuum_Pa[k] == pytest.approx(expected, abs=150.0)


def test_a_turned_ring_solved_anew_agrees(base: RingRun) -> None:
    """Without the shared pattern, counted from another stage and started differently: the same period and levels."""
    circuit = circuit_of(tray(), in_order(tray()).turned(2, 5))
    alone = run_from(circuit, nudged(circuit, circuit.rest(), 2e-2))
    assert alone.period_s == pytest.approx(base.period_s, rel=2e-4)
    assert np.roll(alone.peak_vacuum_Pa, -2) == pytest.approx(base.peak_vacuum_Pa, abs=30.0)


def test_equal_patterns_share_their_bytes() -> None:
    """Legs a and e hang on equal tubes: swapped, the ring is the same run, byte for byte, from one solve."""
    kept: dict[str, RingRun] = {}
    one = ring_run(tray(), wiring_from_text("a=1 b=3 c=5 d=2 e=4", tray().inlets(), 5), runs=kept)
    other = ring_run(tray(), wiring_from_text("e=1 b=3 c=5 d=2 a=4", tray().inlets(), 5), runs=kept)
    assert len(kept) == 1
    assert one.output_vacuum_Pa.tobytes() == other.output_vacuum_Pa.tobytes()
    rows = dict(zip(other.waves.inlets, other.waves.vacuum_Pa, strict=True))
    assert rows["e"].tobytes() == one.waves.vacuum_Pa[0].tobytes()


def test_period_falls_with_a_stronger_pump(base: RingRun) -> None:
    """A pump of twice the flow and one of a third, both sound: the weaker, the slower, and the less vacuum."""
    weak, strong = (
        ring_run(with_supply(tray(), free_flow_m3_s=factor * tray().supply.free_flow_m3_s), in_order(tray()))  # type: ignore[union-attr]
        for factor in (0.3, 2.0)
    )
    assert weak.period_s > base.period_s
    assert weak.supply_mean_Pa < base.supply_mean_Pa < strong.supply_mean_Pa


def test_period_rises_with_added_load(base: RingRun) -> None:
    """A millilitre more at every port slows the ring by about the ratio of volumes (constant flow: T ∝ V)."""
    heavier = ring_run(with_ring(tray(), port_m3=1.6e-6), in_order(tray()))
    assert 1.1 < heavier.period_s / base.period_s < 1.45


def test_squeezing_one_load_changes_the_frequency(base: RingRun) -> None:
    """Hoang et al. 2024 (doi 10.1007/s10439-024-03628-4): squeezing a bellows on one output changes the ring's frequency.

    A smaller port on one output stands for the squeezed volume: the ring runs faster.
    """
    squeezed = ring_run(with_ring(tray(), overrides=(StageOverride(3, port_m3=0.05e-6),)), in_order(tray()))
    assert squeezed.period_s < 0.99 * base.period_s


def test_an_unloaded_ring_is_quicker(base: RingRun) -> None:
    """All inlets open: outputs move only their ports, and the waves at the inlets are flat."""
    bare = ring_run(tray(), unloaded(tray()))
    assert bare.outcome == "oscillates" and bare.period_s < 0.5 * base.period_s
    assert not bare.waves.vacuum_Pa.any()


def test_held_and_open_inlets(base: RingRun) -> None:
    """Held: the supply's mean; open: nothing; both constant."""
    wiring = wiring_from_text("a=1 b=3 c=5 d=held e=open", tray().inlets(), 5)
    run = ring_run(tray(), wiring)
    rows = dict(zip(run.waves.inlets, run.waves.vacuum_Pa, strict=True))
    assert np.all(rows["d"] == run.supply_mean_Pa) and not rows["e"].any()
    assert run.period_s < base.period_s


def with_stages(stages: int) -> tuple[Robot, Wiring]:
    robot = with_ring(tray(), stages=stages)
    return robot, in_order(robot)


@pytest.mark.parametrize("stages", [2, 4, 6])
def test_even_rings_latch_in_both_states(stages: int) -> None:
    """N even: started with the odd stages high or the even ones, the ring stays, alternating, as it was started."""
    robot, wiring = with_stages(stages)
    circuit = circuit_of(robot, wiring)
    low, ambient = circuit.manifold.dead_end_Pa, circuit.gas.pressure_Pa
    for odd_high in (True, False):
        high = (np.arange(stages) % 2 == 0) == odd_high
        start = circuit.state(np.where(high, low, ambient), low, np.where(high, 0.0, 1.0))
        run = run_from(circuit, start)
        assert run.outcome == "latches" and np.isnan(run.period_s)
        assert np.all((run.peak_vacuum_Pa > 30e3) == high)
        assert run.output_vacuum_Pa.shape == (stages, 1)


def test_a_single_stage_settles() -> None:
    """N = 1 does nothing: it finds its own mid-level."""
    robot, wiring = with_stages(1)
    run = ring_run(robot, wiring)
    assert run.outcome == "settles" and run.remedy


def test_too_little_gain_settles() -> None:
    """Three stages whose valves open over 70 kPa, without sealing or hysteresis: below gain 2, at rest at mid-level."""
    robot = with_valve(
        with_ring(with_supply(tray(), FixedVacuum(60e3)), stages=3),
        threshold_Pa=1e3,
        opening_span_Pa=95e3,
        sealing=0.0,
        hysteresis_Pa=0.0,
    )
    run = ring_run(robot, in_order(robot))
    assert run.outcome == "settles"
    assert np.ptp(run.peak_vacuum_Pa) < 2e3


@pytest.mark.parametrize("stage", [2, 5])
def test_a_stage_that_never_lets_go_is_named(stage: int) -> None:
    """One valve as built five times too narrow: the ring settles, and the stage is named as the robot counts it."""
    narrow = replace(tray().ring.valve, open=SquareDuct(0.2e-3, 6e-3))
    robot = with_ring(tray(), overrides=(StageOverride(stage, valve=narrow),))
    run = ring_run(robot, in_order(robot))
    assert run.outcome == "settles" and "beaten_stage" in run.remedy
    assert dict(run.details)["beaten_stage"] == stage


def test_too_weak_a_supply() -> None:
    """A dead end of 20 kPa cannot lift valves that open at 18 + 3 kPa and seal."""
    run = ring_run(with_supply(tray(), dead_end_vacuum_Pa=20e3), in_order(tray()))
    assert run.outcome == "too_weak" and "vacuum" in run.remedy
    assert run.peak_vacuum_Pa == pytest.approx(np.full(5, 20e3), rel=0.01)


def test_too_small_a_pump_starves_the_ring() -> None:
    """A ninth of the pump: the manifold sags below what lifts a valve, though its dead end would do."""
    run = ring_run(with_supply(tray(), free_flow_m3_s=1.0e-3 / 60.0), in_order(tray()))
    assert run.outcome == "starves" and "pump" in run.remedy


def test_a_slow_buffer_is_waited_for_without_simulating_it_all() -> None:
    """A litre of buffer changes ripple and start-up, not the period (the mean draw is the same)."""
    run = ring_run(with_supply(tray(), buffer_m3=1e-3), in_order(tray()))
    small = ring_run(tray(), in_order(tray()))
    assert run.period_s == pytest.approx(small.period_s, rel=3e-3)
    assert run.start_up_s > 2.0 * small.start_up_s
    assert np.ptp(run.supply_vacuum_Pa) < 0.2 * np.ptp(small.supply_vacuum_Pa)


def test_same_input_same_bytes(base: RingRun) -> None:
    """Solved again: every array equal to the bit."""
    again = ring_run(tray(), in_order(tray()))
    assert again.output_vacuum_Pa.tobytes() == base.output_vacuum_Pa.tobytes()
    assert replace(again, output_vacuum_Pa=base.output_vacuum_Pa).period_s == base.period_s
