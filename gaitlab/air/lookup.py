"""Cubic Hermite tables on evenly spaced knots: value and slope in one gather, no search for the interval."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]


def hermite_rows(values: FloatArray, slopes: FloatArray, spacing: float, *, slope_shift: float = 0.0) -> FloatArray:
    """Polynomial rows, shape (K−1, 8), of the cubic through K values with K slopes, knots `spacing` apart.

    A row holds, from the highest power of t = (x − x_k)/spacing down, pairs (coefficient of the value, coefficient of
    the slope by x): value c3 t³ + c2 t² + c1 t + c0, slope (3 c3 t² + 2 c2 t + c1)/spacing + slope_shift.
    """
    rise = np.diff(values)
    left, right = slopes[:-1] * spacing, slopes[1:] * spacing
    c2, c3 = 3.0 * rise - 2.0 * left - right, left + right - 2.0 * rise
    slope_pairs = (np.zeros_like(rise), 3.0 * c3 / spacing, 2.0 * c2 / spacing, left / spacing + slope_shift)
    return np.stack([c3, slope_pairs[0], c2, slope_pairs[1], left, slope_pairs[2], values[:-1], slope_pairs[3]], axis=1)


class RowTable:
    """Many Hermite tables of the same number of knots, looked up for all of them in one call.

    `value` and `slope` are buffers of the table: they hold until its next call.
    """

    def __init__(self, rows: FloatArray) -> None:
        """`rows` has shape (n, K−1, 8), one block of `hermite_rows` per table."""
        count, intervals, _ = rows.shape
        self._columns = np.ascontiguousarray(rows.reshape(-1, 8).T)
        self._base = np.arange(count, dtype=np.intp) * intervals
        self._last = intervals - 1e-9
        self._index = np.empty(count, dtype=np.intp)
        self._fraction = np.empty(2 * count)  # twice the same, so that value and slope go through one Horner scheme
        self._halves = self._fraction[:count], self._fraction[count:]
        self._gathered = np.empty((8, count))
        self._pairs = tuple(self._gathered.reshape(4, 2 * count))
        self._result = np.empty(2 * count)
        self.value, self.slope = self._result[:count], self._result[count:]

    @property
    def nbytes(self) -> int:
        """Memory of the coefficients [bytes]."""
        return int(self._columns.nbytes)

    def look_up(self, position: FloatArray) -> None:
        """Fill `value` and `slope` at `position` [knot spacings from the first knot], shape (n,), at least 0.

        Positions beyond the last knot are held there; `position` is a buffer of the caller's that is changed.
        """
        index, result, fraction = self._index, self._result, self._fraction
        first, second = self._halves
        np.minimum(position, self._last, out=position)
        np.copyto(index, position, casting="unsafe")
        np.subtract(position, index, first)
        second[:] = first
        np.add(index, self._base, index)
        self._columns.take(index, 1, self._gathered, "clip")
        cubic, square, linear, constant = self._pairs
        np.multiply(cubic, fraction, result)
        np.add(result, square, result)
        np.multiply(result, fraction, result)
        np.add(result, linear, result)
        np.multiply(result, fraction, result)
        np.add(result, constant, result)
