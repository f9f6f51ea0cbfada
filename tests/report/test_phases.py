"""Intervals on the circle of phase; leans on plain arithmetic and on total lengths that unrolling must keep."""

from __future__ import annotations

import pytest

from gaitlab.report.phases import holds, unrolled


@pytest.mark.parametrize(
    ("intervals", "expected"),
    [
        ([(0.1, 0.4)], [(0.1, 0.4)]),
        ([(0.8, 1.3)], [(0.0, 0.3), (0.8, 1.0)]),
        ([(0.9, 0.2)], [(0.0, 0.2), (0.9, 1.0)]),
        ([(0.0, 1.0)], [(0.0, 1.0)]),
        ([], []),
    ],
)
def test_one_period(intervals: list[tuple[float, float]], expected: list[tuple[float, float]]) -> None:
    got = unrolled(intervals, 1.0)
    assert [pytest.approx(pair) for pair in expected] == got


@pytest.mark.parametrize("start", [0.0, 0.25, 0.9])
def test_length_is_kept_over_several_periods(start: float) -> None:
    total = sum(high - low for low, high in unrolled([(start, start + 0.4)], 3))
    assert total == pytest.approx(1.2)


def test_holds_wraps() -> None:
    assert holds([(0.9, 1.1)], 2.05)
    assert holds([(0.9, 0.1)], 0.95)
    assert not holds([(0.9, 0.1)], 0.5)
