"""The wave read from swing phases of known waves."""

from __future__ import annotations

import itertools

import numpy as np
import pytest

from gaitlab.gait.wave_reading import COHERENCE_MIN, wave_reading

ALONG = 0.034 * np.arange(2, -3, -1)  # five legs, head first
ONE_ROW = np.zeros(5)
PLAIN = np.ones(5)


@pytest.mark.parametrize(("slope", "direction"), [(0.2, "retrograde"), (-0.2, "direct"), (0.4, "retrograde")])
def test_smooth_waves_are_named_with_their_length(slope: float, direction: str) -> None:
    # Direct: the swing runs tail → head, so it comes later the nearer the head, falling with the place from the head.
    for offset in (0.0, 0.37):
        reading = wave_reading((offset + slope * np.arange(5)) % 1.0, PLAIN, ALONG, ONE_ROW)
        assert reading.direction == direction
        assert reading.wavelength_legs == pytest.approx(1 / abs(slope), rel=1e-9)
        assert reading.coherence == pytest.approx(1.0, rel=1e-9)


def test_mirroring_time_turns_the_direction() -> None:
    phases = np.array([0.0, 0.18, 0.43, 0.58, 0.81])
    there, back = (wave_reading(s * phases % 1.0, PLAIN, ALONG, ONE_ROW) for s in (1, -1))
    assert (there.direction, back.direction) == ("retrograde", "direct")
    assert there.coherence == pytest.approx(back.coherence, rel=1e-9)


def test_all_together_and_antiphase_neighbours_stand() -> None:
    assert wave_reading(np.full(5, 0.3), PLAIN, ALONG, ONE_ROW).direction == "standing"
    assert wave_reading(0.5 * np.arange(5) % 1.0, PLAIN, ALONG, ONE_ROW).direction == "standing"


def test_two_rows_in_antiphase_share_one_wave() -> None:
    along = np.repeat([0.05, 0.0, -0.05], 2)
    row = np.tile([0.0, 1.0], 3)
    phase = (np.repeat([0.0, 1 / 3, 2 / 3], 2) + np.tile([0.0, 0.5], 3)) % 1.0
    reading = wave_reading(phase, np.ones(6), along, row)
    assert reading.direction == "retrograde"
    assert reading.wavelength_legs == pytest.approx(3.0, rel=5e-3)
    assert reading.coherence == pytest.approx(1.0, abs=1e-4)


def test_orders_of_five_phases_that_count_as_waves() -> None:
    # Brute force over all 24 orders: the two smooth waves, the two of two turns, and one swap away from those.
    coherences = [
        wave_reading(np.array((0, *order)) / 5, PLAIN, ALONG, ONE_ROW).coherence
        for order in itertools.permutations(range(1, 5))
    ]
    assert sum(c >= COHERENCE_MIN for c in coherences) == 6
    assert sum(c > 0.999 for c in coherences) == 4


def test_unmarked_feet_and_too_few_places_read_nothing() -> None:
    phases = 0.2 * np.arange(5)
    assert wave_reading(phases, np.full(5, 0.05), ALONG, ONE_ROW).direction == "none"
    assert wave_reading(phases[:2], PLAIN[:2], ALONG[:2], ONE_ROW[:2]).direction == "none"
    assert wave_reading(phases[:4], PLAIN[:4], np.array([0.1, 0.1, -0.1, -0.1]), np.zeros(4)).direction == "none"


def test_rows_of_two_marked_feet_read_nothing() -> None:
    """Two feet of one row fit some slope whatever they do, and a single foot of the other fits with its own offset."""
    along, row = np.array([0.1, -0.1, 0.0]), np.array([0.0, 0.0, 1.0])
    assert wave_reading(np.array([0.0, 0.4, 0.7]), np.ones(3), along, row).direction == "none"
    along, row = np.repeat([0.05, 0.0, -0.05], 2), np.tile([0.0, 1.0], 3)
    phase = (np.repeat([0.0, 1 / 3, 2 / 3], 2) + np.tile([0.0, 0.5], 3)) % 1.0
    assert wave_reading(phase, np.array([1.0, 1, 1, 1, 1, 0]), along, row).direction == "retrograde"
    assert wave_reading(phase, np.array([1.0, 1, 0, 1, 1, 0]), along, row).direction == "none"
