"""Bellows as gas chambers: pressure from gas content, tabulated once for each type.

The content is E = p V(p) [J]; as vacuum grows both p and V fall, so p(E) is single-valued.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from gaitlab.body.bellows import BellowsLaw
from gaitlab.ring.network import IntArray
from gaitlab.ring.waves import FloatArray

KNOTS = 512  # of a table from vacuum to 1.2 atmospheres; the error of a cubic is then below 1e-9 (measured in the tests)
LOWEST, HIGHEST = 1e-3, 1.2  # ends of a table in ambient pressures: nothing in a ring leaves them


@dataclass(frozen=True)
class Chambers:
    """Pressure of n bellows from their gas content: cubic Hermite tables with even steps of content.

    `row` (n,) is the type of each bellows; `pressure_Pa` and `rise_Pa` (types, KNOTS) hold p and dp/dE times the step.
    """

    row: IntArray
    step_J: FloatArray
    lowest_J: FloatArray
    pressure_Pa: FloatArray
    rise_Pa: FloatArray

    @classmethod
    def of(cls, laws: Sequence[BellowsLaw], ambient_Pa: float) -> Chambers:
        """Tables for these bellows, one for each distinct law."""
        distinct = list(dict.fromkeys(laws))
        tables = [_table(law, ambient_Pa) for law in distinct]
        row = np.array([distinct.index(law) for law in laws], dtype=np.int64)
        lowest, step = (np.array([t[i] for t in tables])[row] if tables else np.empty(0) for i in (0, 1))
        pressure, rise = (np.array([t[i] for t in tables]).reshape(len(tables), KNOTS) for i in (2, 3))
        return cls(row, step, lowest, pressure.ravel(), rise.ravel())

    def pressure(self, content_J: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Pressure [Pa absolute] and its derivative with content [1/m³], each (n,) or (…, n)."""
        place = (content_J - self.lowest_J) / self.step_J
        knot = np.clip(place.astype(np.int64), 0, KNOTS - 2)
        t = place - knot
        at = knot + self.row * KNOTS
        p0, p1, r0, r1 = self.pressure_Pa[at], self.pressure_Pa[at + 1], self.rise_Pa[at], self.rise_Pa[at + 1]
        rise = p1 - p0
        square, cube = 3.0 * rise - 2.0 * r0 - r1, r0 + r1 - 2.0 * rise
        return p0 + t * (r0 + t * (square + t * cube)), (r0 + t * (2.0 * square + 3.0 * t * cube)) / self.step_J


def content(law: BellowsLaw, pressure_Pa: FloatArray, ambient_Pa: float) -> tuple[FloatArray, FloatArray]:
    """Gas content p V [J] at absolute pressures, and its derivative V + p dV/dp [m³]."""
    volume, slope = law.volume(ambient_Pa - pressure_Pa)
    return pressure_Pa * volume, volume - pressure_Pa * slope


def _table(law: BellowsLaw, ambient_Pa: float) -> tuple[float, float, FloatArray, FloatArray]:
    """Lowest content, step, pressures and slopes times step at even contents, by Newton from an interpolated start."""
    coarse = np.linspace(LOWEST, HIGHEST, 4 * KNOTS) * ambient_Pa
    held = content(law, coarse, ambient_Pa)[0]
    even = np.linspace(held[0], held[-1], KNOTS)
    pressure = np.interp(even, held, coarse)
    for _ in range(4):
        now, slope = content(law, pressure, ambient_Pa)
        pressure = pressure - (now - even) / slope
    step = float(even[1] - even[0])
    return float(even[0]), step, pressure, step / content(law, pressure, ambient_Pa)[1]
