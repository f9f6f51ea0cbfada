"""What is read off a wave, on waves whose answer is known by formula."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from gaitlab.ring import measures
from gaitlab.ring.sequence import ideal_phases, raised_cosine

K = 512
TIME = np.arange(K) / K


def waves_at(phases: list[float]) -> np.ndarray:
    return raised_cosine(TIME - np.array(phases)[:, None], 40e3)


@settings(deadline=None, max_examples=60)
@given(st.lists(st.floats(0.0, 0.999), min_size=2, max_size=7))
def test_phases_of_shifted_waves(phases: list[float]) -> None:
    """Shifted copies of one wave: each lag is the shift, whatever it is."""
    found = measures.phases(waves_at(phases))
    apart = np.mod(found - (np.array(phases) - phases[0]) + 0.5, 1.0) - 0.5
    assert np.max(np.abs(apart)) < 1e-5
    assert np.all((found >= 0.0) & (found < 1.0))


def test_duty_and_edges_of_a_raised_cosine() -> None:
    """Half the period above half swing; 10–90 % in 2 asin(0.8)/(2π) of a period, both ways."""
    wave = waves_at([0.3])
    rise, fall = measures.rise_and_fall(wave)
    expected = 2.0 * np.arcsin(0.8) / (2.0 * np.pi)
    assert measures.duty(wave)[0] == pytest.approx(0.5, abs=1e-4)
    assert (rise[0], fall[0]) == pytest.approx((expected, expected), abs=1e-4)


def test_duty_of_a_square_wave_with_ramps() -> None:
    """A trapezoid: up from 0.1 to 0.2, down from 0.5 to 0.6: above half from 0.15 to 0.55."""
    wave = 1e4 * np.interp(TIME, [0.0, 0.1, 0.2, 0.5, 0.6, 1.0], [0.0, 0.0, 1.0, 1.0, 0.0, 0.0])
    assert measures.duty(wave[None, :])[0] == pytest.approx(0.4, abs=1e-9)
    assert measures.evacuation_edge(wave) == pytest.approx(0.15, abs=1e-9)
    rise, fall = measures.rise_and_fall(wave[None, :])
    assert (rise[0], fall[0]) == pytest.approx((0.08, 0.08), abs=1e-9)


def test_a_ripple_on_top_does_not_move_the_edge() -> None:
    """Of several passages through half swing the one after the longest stay below counts."""
    wave = 1e4 * np.interp(TIME, [0.0, 0.4, 0.5, 0.7, 0.72, 0.74, 0.9, 1.0], [0.0, 0.0, 1.0, 1.0, 0.4, 1.0, 1.0, 0.0])
    assert measures.evacuation_edge(wave) == pytest.approx(0.45, abs=1e-9)


def test_a_flat_output_has_no_edge() -> None:
    """Below a pascal of swing there is no wave, and phases are nan, never a number."""
    waves = np.vstack((waves_at([0.0]), np.full(K, 2e4)))
    assert np.isnan(measures.phases(waves)[1]) and np.isnan(measures.duty(waves)[1])
    assert measures.harmonic(measures.phases(waves)) == 0


@pytest.mark.parametrize("stages", [3, 5, 7, 9, 15, 31])
def test_harmonic_of_ideal_rings(stages: int) -> None:
    """Lags of half a period plus h/(2N): every h below N is told."""
    for h in range(1, stages, 2):
        lag = 0.5 + h / (2.0 * stages)
        assert measures.harmonic(np.mod(np.arange(stages) * lag, 1.0)) == h
    assert measures.harmonic(ideal_phases("natural", stages)) == 1
