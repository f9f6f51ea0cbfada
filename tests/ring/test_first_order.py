"""The network code on first-order stages, against the closed forms of the ring oscillator.

Onset K = sec(π/N), ωRC = tan(π/N) (N = 3: gain 2, ω√3: Razavi, Design of Analog CMOS Integrated Circuits, from
memory); the comparator limit q + q^−(N−1) = 2 and the unequal rise and fall are derived in `first_order`.
"""

from __future__ import annotations

import math

import numpy as np
import pytest

from tests.ring.first_order import (
    comparator_period,
    first_order_ring,
    simulated,
    state_of,
    unequal_period,
)


def growth(stages: int, gain: float) -> complex:
    """The fastest-growing eigenvalue at mid-level."""
    network = first_order_ring(stages, gain)
    middle = state_of(np.full(stages, 0.5), np.full(stages, 0.5))
    values = np.linalg.eigvals(network.linearised(middle).matrix()[: 2 * stages, : 2 * stages])
    return complex(values[np.argmax(values.real + 1e-6 * values.imag)])


@pytest.mark.parametrize(("stages", "gain", "omega"), [(3, 2.0, 1.732051), (5, 1.236068, 0.726543)])
def test_onset_table(stages: int, gain: float, omega: float) -> None:
    """The printed table, to its digits."""
    value = growth(stages, gain)
    assert abs(value.real) < 1e-6
    assert value.imag == pytest.approx(omega, abs=1e-6)


@pytest.mark.parametrize("stages", [3, 5, 7, 9, 15, 31])
def test_onset_of_any_ring(stages: int) -> None:
    """K = sec(π/N) is where growth begins: a little less dies, a little more grows."""
    needed = 1.0 / math.cos(math.pi / stages)
    assert growth(stages, 0.99 * needed).real < 0.0 < growth(stages, 1.01 * needed).real
    assert growth(stages, needed).imag == pytest.approx(math.tan(math.pi / stages), rel=1e-6)


@pytest.mark.parametrize(("stages", "period"), [(3, 2 * math.pi / math.sqrt(3.0)), (5, 8.64806)])
def test_period_just_above_onset(stages: int, period: float) -> None:
    """Started above onset the network settles at T/RC = 2π/tan(π/N) (3.62760, 8.64806)."""
    gain = 1.002 / math.cos(math.pi / stages)
    found, _ = simulated(first_order_ring(stages, gain), level=0.5, cuts=12, tolerance=1e-5)
    assert found == pytest.approx(period, rel=2e-3)


@pytest.mark.parametrize(("stages", "printed"), [(3, 2.88727), (5, 6.56256), (7, None), (9, None)])
def test_comparator_period(stages: int, printed: float | None) -> None:
    """q + q^−(N−1) = 2, T = 2 N ln q: N = 3 and 5 as printed, more from the equation."""
    period = comparator_period(stages)
    if printed is not None:
        assert period == pytest.approx(printed, abs=6e-6)
    found, _ = simulated(first_order_ring(stages, 1e3), level=0.5, cuts=6, tolerance=1e-5)
    assert found == pytest.approx(period, rel=1e-4)


def test_three_comparators_turn_on_the_golden_ratio() -> None:
    """N = 3: q + q⁻² = 2 has q = (1 + √5)/2."""
    assert comparator_period(3) == pytest.approx(6.0 * math.log((1.0 + math.sqrt(5.0)) / 2.0), rel=1e-12)


@pytest.mark.parametrize(
    ("stages", "up_s", "down_s", "threshold", "period", "peak"),
    [(3, 1.0, 0.1, 0.5, 2.20416, 0.76018), (5, 1.0, 1.0, 0.4, 6.80050, 0.96048), (5, 1.0, 0.1, 0.5, 3.75324, 0.88858)],
)
def test_unequal_rise_and_fall(
    stages: int, up_s: float, down_s: float, threshold: float, period: float, peak: float
) -> None:
    """Slow pull-up, fast pull-down: period and the peak that never reaches the supply."""
    by_equations = unequal_period(stages, up_s, down_s, threshold)
    assert by_equations == pytest.approx((period, peak), abs=6e-6)
    network = first_order_ring(stages, 1e4, up_s=up_s, down_s=down_s, threshold=threshold)
    found = simulated(network, level=0.5, cuts=6, tolerance=1e-5)
    assert found == pytest.approx((period, peak), rel=1e-4)


def test_instant_fall_leaves_only_the_rise() -> None:
    """Limit τd → 0: T → N τu ln(1/(1 − θ))."""
    found, _ = simulated(first_order_ring(5, 1e4, down_s=1e-3, threshold=0.5), level=0.5, cuts=6, tolerance=1e-5)
    assert found == pytest.approx(5.0 * math.log(2.0), rel=5e-3)
