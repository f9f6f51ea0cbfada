"""Bellows as gas chambers: pressure from gas content, tabulated once for each type.

The content is E = p V(p) [J]; as vacuum grows both p and V fall, so p(E) is single-valued.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from gaitlab.air.lookup import RowTable, hermite_rows
from gaitlab.body.bellows import BellowsLaw
from gaitlab.ring.waves import FloatArray

KNOTS = 512  # of a table from vacuum to 1.2 atmospheres; errors are then below 5e-6, at the solid limit's corner (see the tests)
NEWTON_STEPS = 4  # from a start that is right to 1e-4
LOWEST, HIGHEST = 1e-3, 1.2  # ends of a table in ambient pressures: nothing in a ring leaves them


class Chambers:
    """Pressure of n bellows from their gas content, by cubic tables with even steps of content, one for each type."""

    def __init__(self, tables: Sequence[_Table]) -> None:
        count = len(tables)
        self._lowest = np.array([table.lowest_J for table in tables])
        self._per_step = np.array([1.0 / table.step_J for table in tables])
        self._rows = RowTable(np.reshape([table.rows for table in tables], (count, -1, 8))) if tables else None

    @classmethod
    def of(cls, laws: Sequence[BellowsLaw], ambient_Pa: float) -> Chambers:
        """The chambers of these bellows, in their order."""
        return cls([_table(law, ambient_Pa) for law in laws])

    def pressure(self, content_J: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Pressure [Pa absolute] and its derivative with content [1/m³], each (n,)."""
        if self._rows is None:
            return content_J, content_J
        self._rows.look_up(np.maximum((content_J - self._lowest) * self._per_step, 0.0))
        return self._rows.value, self._rows.slope.copy()

    def pressures(self, content_J: FloatArray) -> FloatArray:
        """Pressures (K, n) at contents (K, n)."""
        return np.array([self.pressure(row)[0].copy() for row in content_J]).reshape(content_J.shape)


@dataclass(frozen=True)
class _Table:
    lowest_J: float
    step_J: float
    rows: FloatArray


def content(law: BellowsLaw, pressure_Pa: FloatArray, ambient_Pa: float) -> tuple[FloatArray, FloatArray]:
    """Gas content p V [J] at absolute pressures, and its derivative V + p dV/dp [m³]."""
    volume, slope = law.volume(ambient_Pa - pressure_Pa)
    return pressure_Pa * volume, volume - pressure_Pa * slope


@lru_cache(maxsize=256)
def _table(law: BellowsLaw, ambient_Pa: float) -> _Table:
    """Pressure and slope at even contents, found by Newton from an interpolated start."""
    coarse = np.linspace(LOWEST, HIGHEST, 4 * KNOTS) * ambient_Pa
    held = content(law, coarse, ambient_Pa)[0]
    even = np.linspace(held[0], held[-1], KNOTS)
    pressure = np.interp(even, held, coarse)
    for _ in range(NEWTON_STEPS):
        now, slope = content(law, pressure, ambient_Pa)
        pressure = pressure - (now - even) / slope
    step = float(even[1] - even[0])
    rows = hermite_rows(pressure, 1.0 / content(law, pressure, ambient_Pa)[1], step)
    return _Table(float(even[0]), step, rows)
