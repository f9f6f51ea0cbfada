"""Measures against closed forms on constructed motion: straight lines, circles, dragged and rolling feet."""

from __future__ import annotations

import numpy as np
import pytest

from gaitlab.gait.measures import air_kg_per_m, mean_over_periods, settled, slid_m, slip, steps_per_period

SAMPLES = 50


def on_circle(radius_m: float, turn_rad: float, periods: int, start_yaw: float = 0.0) -> tuple[np.ndarray, np.ndarray]:
    yaw = start_yaw + turn_rad * np.arange(periods * SAMPLES + 1) / SAMPLES
    return radius_m * np.stack([np.sin(yaw), -np.cos(yaw)], axis=1), yaw


def test_straight_walk_with_heading_is_split_exactly() -> None:
    t = np.arange(3 * SAMPLES + 1) / SAMPLES
    heading = 0.7
    forward, left = 0.012, -0.003
    track = np.outer(t, [forward, left]) @ np.array(
        [[np.cos(heading), np.sin(heading)], [-np.sin(heading), np.cos(heading)]]
    )
    steps = steps_per_period(track, np.full(len(t), heading), SAMPLES)
    np.testing.assert_allclose(steps.forward_m, forward, rtol=1e-12)
    np.testing.assert_allclose(steps.left_m, left, rtol=1e-12)
    np.testing.assert_allclose(steps.turn_rad, 0.0, atol=1e-15)


@pytest.mark.parametrize("turn_rad", [-0.4, 0.05, 1.1])
def test_even_curvature_has_the_chord_as_travel_and_no_drift(turn_rad: float) -> None:
    # Closed form: a chord of a circle is 2 r sin(θ/2) long and lies along the heading half way.
    steps = steps_per_period(*on_circle(0.3, turn_rad, 4), SAMPLES)
    np.testing.assert_allclose(steps.forward_m, 2 * 0.3 * np.sin(turn_rad / 2), rtol=1e-12)
    np.testing.assert_allclose(steps.left_m, 0.0, atol=1e-12)
    np.testing.assert_allclose(steps.turn_rad, turn_rad, rtol=1e-12)


def test_yaw_may_wrap_and_the_start_heading_does_not_matter() -> None:
    plain = steps_per_period(*on_circle(0.2, 0.9, 5), SAMPLES)
    track, yaw = on_circle(0.2, 0.9, 5, start_yaw=3.0)
    wrapped = steps_per_period(track, (yaw + np.pi) % (2 * np.pi) - np.pi, SAMPLES)
    np.testing.assert_allclose(wrapped.forward_m, plain.forward_m, rtol=1e-12)
    np.testing.assert_allclose(wrapped.turn_rad, plain.turn_rad, rtol=1e-12)


def test_yawing_head_is_measured_along_its_mean_heading() -> None:
    # A head that swings ±20° about straight ahead travels straight ahead, whatever the phase at which counting starts.
    t = np.arange(4 * SAMPLES + 1) / SAMPLES
    for phase in (0.0, 0.25, 0.6):
        yaw = np.deg2rad(20) * np.sin(2 * np.pi * (t + phase))
        steps = steps_per_period(np.stack([0.01 * t, 0 * t], axis=1), yaw, SAMPLES)
        np.testing.assert_allclose(steps.forward_m, 0.01, rtol=1e-9)
        np.testing.assert_allclose(steps.left_m, 0.0, atol=1e-10)


def test_mirrored_track_keeps_travel_and_negates_drift_and_turn() -> None:
    rng = np.random.default_rng(3)
    track, yaw = (
        np.cumsum(rng.normal(size=(3 * SAMPLES + 1, 2)), axis=0),
        0.1 * np.cumsum(rng.normal(size=3 * SAMPLES + 1)),
    )
    plain, mirrored = (steps_per_period(track * [1, s], yaw * s, SAMPLES) for s in (1, -1))
    np.testing.assert_allclose(mirrored.forward_m, plain.forward_m, atol=1e-12)
    np.testing.assert_allclose(mirrored.left_m, -plain.left_m, atol=1e-12)
    np.testing.assert_allclose(mirrored.turn_rad, -plain.turn_rad, atol=1e-12)


def test_settled_needs_enough_periods_and_little_scatter() -> None:
    assert not settled(np.array([0.01, 0.01]), periods=3, scatter=0.05)
    assert settled(np.array([0.5, 0.0100, 0.0101, 0.0100]), periods=3, scatter=0.05)
    assert not settled(np.array([0.010, 0.012, 0.010]), periods=3, scatter=0.05)
    assert settled(np.array([1e-5, -1e-4, 1e-4]), periods=3, scatter=0.05)  # stands still within 0.2 mm


def test_dragged_feet_slip_one_and_planted_feet_zero() -> None:
    dragged = np.zeros((101, 3, 2))
    dragged[..., 0] = 0.02  # m/s for one second
    loaded = np.ones((101, 3), dtype=bool)
    assert slip(dragged, loaded, 0.01, 0.02) == pytest.approx(1.0, rel=1e-12)
    assert slip(0 * dragged, loaded, 0.01, 0.02) == 0.0


def test_slid_distance_of_an_accelerating_foot() -> None:
    # Closed form: v = a t slides a t²/2; the trapezoid is exact for a speed that rises evenly.
    t = np.linspace(0.0, 1.0, 51)
    speed = np.stack([0.3 * t, 0.4 * t], axis=1)[:, None, :]
    assert slid_m(speed, np.ones((51, 1), dtype=bool), 0.02).sum() == pytest.approx(0.25, rel=1e-12)


def test_a_foot_in_the_air_slides_nowhere_and_lack_of_travel_has_no_slip() -> None:
    speed = np.ones((11, 1, 2))
    air = np.zeros((11, 1), dtype=bool)
    assert slid_m(speed, air, 0.1).sum() == 0.0
    assert np.isnan(slip(speed, air, 0.1, 0.01))
    assert np.isnan(slip(speed, ~air, 0.1, 0.0))


def test_means_and_air_per_metre() -> None:
    assert mean_over_periods(np.linspace(0.0, 2.0, 21)) == pytest.approx(1.0, rel=1e-12)
    assert air_kg_per_m(2e-6, -0.01) == pytest.approx(2e-4, rel=1e-12)
    assert np.isnan(air_kg_per_m(2e-6, 0.0))
