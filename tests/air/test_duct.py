"""The exact duct flow against printed Fanno tables, published ducts and reference libraries."""

from __future__ import annotations

import dataclasses
import math

import pytest
from fluids.compressible import P_critical_flow, is_critical_flow, isothermal_gas
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.optimize import brentq

from gaitlab.air.bench import sonic_numbers
from gaitlab.air.duct import duct_state, exact_mass_flow
from gaitlab.air.fanno import duct_flow, exit_mach, exit_ratio, fanno_number, mass_flux, static_ratio
from gaitlab.air.section import section_of
from gaitlab.errors import InputError
from gaitlab.robot.circuit import FlowPart, RoundDuct, SquareDuct
from tests.air.parts import GAS, PARTS, ATMOSPHERE_Pa


@pytest.mark.parametrize(
    ("mach", "number", "digits"),
    [
        # Farokhi, Aircraft Propulsion, appendix E (γ = 1.4), 4 f L*/D to the printed digits.
        (0.10, 66.922, 3),
        (0.12, 45.408, 3),
        (0.14, 32.511, 3),
        (0.16, 24.198, 3),
        (0.2, 14.533, 3),
        (0.4, 2.3085, 4),
        (0.6, 0.4908, 4),
        (0.8, 0.0723, 4),
    ],
)
def test_fanno_table_of_farokhi(mach: float, number: float, digits: int) -> None:
    assert fanno_number(mach) == pytest.approx(number, abs=0.51 * 10**-digits)


def bar_meir(ratio: float) -> tuple[float, float]:
    """Mach numbers at both ends of a duct of 4 f L/D = 40 for a ratio of *static* pressures p2/p1."""

    def excess(mach: float) -> float:
        return static_ratio(mach, exit_mach(mach, 40.0)) - ratio

    choked = brentq(lambda mach: fanno_number(mach) - 40.0, 1e-3, 1.0)
    if static_ratio(choked, 1.0) >= ratio:
        return choked, 1.0
    mach = brentq(excess, 1e-4, choked)
    return mach, exit_mach(mach, 40.0)


@pytest.mark.parametrize(
    ("ratio", "inlet", "outlet"),
    [(0.3, 0.12420, 0.40790), (0.5, 0.11392, 0.22697), (0.8, 0.07975, 0.09965), (0.1, 0.12728, 1.0)],
)
def test_published_duct_of_bar_meir(ratio: float, inlet: float, outlet: float) -> None:
    # Bar-Meir, Fundamentals of Compressible Fluid Mechanics, Fanno flow with given 4 f L/D = 40 and pressure ratio.
    assert bar_meir(ratio) == pytest.approx((inlet, outlet), abs=1.1e-5)


def test_ideal_nozzle_of_white() -> None:
    # White, Fluid Mechanics: critical ratio 0.5283, m √(R T0)/(A p0) = 0.685; fluids agrees on the critical pressure.
    assert exit_ratio(1.0, 1.0) == pytest.approx(0.528282, abs=1e-6)
    assert exit_ratio(1.0, 1.0) * ATMOSPHERE_Pa == pytest.approx(P_critical_flow(ATMOSPHERE_Pa, 1.4), rel=1e-12)
    flux = mass_flux(1.0, ATMOSPHERE_Pa, GAS)
    assert flux * math.sqrt(GAS.RT) / ATMOSPHERE_Pa == pytest.approx(0.684731, abs=1e-6)
    assert flux == pytest.approx(239.174, abs=1e-2)


@pytest.mark.parametrize("downstream_Pa", [30e3, 53e3, 54e3, 90e3])
def test_a_lossless_hole_chokes_where_fluids_says(downstream_Pa: float) -> None:
    state = duct_state(RoundDuct(1e-3, 1e-9, 0.0), ATMOSPHERE_Pa, downstream_Pa, GAS)
    assert state.choked == is_critical_flow(ATMOSPHERE_Pa, downstream_Pa, 1.4)


# Computed independently of this program: adiabatic duct flow with friction, mg/s from 101.325 kPa over the drop in kPa.
DROPS_KPA = (1.0, 10.0, 40.0, 57.0, 100.0)
COMPUTED_MG_S = {
    "square 0.5": (5.724, 21.769, 39.120, 41.708, 41.909),
    "square 1.0": (30.009, 101.654, 173.631, 182.580, 182.803),
    "tube 1 x 200": (7.307, 38.316, 68.321, 76.226, 79.565),
    "tube 2 x 1000": (24.188, 98.867, 195.683, 221.371, 236.419),
}


@pytest.mark.parametrize("name", COMPUTED_MG_S)
def test_flows_computed_independently(name: str) -> None:
    found = [1e6 * exact_mass_flow(PARTS[name], ATMOSPHERE_Pa, ATMOSPHERE_Pa - 1e3 * drop, GAS) for drop in DROPS_KPA]
    assert found == pytest.approx(COMPUTED_MG_S[name], rel=2e-4)


def test_the_small_channel_is_nearly_choked_not_laminar() -> None:
    # 0.5 × 0.5 × 10 mm with 57 kPa across it: computed Re ≈ 4600, Mach 0.46 in and 0.86 out; the laminar formula says 22 times as much.
    state = duct_state(SquareDuct(0.5e-3, 10e-3), ATMOSPHERE_Pa, ATMOSPHERE_Pa - 57e3, GAS)
    assert state.reynolds == pytest.approx(4600, rel=0.01)
    assert (state.inlet_mach, state.exit_mach) == pytest.approx((0.46, 0.86), abs=0.005)
    linear = section_of(SquareDuct(0.5e-3, 10e-3)).laminar_Pa2_s_per_kg(GAS.viscosity_Pa_s(), GAS.RT)
    laminar = (ATMOSPHERE_Pa**2 - (ATMOSPHERE_Pa - 57e3) ** 2) / linear
    assert 12 < laminar / state.mass_flow_kg_s < 25


