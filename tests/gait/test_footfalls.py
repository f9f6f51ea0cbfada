"""Duty, stance and swing phase against constructed footfalls."""

from __future__ import annotations

import numpy as np
import pytest

from gaitlab.gait.footfalls import duty_factors, folded, stance_intervals, swing_phases

SAMPLES = 100


def stepping(stance_start: float, duty: float, periods: int = 3) -> np.ndarray:
    phase = (np.arange(periods * SAMPLES + 1) / SAMPLES - stance_start) % 1.0
    return np.asarray((phase + 1e-9) % 1.0 < duty)


def test_duty_and_stance_of_a_plain_step() -> None:
    loaded = stepping(0.2, 0.6)[:, None]
    assert duty_factors(loaded)[0] == pytest.approx(0.6, abs=1e-12)
    ((start, end),) = stance_intervals(folded(loaded, SAMPLES)[:, 0])
    assert (start, end) == (pytest.approx(0.2), pytest.approx(0.8))


def test_stance_across_the_period_end_and_a_later_start_phase() -> None:
    share = folded(stepping(0.7, 0.6)[:, None], SAMPLES)[:, 0]
    ((start, end),) = stance_intervals(share)
    assert (start, end) == (pytest.approx(0.7), pytest.approx(0.3))
    ((start, end),) = stance_intervals(share, start_phase=0.5)
    assert (start, end) == (pytest.approx(0.2), pytest.approx(0.8))


def test_two_steps_a_period_always_and_never() -> None:
    share = np.zeros(SAMPLES)
    share[10:30] = share[60:90] = 1.0
    assert stance_intervals(share) == ((0.1, 0.3), (0.6, 0.9))
    assert stance_intervals(np.ones(SAMPLES)) == ((0.0, 1.0),)
    assert stance_intervals(np.zeros(SAMPLES)) == ()


def test_chatter_is_no_step() -> None:
    share = folded(stepping(0.2, 0.6)[:, None], SAMPLES)[:, 0]
    share[40] = 0.0
    share[95:97] = 1.0
    assert stance_intervals(share) == ((0.2, 0.8),)


def test_a_touch_across_the_period_end_that_is_too_short_is_dropped() -> None:
    share = np.zeros(SAMPLES)
    share[[99, 0]] = 1.0
    assert stance_intervals(share) == ()


@pytest.mark.parametrize("stance_start", [0.0, 0.3, 0.85])
def test_swing_phase_is_the_middle_of_the_swing(stance_start: float) -> None:
    duty = 0.7
    loaded = stepping(stance_start, duty)[:, None]
    phase, mark = swing_phases(loaded, np.zeros((len(loaded), 1, 2)), SAMPLES)
    middle = (stance_start + duty + (1 - duty) / 2) % 1.0
    assert abs((phase[0] - middle + 0.5) % 1.0 - 0.5) < 0.5 / SAMPLES + 1e-9
    # Closed form of the first harmonic of a rectangle of width 1 − d: sin(π (1 − d)) / (π (1 − d)).
    assert mark[0] == pytest.approx(np.sinc(1 - duty), rel=1 / SAMPLES)


def test_a_foot_that_never_lifts_swings_when_it_is_carried_forward() -> None:
    t = np.arange(2 * SAMPLES + 1) / SAMPLES
    velocity = np.stack([0.03 + np.cos(2 * np.pi * (t - 0.4)), 0.1 * np.sin(2 * np.pi * t)], axis=1)[:, None, :]
    phase, mark = swing_phases(np.ones((len(t), 1), dtype=bool), velocity, SAMPLES)
    assert phase[0] == pytest.approx(0.4, abs=1e-9)
    assert mark[0] == pytest.approx(np.pi / 4, rel=1e-3)  # ∫cos² over ∫|cos|


def test_a_foot_that_does_nothing_has_no_mark() -> None:
    _, mark = swing_phases(np.ones((SAMPLES + 1, 2), dtype=bool), np.zeros((SAMPLES + 1, 2, 2)), SAMPLES)
    np.testing.assert_array_equal(mark, 0.0)
