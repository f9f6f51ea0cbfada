"""The fast, smooth flow law of every element of a circuit in one call, with its analytic Jacobian."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from gaitlab.air.gas import Gas
from gaitlab.air.lookup import FloatArray, RowTable
from gaitlab.air.tables import ElementTable, element_table
from gaitlab.errors import InputError, must
from gaitlab.robot.circuit import FlowPart

LEAST_PRESSURE_PA = 1.0  # below this an upstream pressure is taken as this; an integrator's trial step may ask for less
LEAST_ELLIPSE_PA2 = 1e-30  # keeps the logarithm finite at rest


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
        self._ratio = RowTable(np.reshape([t.ratio_rows for t in tables], (count, -1, 8)))
        self._flow = RowTable(np.reshape([t.flow_rows for t in tables], (count, -1, 8)))
        self._flow_scale = np.array([1.0 / t.flow_spacing for t in tables])
        self._flow_shift = np.array([-t.flow_start / t.flow_spacing for t in tables])
        self._pressure_scale = 1.0 / tables[0].pressure_spacing
        self._pressure_shift = -tables[0].pressure_start * self._pressure_scale
        self._work = np.empty((12, count))

    @classmethod
    def of(cls, parts: Sequence[FlowPart], gas: Gas) -> FlowElements:
        """The elements of these flow parts, in their order; raises InputError for a part that breaks its rules."""
        if not parts:
            raise InputError(must("parts", "at least one flow part", 0))
        return cls([element_table(part, gas) for part in parts])

    @property
    def bytes_per_element(self) -> float:
        """Memory of the tables per element [bytes]."""
        return (self._ratio.nbytes + self._flow.nbytes) / self.count

    def flow(self, p_a: FloatArray, p_b: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Mass flow [kg/s] from side a to side b and its derivatives by both pressures [Pa absolute]; shapes (n,).

        >>> from gaitlab.robot.circuit import SquareDuct
        >>> elements = FlowElements.of([SquareDuct(0.5e-3, 10e-3)], Gas())
        >>> flow, by_a, by_b = elements.flow(np.array([101_325.0]), np.array([44_325.0]))
        >>> round(1e6 * flow[0], 0)
        42.0
        """
        up, down, difference, ellipse, by_up, by_down = self._work[:6]
        np.subtract(p_a, p_b, out=difference)
        np.maximum(p_a, p_b, out=up)
        np.maximum(up, LEAST_PRESSURE_PA, out=up)
        np.minimum(p_a, p_b, out=down)
        self._ellipse(up, down, ellipse, by_up, by_down)
        gain = self._gain(ellipse)
        np.multiply(by_up, gain, out=by_up)
        np.multiply(by_down, gain, out=by_down)
        np.multiply(ellipse, self._flow.value, out=ellipse)
        forward = difference >= 0.0
        by_a = np.where(forward, by_up, by_down)
        by_b = np.where(forward, by_down, by_up)
        np.negative(by_b, out=by_b)
        return np.copysign(ellipse, difference), by_a, by_b

    def _ellipse(
        self, up: FloatArray, down: FloatArray, ellipse: FloatArray, by_up: FloatArray, by_down: FloatArray
    ) -> None:
        """Fill De, ∂De/∂p_u and −∂De/∂p_d = 2 z (all shapes (n,))."""
        complement, ratio_up, lower, drop, position = self._work[6:11]
        np.log(up, out=position)
        np.multiply(position, self._pressure_scale, out=position)
        np.add(position, self._pressure_shift, out=position)
        self._ratio.look_up(position)
        ratio, ratio_slope = self._ratio.value, self._ratio.slope
        np.subtract(1.0, ratio, out=complement)
        np.multiply(ratio, up, out=ratio_up)
        np.maximum(down, ratio_up, out=lower)
        np.subtract(up, lower, out=drop)
        np.subtract(lower, ratio_up, out=lower)
        np.divide(lower, complement, out=lower)  # z
        np.add(up, lower, out=ellipse)
        np.multiply(ellipse, drop, out=ellipse)
        np.add(lower, lower, out=by_down)
        # ∂De/∂p_u = 2 ((1−b) p_u + b z) − (p_u − z)² db/dp_u
        np.multiply(lower, ratio, out=lower)
        np.subtract(up, ratio_up, out=by_up)
        np.add(by_up, lower, out=by_up)
        np.add(by_up, by_up, out=by_up)
        np.divide(drop, complement, out=drop)
        np.multiply(drop, drop, out=drop)
        np.multiply(drop, ratio_slope, out=drop)
        np.divide(drop, up, out=drop)
        np.multiply(drop, self._pressure_scale, out=drop)
        np.subtract(by_up, drop, out=by_up)

    def _gain(self, ellipse: FloatArray) -> FloatArray:
        """dm/dDe; leaves m/De in the flow table's value buffer."""
        position = self._work[11]
        np.maximum(ellipse, LEAST_ELLIPSE_PA2, out=position)
        np.log(position, out=position)
        np.multiply(position, self._flow_scale, out=position)
        np.add(position, self._flow_shift, out=position)
        self._flow.look_up(position)
        conductance, slope = self._flow.value, self._flow.slope
        np.exp(conductance, out=conductance)
        np.multiply(slope, self._flow_scale, out=slope)
        np.add(slope, 1.0, out=slope)
        np.multiply(slope, conductance, out=slope)
        return slope
