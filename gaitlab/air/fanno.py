"""Adiabatic duct flow with friction (Fanno flow) from a reservoir to a back pressure: the exact model, slow and scalar."""

from __future__ import annotations

import math
from dataclasses import dataclass

from scipy.optimize import brentq

from gaitlab.air.friction import loss_number
from gaitlab.air.gas import AIR_GAMMA, Gas
from gaitlab.air.section import Section

GAMMA = AIR_GAMMA
LEAST_MACH = 1e-14  # below the choking inlet Mach number of 1 µm bore over 100 m
ROOT_TOLERANCE = 1e-13  # relative, of the Mach numbers; chosen by us


@dataclass(frozen=True)
class DuctState:
    """Steady flow through a duct: mass flow [kg/s], Reynolds number, Mach numbers at both ends, whether it is choked."""

    mass_flow_kg_s: float
    reynolds: float
    inlet_mach: float
    exit_mach: float
    choked: bool


def fanno_number(mach: float) -> float:
    """4 f L*/D: friction length from `mach` to sonic, (1−M²)/(γM²) + (γ+1)/(2γ) ln[(γ+1)M²/(2+(γ−1)M²)]."""
    square = mach * mach
    return (1.0 - square) / (GAMMA * square) + (GAMMA + 1.0) / (2.0 * GAMMA) * math.log(
        (GAMMA + 1.0) * square / (2.0 + (GAMMA - 1.0) * square)
    )


def exit_mach(inlet_mach: float, loss: float) -> float:
    """Mach number behind `loss` velocity heads of friction; 1 where the duct is choked or over-long."""
    left = fanno_number(inlet_mach) - loss
    if left <= 0.0:
        return 1.0
    return float(brentq(lambda mach: fanno_number(mach) - left, inlet_mach, 1.0, xtol=1e-300, rtol=ROOT_TOLERANCE))


def static_ratio(inlet_mach: float, outlet_mach: float) -> float:
    """p2/p1 of the static pressures at two Mach numbers of one Fanno line."""
    return inlet_mach / outlet_mach * math.sqrt(_stagnation(inlet_mach) / _stagnation(outlet_mach))


def exit_ratio(inlet_mach: float, outlet_mach: float) -> float:
    """p2/p_u: static pressure at the outlet over the upstream reservoir's pressure."""
    return math.pow(_stagnation(inlet_mach), -GAMMA / (GAMMA - 1.0)) * static_ratio(inlet_mach, outlet_mach)


def mass_flux(inlet_mach: float, pressure_Pa: float, gas: Gas) -> float:
    """G = p_u √(γ/(R T)) M1 (1 + (γ−1)/2 M1²)^−(γ+1)/(2(γ−1)) [kg/(m² s)] from a reservoir at p_u, T."""
    power = -(GAMMA + 1.0) / (2.0 * (GAMMA - 1.0))
    return pressure_Pa * math.sqrt(GAMMA / gas.RT) * inlet_mach * math.pow(_stagnation(inlet_mach), power)


def duct_flow(section: Section, p_up_Pa: float, p_down_Pa: float, gas: Gas) -> DuctState:
    """Steady flow from a reservoir at `p_up_Pa` to one at `p_down_Pa` ≤ p_up [Pa absolute].

    N = K_in + f L/D_h with Re constant along the duct; Fa(M2) = Fa(M1) − N; M1 is found so that the outlet's static
    pressure is p_down, or so that M2 = 1 (choked).
    """
    ratio = p_down_Pa / p_up_Pa
    if ratio >= 1.0:
        return DuctState(0.0, 0.0, 0.0, 0.0, False)
    choking = choking_mach(section, p_up_Pa, gas)
    if exit_ratio(choking, 1.0) >= ratio:
        return _state(section, p_up_Pa, gas, choking, choked=True)

    def excess(log_mach: float) -> float:
        mach = math.exp(log_mach)
        return exit_ratio(mach, exit_mach(mach, _loss(section, mach, p_up_Pa, gas))) - ratio

    # Flow is (nearly) concave in the pressure drop, so the chord from zero to choking lies below it.
    least = math.log(0.1 * choking * (1.0 - ratio))
    mach = math.exp(brentq(excess, least, math.log(choking), xtol=ROOT_TOLERANCE, rtol=ROOT_TOLERANCE))
    return _state(section, p_up_Pa, gas, mach, choked=False)


def choking_mach(section: Section, p_up_Pa: float, gas: Gas) -> float:
    """Inlet Mach number at which the outlet is sonic: the largest this duct can have at that upstream pressure."""

    def excess(log_mach: float) -> float:
        mach = math.exp(log_mach)
        return fanno_number(mach) - _loss(section, mach, p_up_Pa, gas)

    return math.exp(brentq(excess, math.log(LEAST_MACH), 0.0, xtol=ROOT_TOLERANCE, rtol=ROOT_TOLERANCE))


def _stagnation(mach: float) -> float:
    return 1.0 + (GAMMA - 1.0) / 2.0 * mach * mach


def _reynolds(section: Section, mach: float, p_up_Pa: float, gas: Gas) -> float:
    return mass_flux(mach, p_up_Pa, gas) * section.hydraulic_m / gas.viscosity_Pa_s()


def _loss(section: Section, mach: float, p_up_Pa: float, gas: Gas) -> float:
    return float(loss_number(_reynolds(section, mach, p_up_Pa, gas), section))


def _state(section: Section, p_up_Pa: float, gas: Gas, mach: float, *, choked: bool) -> DuctState:
    reynolds = _reynolds(section, mach, p_up_Pa, gas)
    outlet = 1.0 if choked else exit_mach(mach, _loss(section, mach, p_up_Pa, gas))
    return DuctState(mass_flux(mach, p_up_Pa, gas) * section.area_m2, reynolds, mach, outlet, choked)
