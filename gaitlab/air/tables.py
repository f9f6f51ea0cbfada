"""Builds the two one-dimensional tables of a flow part that the fast form needs, from the exact model."""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from scipy.interpolate import CubicSpline

from gaitlab.air.duct import as_duct
from gaitlab.air.fanno import choking_mach, mass_flux
from gaitlab.air.friction import loss_number
from gaitlab.air.gas import Gas
from gaitlab.air.iso import IsoLaw, iso_law
from gaitlab.air.lookup import FloatArray, hermite_rows
from gaitlab.air.section import Section, section_of
from gaitlab.robot.circuit import FlowPart, IsoPart

# Chosen by us: with these the fast form stays within 2 % of the exact one from 8 to 200 kPa upstream (see the tests).
PRESSURE_KNOTS = 24
ELLIPSE_KNOTS = 96
LEAST_PRESSURE_PA, MOST_PRESSURE_PA = 2.0e3, 250.0e3
MOST_OVER_AMBIENT = 1.5
# The flow's table starts where the loss is linear to about 1e-4 (Re = 0.05 L/D_h) and is constant below; chosen by us.
LINEAR_REYNOLDS = 0.05
DENSE_POINTS = 1200


@dataclass(frozen=True)
class ElementTable:
    """The fast form of one flow part.

    `complement_rows`: 1 − b over ln p_u, evenly spaced from `pressure_start` by `pressure_spacing`, which depend on the
    gas alone. `flow_rows`: ln(m/De) over ln De, evenly spaced from `flow_start` by `flow_spacing`; its slope is
    d ln m/d ln De. Rows as in `lookup.hermite_rows`.
    """

    complement_rows: FloatArray
    pressure_start: float
    pressure_spacing: float
    flow_rows: FloatArray
    flow_start: float
    flow_spacing: float

    @property
    def nbytes(self) -> int:
        """Memory of the table [bytes]."""
        return self.complement_rows.nbytes + self.flow_rows.nbytes


def pressure_knots(gas: Gas) -> FloatArray:
    """Upstream pressures [Pa] at which b is tabulated, evenly spaced in the logarithm."""
    return np.geomspace(LEAST_PRESSURE_PA, max(MOST_PRESSURE_PA, MOST_OVER_AMBIENT * gas.pressure_Pa), PRESSURE_KNOTS)


@lru_cache(maxsize=4096)
def element_table(part: FlowPart, gas: Gas) -> ElementTable:
    """The fast form of a flow part in a gas; equal parts share one table."""
    if isinstance(part, IsoPart):
        return iso_table(iso_law(part, gas), pressure_knots(gas))
    return _duct_table(section_of(as_duct(part, gas)), gas)


def iso_table(law: IsoLaw, pressures: FloatArray) -> ElementTable:
    """The table of an ISO 6358 law on these upstream pressures [Pa], evenly spaced in the logarithm."""
    complement = np.full(PRESSURE_KNOTS, 1.0 - law.critical_ratio)
    a, c = law.linear_Pa2_s_kg, law.square_Pa2_s2_kg2
    largest = law.ellipse_Pa2(float(pressures[-1]), 0.0)
    log_ellipse = np.linspace(math.log(1e-4 * a * a / c), math.log(largest), ELLIPSE_KNOTS)
    root = np.sqrt(a * a + 4.0 * c * np.exp(log_ellipse))
    return _table(pressures, complement, log_ellipse, np.log(2.0 / (a + root)), -0.5 * (1.0 - a / root))


def _duct_table(section: Section, gas: Gas) -> ElementTable:
    pressures = pressure_knots(gas)
    choked = np.array([mass_flux(choking_mach(section, p, gas), p, gas) * section.area_m2 for p in pressures])
    complement = _loss_Pa2(choked, section, gas) / pressures**2
    per_reynolds = gas.viscosity_Pa_s() * section.area_m2 / section.hydraulic_m
    least = LINEAR_REYNOLDS * section.length_m / section.hydraulic_m * per_reynolds
    flow = np.geomspace(min(least, 1e-3 * choked[0]), choked[-1], DENSE_POINTS)
    log_loss, log_flow = np.log(_loss_Pa2(flow, section, gas)), np.log(flow)
    inverse = CubicSpline(log_loss, log_flow)
    log_ellipse = np.linspace(log_loss[0], log_loss[-1], ELLIPSE_KNOTS)
    return _table(pressures, complement, log_ellipse, inverse(log_ellipse) - log_ellipse, inverse(log_ellipse, 1) - 1.0)


def _loss_Pa2(flow_kg_s: FloatArray, section: Section, gas: Gas) -> FloatArray:
    """F(m) = (R T/A²) m² (1 + N(m))."""
    reynolds = flow_kg_s * section.hydraulic_m / (section.area_m2 * gas.viscosity_Pa_s())
    loss: FloatArray = gas.RT / section.area_m2**2 * flow_kg_s**2 * (1.0 + loss_number(reynolds, section))
    return loss


def _table(
    pressures: FloatArray, complement: FloatArray, log_ellipse: FloatArray, log_gain: FloatArray, slope: FloatArray
) -> ElementTable:
    log_pressure = np.log(pressures)
    pressure_step, flow_step = float(log_pressure[1] - log_pressure[0]), float(log_ellipse[1] - log_ellipse[0])
    # Flat ends: what is held constant beyond the table joins it with a continuous slope.
    ends = CubicSpline(log_pressure, complement, bc_type="clamped")
    slope[0] = 0.0
    return ElementTable(
        hermite_rows(complement, ends(log_pressure, 1), pressure_step),
        float(log_pressure[0]),
        pressure_step,
        hermite_rows(log_gain, slope, flow_step, slope_shift=1.0),
        float(log_ellipse[0]),
        flow_step,
    )
