"""Pressure loss of a duct over its Reynolds number: developing laminar, transition and turbulent in one smooth formula."""

from __future__ import annotations

from typing import TypeVar

import numpy as np
from numpy.typing import NDArray

from gaitlab.air.section import Section

Number = TypeVar("Number", float, NDArray[np.float64])


def laminar_f_re(reynolds: Number, section: Section) -> Number:
    """Apparent Fanning f·Re of laminar flow developing from a flat profile (Shah 1978).

    With L⁺ = L/(D_h Re) and s = 3.44/√L⁺: s + (K/(4 L⁺) + fRe − s)/(1 + C'/L⁺²). It holds the entrance's excess loss.
    """
    plus = section.length_m / (section.hydraulic_m * reynolds)
    entry = 3.44 / plus**0.5
    developed = section.k_developing / (4.0 * plus) + section.f_re
    total: Number = entry + (developed - entry) / (1.0 + section.c_developing / plus**2)
    return total


def laminar_factor(reynolds: Number, section: Section) -> Number:
    """Darcy factor of the developing laminar flow alone."""
    total: Number = 4.0 * laminar_f_re(reynolds, section) / reynolds
    return total


def turbulent_factor(reynolds: Number, section: Section) -> Number:
    """Darcy factor 8 (A + B)^(−1/8) of Churchill's turbulent branch with its bridge down to laminar flow.

    A = (2.457 ln[(7/Re*)^0.9 + 0.27 ε/D_h])¹⁶, B = (37530/Re*)¹⁶, on Re* = (16/fRe) Re (Jones 1976).
    """
    equivalent = equivalent_reynolds(reynolds, section)
    rough = 0.27 * section.roughness_m / section.hydraulic_m
    wall = (2.457 * np.log((7.0 / equivalent) ** 0.9 + rough)) ** 16
    total: Number = 8.0 * (wall + (37_530.0 / equivalent) ** 16) ** (-1.0 / 8.0)
    return total


def equivalent_reynolds(reynolds: Number, section: Section) -> Number:
    """Re* = (16/fRe) Re: the Reynolds number at which a round tube has the same laminar friction (Jones 1976)."""
    total: Number = 16.0 / section.f_re * reynolds
    return total


def darcy_factor(reynolds: Number, section: Section) -> Number:
    """Darcy friction factor of a duct at any Reynolds number above 0.

    Churchill (1977), f = 8 [(8/Re)¹² + (A + B)^−1.5]^(1/12), with the developing laminar factor in place of 64/Re.
    """
    laminar, turbulent = laminar_factor(reynolds, section), turbulent_factor(reynolds, section)
    total: Number = (laminar**12 + turbulent**12) ** (1.0 / 12.0)
    return total


def loss_number(reynolds: Number, section: Section) -> Number:
    """N = K_in + f L/D_h: the duct's whole loss in velocity heads; the exit head is lost on top."""
    return section.inlet_loss + darcy_factor(reynolds, section) * section.length_m / section.hydraulic_m


LAMINAR_UP_TO, TURBULENT_FROM = 2300.0, 4000.0  # Re* of a tube's transition (common values, White, Fluid Mechanics)
DEVELOPED_WITHIN = 1.1  # friction at most this much above developed flow's counts as developed; chosen by us


def regime(reynolds: float, section: Section) -> str:
    """laminar | laminar, developing | entrance | transition | turbulent.

    entrance: beyond the laminar limit, but in so short a duct that the entrance's boundary layers make the loss.
    """
    if reynolds <= 0.0:
        return "laminar"
    equivalent = equivalent_reynolds(reynolds, section)
    if equivalent < LAMINAR_UP_TO:
        developed = laminar_f_re(reynolds, section) <= DEVELOPED_WITHIN * section.f_re
        return "laminar" if developed else "laminar, developing"
    if laminar_factor(reynolds, section) > turbulent_factor(reynolds, section):
        return "entrance"
    return "transition" if equivalent < TURBULENT_FROM else "turbulent"
