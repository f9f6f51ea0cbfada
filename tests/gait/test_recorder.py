"""What the recorder makes of raw samples."""

from __future__ import annotations

import numpy as np

from gaitlab.gait.recorder import without_hops


def flags(text: str) -> np.ndarray:
    return np.array([[mark == "x"] for mark in text])


def test_short_gaps_are_closed_and_ends_stay() -> None:
    np.testing.assert_array_equal(without_hops(flags("..xx.x..xxx....."), 2), flags("..xxxxxxxxx....."))


def test_long_gaps_and_edges_stay() -> None:
    np.testing.assert_array_equal(without_hops(flags("x.....xx.....x.."), 3), flags("x.....xx.....x.."))
    np.testing.assert_array_equal(without_hops(flags(".x.x"), 2), flags(".xxx"))


def test_nothing_to_close() -> None:
    np.testing.assert_array_equal(without_hops(flags("x.x"), 0), flags("x.x"))
    assert without_hops(np.zeros((0, 3), dtype=bool), 4).shape == (0, 3)
