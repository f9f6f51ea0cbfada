"""The fast, smooth flow law of every element of a circuit in one call, with its analytic Jacobian."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from gaitlab.air.gas import Gas
from gaitlab.air.lookup import FloatArray, RowTable
from gaitlab.air.tables import ElementTable, element_table
from gaitlab.errors import InputError, must
from gaitlab.robot.circuit import FlowPart


class FlowElements:
    """Flow through n elements at once.

    With p_u, p_d the higher and lower pressure of an element, b = b(p_u) its critical ratio, z = max(p_d − b p_u, 0)/(1 − b):

        De = (1 − b)(p_u² − z²)      ISO 6358's ellipse, p_u² − p_d² for small differences
        m = F⁻¹(De)                  F(m) = (R T/A²) m² (1 + N(m)), N from the exact model

    b(p_u) and F⁻¹ are cubic tables (`tables.element_table`). Flow and slope are continuous through zero difference,
    where m = De/a, and through choking, where the slope by p_d vanishes. Not to be shared between threads: calls
    reuse buffers (the returned arrays are new ones).
    """

    def __init__(self, tables: Sequence[ElementTable]) -> None:
        count = len(tables)
        self.count = count
        self._complement = RowTable(np.reshape([t.complement_rows for t in tables], (count, -1, 8)))
        self._gain = RowTable(np.reshape([t.flow_rows for t in tables], (count, -1, 8)))
        self._least_ellipse = np.exp([t.flow_start for t in tables])
        self._flow_scale = np.array([1.0 / t.flow_spacing for t in tables])
        self._flow_shift = np.array([-t.flow_start / t.flow_spacing for t in tables])
        self._least_pressure = float(np.exp(tables[0].pressure_start))
        self._pressure_scale = 1.0 / tables[0].pressure_spacing
        self._pressure_shift = -tables[0].pressure_start * self._pressure_scale
        self._work = tuple(np.empty((8, count)))

    @classmethod
    def of(cls, parts: Sequence[FlowPart], gas: Gas) -> FlowElements:
        """The elements of these flow parts, in their order; raises InputError for a part that breaks its rules."""
        if not parts:
            raise InputError(must("parts", "at least one flow part", 0))
        return cls([element_table(part, gas) for part in parts])

    @property
    def bytes_per_element(self) -> float:
        """Memory of the tables per element [bytes]."""
        return (self._complement.nbytes + self._gain.nbytes) / self.count

    def flow(self, p_a: FloatArray, p_b: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Mass flow [kg/s] from side a to side b and its derivatives by both pressures [Pa absolute]; shapes (n,).

        >>> from gaitlab.robot.circuit import SquareDuct
        >>> elements = FlowElements.of([SquareDuct(0.5e-3, 10e-3)], Gas())
        >>> flow, by_a, by_b = elements.flow(np.array([101_325.0]), np.array([44_325.0]))
        >>> float(round(1e6 * flow[0]))
        42.0
        """
        up, difference, ellipse, by_up, by_down = self._work[:5]
        np.subtract(p_a, p_b, difference)
        np.maximum(p_a, p_b, out=up)
        self._fill_ellipse(up, difference, ellipse, by_up, by_down)
        gain, slope = self._gain.value, self._gain.slope
        self._fill_gain(ellipse)
        np.multiply(by_up, slope, by_up)
        np.multiply(by_down, slope, by_down)
        np.multiply(ellipse, gain, ellipse)
        forward = difference >= 0.0
        by_a, by_b = np.where(forward, by_up, by_down), np.where(forward, by_down, by_up)
        np.negative(by_b, by_b)
        return np.copysign(ellipse, difference), by_a, by_b

    def mass_flow(self, p_a: FloatArray, p_b: FloatArray) -> FloatArray:
        """Mass flow alone, the same numbers as `flow` gives, for the stages of an integrator that need no slopes."""
        up, difference, ellipse, drop, held, position = self._work[:6]
        np.subtract(p_a, p_b, difference)
        np.maximum(p_a, p_b, out=up)
        np.maximum(up, self._least_pressure, out=held)
        np.log(held, position)
        np.multiply(position, self._pressure_scale, position)
        np.add(position, self._pressure_shift, position)
        self._complement.look_up(position)
        complement = self._complement.value
        np.absolute(difference, drop)
        np.multiply(complement, up, ellipse)
        np.minimum(drop, ellipse, out=drop)
        np.divide(drop, complement, complement)
        np.add(up, up, held)
        np.subtract(held, complement, held)
        np.multiply(drop, held, ellipse)
        np.maximum(ellipse, self._least_ellipse, out=position)
        np.log(position, position)
        np.multiply(position, self._flow_scale, position)
        np.add(position, self._flow_shift, position)
        self._gain.look_up(np.maximum(position, 0.0, out=position))
        np.exp(self._gain.value, position)
        np.multiply(ellipse, position, ellipse)
        return np.copysign(ellipse, difference)

    def _fill_ellipse(
        self, up: FloatArray, difference: FloatArray, ellipse: FloatArray, by_up: FloatArray, by_down: FloatArray
    ) -> None:
        """De, ∂De/∂p_u and −∂De/∂p_d.

        With c = 1 − b, s = min(p_u − p_d, c p_u) and k = s/c = p_u − z: De = s (2 p_u − k), −∂De/∂p_d = 2 p_u − 2 k = 2 z,
        ∂De/∂p_u = 2 z + 2 s + k² c′ with c′ = dc/dp_u.
        """
        drop, held, bent = self._work[5:8]
        np.maximum(up, self._least_pressure, out=held)
        np.log(held, bent)
        np.multiply(bent, self._pressure_scale, bent)
        np.add(bent, self._pressure_shift, bent)
        self._complement.look_up(bent)
        complement, slope = self._complement.value, self._complement.slope
        np.absolute(difference, drop)
        np.multiply(complement, up, ellipse)
        np.minimum(drop, ellipse, out=drop)  # s
        np.divide(drop, complement, complement)  # k
        np.add(up, up, by_up)
        np.subtract(by_up, complement, by_down)
        np.multiply(drop, by_down, ellipse)
        np.subtract(by_down, complement, by_down)
        np.multiply(complement, complement, bent)
        np.multiply(bent, slope, bent)
        np.divide(bent, held, bent)
        np.add(by_down, bent, by_up)
        np.add(by_up, drop, by_up)
        np.add(by_up, drop, by_up)

    def _fill_gain(self, ellipse: FloatArray) -> None:
        """m/De in the gain table's value, dm/dDe in its slope."""
        position = self._work[7]
        np.maximum(ellipse, self._least_ellipse, out=position)
        np.log(position, position)
        np.multiply(position, self._flow_scale, position)
        np.add(position, self._flow_shift, position)
        self._gain.look_up(np.maximum(position, 0.0, out=position))
        value, slope = self._gain.value, self._gain.slope
        np.exp(value, value)
        np.multiply(slope, value, slope)
