"""Shapes of ducts: laminar friction constants from the literature and refused sizes."""

from __future__ import annotations

import math

import numpy as np
import pytest
from fluids.friction import Churchill_1977

from gaitlab.air.friction import darcy_factor, laminar_f_re, laminar_factor, regime, turbulent_factor
from gaitlab.air.section import Section, rectangle_f_re, section_of
from gaitlab.errors import InputError
from gaitlab.robot.circuit import RectDuct, RoundDuct, SquareDuct
from tests.air.parts import GAS

# Shah & London, Laminar Flow Forced Convection in Ducts (1978): short/long side → Fanning f·Re, series solution.
SHAH_LONDON = [
    (1.0, 14.227),
    (0.8, 14.378),
    (0.6, 14.980),
    (0.5, 15.548),
    (0.4, 16.368),
    (0.25, 18.233),
    (0.2, 19.071),
    (0.1, 21.169),
    (0.0, 24.0),
]


@pytest.mark.parametrize(("aspect", "f_re"), SHAH_LONDON)
def test_shah_london_friction_of_rectangles(aspect: float, f_re: float) -> None:
    assert rectangle_f_re(aspect) == pytest.approx(f_re, rel=1e-3)


@pytest.mark.parametrize("aspect", [1.0, 0.5, 0.2, 0.07])
def test_friction_of_rectangles_against_the_series_solution(aspect: float) -> None:
    # Independent route: the Fourier series of fully developed flow in a rectangle (White, Viscous Fluid Flow, eq. 3-48).
    terms = sum(math.tanh(n * math.pi / (2 * aspect)) / n**5 for n in range(1, 400, 2))
    f_re = 24.0 / ((1.0 + aspect) ** 2 * (1.0 - 192.0 * aspect / math.pi**5 * terms))
    assert rectangle_f_re(aspect) == pytest.approx(f_re, rel=1e-3)


def test_turning_a_rectangle_changes_nothing() -> None:
    assert section_of(RectDuct(2e-3, 0.5e-3, 30e-3)) == section_of(RectDuct(0.5e-3, 2e-3, 30e-3))


def test_a_square_is_a_rectangle_of_equal_sides() -> None:
    assert section_of(SquareDuct(0.5e-3, 10e-3)) == section_of(RectDuct(0.5e-3, 0.5e-3, 10e-3))


def test_round_tube_laminar_limit_is_hagen_poiseuille() -> None:
    # a = 256 μ R T L/(π D⁴) of isothermal Hagen-Poiseuille flow; printed for 1 mm × 1 m: 1.243184e14 Pa² s/kg.
    section = section_of(RoundDuct(1e-3, 1.0))
    viscosity = GAS.viscosity_Pa_s()
    found = section.laminar_Pa2_s_per_kg(viscosity, GAS.RT)
    assert found == pytest.approx(256 * viscosity * GAS.RT / (math.pi * 1e-12), rel=1e-12)
    assert found * 1.813e-5 / viscosity == pytest.approx(1.243184e14, rel=1e-6)


def test_developing_laminar_friction_ends() -> None:
    # Long duct: developed f·Re. Very short: 3.44/√L⁺, the boundary layer in the entrance (Shapiro et al. 1954).
    section = section_of(RoundDuct(1e-3, 1.0))
    assert laminar_f_re(1e-3, section) == pytest.approx(16.0, rel=1e-5)
    short = section_of(RoundDuct(1e-3, 1e-3))
    reynolds = 2e5
    assert laminar_f_re(reynolds, short) == pytest.approx(3.44 * math.sqrt(reynolds), rel=0.01)


def test_developed_entrance_excess_is_hagenbach() -> None:
    # Long tube: the entrance adds K∞ = 1.25 velocity heads in all (Shah & London 1978, round tube 1.2 to 1.28).
    section = section_of(RoundDuct(1e-3, 1.0))
    reynolds = 1000.0
    heads = (laminar_factor(reynolds, section) - 64.0 / reynolds) * section.length_m / section.hydraulic_m
    assert heads == pytest.approx(1.25, rel=0.02)


@pytest.mark.parametrize("reynolds", [3e3, 1e4, 5e4])
def test_turbulent_friction_of_tubes_against_fluids(reynolds: float) -> None:
    # fluids has Churchill's whole formula; beyond the transition its laminar term no longer counts.
    section = section_of(RoundDuct(2e-3, 1.0))
    assert turbulent_factor(reynolds, section) == pytest.approx(Churchill_1977(reynolds, 1e-6 / 2e-3), rel=1e-3)


def test_friction_runs_smoothly_through_transition() -> None:
    section = section_of(RoundDuct(2e-3, 1.0))
    reynolds = np.geomspace(1500.0, 6000.0, 2001)
    slope = np.diff(np.log(darcy_factor(reynolds, section))) / np.diff(np.log(reynolds))
    assert np.max(np.abs(np.diff(slope))) < 0.02


@pytest.mark.parametrize(
    ("duct", "reynolds", "name"),
    [
        (RoundDuct(1e-3, 1.0), 0.0, "laminar"),
        (RoundDuct(1e-3, 1.0), 500.0, "laminar"),
        (RoundDuct(1e-3, 20e-3), 1500.0, "laminar, developing"),
        (RoundDuct(1e-3, 1.0), 3000.0, "transition"),
        (RoundDuct(1e-3, 1.0), 8000.0, "turbulent"),
        (SquareDuct(0.5e-3, 10e-3), 4600.0, "entrance"),
    ],
)
def test_regime_by_name(duct: RoundDuct | SquareDuct, reynolds: float, name: str) -> None:
    assert regime(reynolds, section_of(duct)) == name


def test_rough_walls_raise_turbulent_friction_only() -> None:
    smooth, rough = (section_of(RoundDuct(1e-3, 0.2), roughness_m=r) for r in (0.0, 20e-6))
    assert isinstance(smooth, Section)
    assert laminar_factor(500.0, rough) == laminar_factor(500.0, smooth)
    assert turbulent_factor(8000.0, rough) > 1.3 * turbulent_factor(8000.0, smooth)


@pytest.mark.parametrize("value", [0.0, -1e-3, math.nan, math.inf])
def test_impossible_sizes_are_refused_by_name(value: float) -> None:
    with pytest.raises(InputError, match="side_m must be finite and above 0 m"):
        section_of(SquareDuct(value, 10e-3))
    with pytest.raises(InputError, match="height_m must be finite and above 0 m"):
        section_of(RectDuct(1e-3, value, 10e-3))
    with pytest.raises(InputError, match="length_m must be finite and above 0 m"):
        section_of(RoundDuct(1e-3, value))


def test_negative_losses_and_roughness_are_refused() -> None:
    with pytest.raises(InputError, match="inlet_loss must be finite and at least 0"):
        section_of(SquareDuct(1e-3, 10e-3, -0.1))
    with pytest.raises(InputError, match="roughness_m must be finite and at least 0"):
        section_of(SquareDuct(1e-3, 10e-3), roughness_m=-1e-6)


def test_channels_narrower_than_a_micrometre_are_refused() -> None:
    with pytest.raises(InputError, match="channel must be at least 1 µm in hydraulic diameter"):
        section_of(RectDuct(1e-3, 0.4e-6, 10e-3))
