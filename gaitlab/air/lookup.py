"""Cubic Hermite tables on evenly spaced knots: value and slope in one gather, no search for the interval."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]


def hermite_rows(values: FloatArray, slopes: FloatArray) -> FloatArray:
    """Polynomial rows, shape (K−1, 8), of the cubic through K values with K slopes *per knot spacing*.

    A row holds, from the highest power down, the pairs (coefficient of the value, coefficient of the slope) of the
    polynomials in t ∈ [0, 1]: value c3 t³ + c2 t² + c1 t + c0 and slope 3 c3 t² + 2 c2 t + c1, padded with a zero.
    """
    rise = np.diff(values)
    left, right = slopes[:-1], slopes[1:]
    c0, c1 = values[:-1], left
    c2, c3 = 3.0 * rise - 2.0 * left - right, left + right - 2.0 * rise
    zero = np.zeros_like(c0)
    return np.stack([c3, zero, c2, 3.0 * c3, c1, 2.0 * c2, c0, c1], axis=1)


class RowTable:
    """Many Hermite tables of the same number of knots, looked up for all of them in one call.

    The arrays returned by `look_up` are buffers of the table: they hold until its next call.
    """

    def __init__(self, rows: FloatArray) -> None:
        """`rows` has shape (n, K−1, 8), one block of `hermite_rows` per table."""
        count, self._intervals, _ = rows.shape
        self._rows = np.ascontiguousarray(rows.reshape(-1, 8))
        self._base = np.arange(count, dtype=np.intp) * self._intervals
        self._index = np.empty(count, dtype=np.intp)
        self._fraction = np.empty(count)
        self._gathered = np.empty((count, 8))
        self._pairs = tuple(self._gathered[:, k : k + 2].T for k in (0, 2, 4, 6))
        self._result = np.empty((2, count))
        self.value, self.slope = self._result

    @property
    def nbytes(self) -> int:
        """Memory of the coefficients [bytes]."""
        return int(self._rows.nbytes)

    def look_up(self, position: FloatArray) -> None:
        """Fill `value` and `slope` (per knot spacing) at `position` [knot spacings from the first knot], shape (n,).

        Positions are held inside the table; the caller passes a buffer that is changed.
        """
        np.maximum(position, 0.0, out=position)
        np.minimum(position, self._intervals - 1e-9, out=position)
        index, result = self._index, self._result
        np.copyto(index, position, casting="unsafe")
        np.subtract(position, index, out=self._fraction)
        np.add(index, self._base, out=index)
        self._rows.take(index, axis=0, out=self._gathered, mode="clip")
        third, second, first, zeroth = self._pairs
        np.multiply(third, self._fraction, out=result)
        np.add(result, second, out=result)
        np.multiply(result, self._fraction, out=result)
        np.add(result, first, out=result)
        np.multiply(result, self._fraction, out=result)
        np.add(result, zeroth, out=result)