def test_a_thin_tube_against_isothermal_flow_of_fluids() -> None:
    # fluids solves isothermal flow with friction exactly when given the density at P1. At Mach numbers below 0.02 and a
    # length of 5000 bores adiabatic and isothermal flow are one, and the ends do not matter.
    tube = RoundDuct(0.2e-3, 1.0, 0.0)
    up, down = ATMOSPHERE_Pa, 80e3
    ours = exact_mass_flow(tube, up, down, GAS)
    reynolds = 4 * ours / (math.pi * 0.2e-3 * GAS.viscosity_Pa_s())
    theirs = isothermal_gas(rho=up / GAS.RT, fd=64 / reynolds, P1=up, P2=down, L=1.0, D=0.2e-3)
    assert reynolds < 100
    assert ours == pytest.approx(theirs, rel=1e-3)


def test_a_long_laminar_tube() -> None:
    # 1 mm × 1 m, 101 325 → 91 325 Pa: 15.4965 mg/s laminar, 14.796 with the losses at its ends (computed independently).
    tube = RoundDuct(1e-3, 1.0)
    section = section_of(tube)
    laminar = (101_325.0**2 - 91_325.0**2) / section.laminar_Pa2_s_per_kg(1.813e-5, GAS.RT)
    assert 1e6 * laminar == pytest.approx(15.4965, abs=1e-4)
    assert 1e6 * exact_mass_flow(tube, 101_325.0, 91_325.0, GAS) == pytest.approx(14.796, rel=3e-4)


def test_how_far_sizes_and_inlets_move_the_flow() -> None:
    # 0.5 mm square, computed independently: inlet loss 0.05…1.5 moves the flow by +10/−14 %, ±0.05 mm by ±22 %.
    base = SquareDuct(0.5e-3, 10e-3)

    def share(duct: SquareDuct) -> float:
        down = ATMOSPHERE_Pa - 57e3
        return exact_mass_flow(duct, ATMOSPHERE_Pa, down, GAS) / exact_mass_flow(base, ATMOSPHERE_Pa, down, GAS) - 1.0

    assert share(dataclasses.replace(base, inlet_loss=0.05)) == pytest.approx(0.10, abs=0.015)
    assert share(dataclasses.replace(base, inlet_loss=1.5)) == pytest.approx(-0.14, abs=0.015)
    assert share(dataclasses.replace(base, side_m=0.55e-3)) == pytest.approx(0.22, abs=0.025)
    assert share(dataclasses.replace(base, side_m=0.45e-3)) == pytest.approx(-0.22, abs=0.025)


def test_a_run_cut_in_two_passes_less_than_one_element() -> None:
    # Two half-length pieces with a chamber between them lose an inlet and an exit more: 20 to 25 % less flow.
    whole, half = SquareDuct(0.5e-3, 10e-3), SquareDuct(0.5e-3, 5e-3)
    down = ATMOSPHERE_Pa - 57e3

    def imbalance(middle_Pa: float) -> float:
        return exact_mass_flow(half, ATMOSPHERE_Pa, middle_Pa, GAS) - exact_mass_flow(half, middle_Pa, down, GAS)

    middle = brentq(imbalance, down * 1.001, ATMOSPHERE_Pa * 0.999)
    split = exact_mass_flow(half, ATMOSPHERE_Pa, middle, GAS)
    assert -0.26 < split / exact_mass_flow(whole, ATMOSPHERE_Pa, down, GAS) - 1.0 < -0.19


def test_sonic_numbers_bound_every_flow() -> None:
    conductance, ratio = sonic_numbers(section_of(SquareDuct(0.5e-3, 10e-3)), GAS, ATMOSPHERE_Pa)
    most = exact_mass_flow(SquareDuct(0.5e-3, 10e-3), ATMOSPHERE_Pa, 1e3, GAS)
    assert conductance * 1.185 * ATMOSPHERE_Pa == pytest.approx(most, rel=1e-9)
    for offset, choked in ((-1e-3, True), (1e-3, False)):
        assert duct_flow(
            section_of(SquareDuct(0.5e-3, 10e-3)), ATMOSPHERE_Pa, (ratio + offset) * ATMOSPHERE_Pa, GAS
        ).choked is choked  # fmt: skip


@settings(max_examples=40, deadline=None)
@given(st.sampled_from(sorted(PARTS)), st.floats(8e3, 2e5), st.floats(8e3, 2e5))
def test_reversing_the_pressures_reverses_the_flow(name: str, first: float, second: float) -> None:
    part: FlowPart = PARTS[name]
    assert exact_mass_flow(part, first, second, GAS) == -exact_mass_flow(part, second, first, GAS)


def test_equal_pressures_mean_no_flow() -> None:
    assert exact_mass_flow(PARTS["square 0.5"], 50e3, 50e3, GAS) == 0.0


@pytest.mark.parametrize("value", [0.0, -5e3, math.nan])
def test_impossible_pressures_are_refused(value: float) -> None:
    with pytest.raises(InputError, match="p_down_Pa must be a finite absolute pressure above 0"):
        exact_mass_flow(PARTS["square 0.5"], 1e5, value, GAS)
