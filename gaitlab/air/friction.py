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


def darcy_factor(reynolds: Number, section: Section) -> Number:
    """Darcy friction factor of a smooth duct at any Reynolds number above 0.

    Churchill (1977) with the laminar-equivalent Reynolds number Re* = (16/fRe) Re (Jones 1976) and, in place of
    Churchill's laminar term, the developing one: f = 8 [(f_app/8)¹² + (A + B)^−1.5]^(1/12).
    """
    laminar = 4.0 * laminar_f_re(reynolds, section) / reynolds
    equivalent = 16.0 / section.f_re * reynolds
    turbulent = (2.457 * 0.9 * np.log(equivalent / 7.0)) ** 16
    bridge = (37_530.0 / equivalent) ** 16
    total: Number = 8.0 * ((laminar / 8.0) ** 12 + (turbulent + bridge) ** -1.5) ** (1.0 / 12.0)
    return total


def loss_number(reynolds: Number, section: Section) -> Number:
    """N = K_in + f L/D_h: the duct's whole loss in velocity heads; the exit head is lost on top."""
    return section.inlet_loss + darcy_factor(reynolds, section) * section.length_m / section.hydraulic_m
