"""The cut of a period, the table of vacuum and the ramp against closed forms."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from gaitlab.errors import InputError
from gaitlab.gait.schedule import gait_table, schedule_of, settle_table, vacuum_table
from gaitlab.ring.waves import Waves

K = 256


def sines(lags: tuple[float, ...] = (0.0, 0.2)) -> Waves:
    phase = np.arange(K) / K
    rows = np.stack([25e3 * (1.0 + np.sin(2 * np.pi * (phase - lag))) for lag in lags])
    return Waves(0.7131, tuple("ab"[: len(lags)]), rows)


@given(period=st.floats(0.05, 20.0), step=st.floats(1e-4, 2.4e-3))
def test_a_period_is_a_whole_number_of_steps_no_longer_than_asked(period: float, step: float) -> None:
    schedule = schedule_of(period, step)
    assert schedule.steps * schedule.step_s == pytest.approx(period, rel=1e-12)
    assert schedule.step_s <= step * (1 + 1e-6)
    assert schedule.samples >= 20


def test_the_step_is_hardly_shortened() -> None:
    schedule = schedule_of(0.7131, 1e-3)
    assert schedule.step_s == pytest.approx(1e-3, rel=0.012)


def test_too_short_a_period_is_refused() -> None:
    with pytest.raises(InputError, match="period must be at least 20 steps of 1 ms, got '15 ms'"):
        schedule_of(0.015, 1e-3)
    with pytest.raises(InputError, match="period must be"):
        schedule_of(float("nan"), 1e-3)


def test_table_is_the_wave_between_its_points() -> None:
    # The cubic through 256 points of a sine errs by (2π/K)⁴/384-like 1e-9 of the amplitude.
    phases = np.linspace(-0.3, 1.7, 331)
    table = vacuum_table(sines(), phases)
    expected = 25e3 * (1 + np.sin(2 * np.pi * (phases[:, None] - np.array([0.0, 0.2]))))
    np.testing.assert_allclose(table, expected, atol=1e-3)


def test_constant_rows_and_resting_waves_stay_constant() -> None:
    resting = Waves(float("nan"), ("a", "b"), np.array([[0.0], [40e3]]))
    np.testing.assert_array_equal(vacuum_table(resting, np.linspace(0, 1, 5)), [[0.0, 40e3]] * 5)


def test_no_vacuum_below_zero_where_a_steep_wave_touches_atmosphere() -> None:
    square = Waves(1.0, ("a",), np.where(np.arange(K) < K // 2, 50e3, 0.0)[None, :])
    assert vacuum_table(square, np.linspace(0, 1, 3001)).min() == 0.0


def test_later_start_shifts_the_table_only() -> None:
    schedule = schedule_of(0.7131, 1e-3)
    plain, later = (gait_table(sines(), schedule, phase) for phase in (0.0, 10 / schedule.steps))
    np.testing.assert_allclose(later, np.roll(plain, -10, axis=0), atol=1e-6)


def test_ramp_rises_from_rest_and_holds_the_start_phase() -> None:
    table = settle_table(sines(), 0.5, 1e-3, 0.25)
    assert table.shape == (500, 2)
    assert np.all(np.diff(table, axis=0) >= -1e-9)
    assert table[0, 0] < 1.0
    np.testing.assert_allclose(table[300:], np.broadcast_to(vacuum_table(sines(), np.array([0.25])), (200, 2)))
    assert settle_table(sines(), 0.0, 1e-3, 0.0).shape == (0, 2)
