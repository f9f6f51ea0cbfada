"""A vessel filled and emptied through one element: closed forms against an integrator driven by the fast form."""

from __future__ import annotations

import math

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.integrate import solve_ivp

from gaitlab.air.bench import RiseReading, rise_time_s
from gaitlab.air.elements import FlowElements
from gaitlab.air.iso import equivalent_area_m2, iso_law
from gaitlab.air.tables import iso_table, pressure_knots
from gaitlab.robot.circuit import FlowPart, IsoPart, RoundDuct, SquareDuct
from gaitlab.robot.fields import DM3_S_BAR
from tests.air.parts import GAS, PARTS, ATMOSPHERE_Pa

RT = GAS.RT
VESSEL_M3 = 10e-6
PART = IsoPart(0.02 * DM3_S_BAR, 0.4)
TAU_S = VESSEL_M3 / (PART.sonic_conductance_m3_s_Pa * 1.185 * RT)  # V/(C ρ0 R T)
# A tube so thin that friction is all: Reynolds below 1, its ends below 1e-5 of the loss.
CAPILLARY = RoundDuct(0.05e-3, 1.0)


def without_linear_start() -> FlowElements:
    """The data-sheet part as the standard has it; the closed forms below know no linear start."""
    return FlowElements([iso_table(iso_law(PART, GAS, laminar_reynolds=1e-3), pressure_knots(GAS))])


def time_to(elements: FlowElements, start_Pa: float, other_Pa: float, end_Pa: float, volume_m3: float) -> float:
    """Time [s] in which an isothermal vessel goes from `start_Pa` to `end_Pa`, joined to `other_Pa` by one element."""

    def rates(_: float, p: NDArray[np.float64]) -> NDArray[np.float64]:
        return -RT / volume_m3 * elements.flow(p, np.array([other_Pa]))[0]

    def slopes(_: float, p: NDArray[np.float64]) -> NDArray[np.float64]:
        return -RT / volume_m3 * elements.flow(p, np.array([other_Pa]))[1][:, None]

    def reached(_: float, p: NDArray[np.float64]) -> float:
        return float(p[0] - end_Pa)

    reached.terminal = True  # type: ignore[attr-defined]
    run = solve_ivp(rates, (0.0, 1e3), [start_Pa], "Radau", events=reached, jac=slopes, rtol=1e-8, atol=1e-3)
    return float(run.t_events[0][0])


def test_the_time_constant_as_computed_independently() -> None:
    assert pytest.approx(0.501423, abs=1e-6) == TAU_S


def test_choked_discharge_is_exponential() -> None:
    # p0 e^(−t/τ): 600 → 253.3125 kPa, where choking to 101.325 kPa ends at b = 0.4, in 0.432380 s.
    assert TAU_S * math.log(600 / 253.3125) == pytest.approx(0.432380, abs=1e-6)
    knots = FlowElements([iso_table(iso_law(PART, GAS, laminar_reynolds=1e-3), np.geomspace(2e3, 700e3, 24))])
    assert time_to(knots, 600e3, ATMOSPHERE_Pa, 253.3125e3, VESSEL_M3) == pytest.approx(0.432380, rel=1e-4)


def test_charging_follows_the_ellipse() -> None:
    # Choked until r = b: τ (b − r0); then r = b + (1 − b) sin(t/((1 − b) τ)); full after τ [(b − r0) + (1 − b) π/2].
    start, ratio = 0.1, 0.999
    assert TAU_S * (0.3 + 0.6 * math.pi / 2) == pytest.approx(0.623007, abs=1e-6)
    expected = TAU_S * (0.3 + 0.6 * math.asin((ratio - 0.4) / 0.6))
    found = time_to(without_linear_start(), start * ATMOSPHERE_Pa, ATMOSPHERE_Pa, ratio * ATMOSPHERE_Pa, VESSEL_M3)
    assert found == pytest.approx(expected, rel=1e-4)


def test_isothermal_choked_blow_down_of_white() -> None:
    # White, Fluid Mechanics, 8th ed., P3.27: the density has dropped by 25 % at t = 0.42 V/(A √(R T0)).
    area = equivalent_area_m2(PART)
    found = time_to(without_linear_start(), 240e3, 20e3, 180e3, VESSEL_M3)
    assert found * area * math.sqrt(RT) / VESSEL_M3 == pytest.approx(0.42, abs=0.005)


def laminar_time_s(start_Pa: float, end_Pa: float, source_Pa: float, g: float, volume_m3: float) -> float:
    """t of p_s R T g t/V = artanh(p/p_s) − artanh(p0/p_s), filling; arcoth for emptying (p above p_s)."""
    inverse = [math.atanh(min(p, source_Pa) / max(p, source_Pa)) for p in (start_Pa, end_Pa)]
    return abs(inverse[1] - inverse[0]) * volume_m3 / (source_Pa * RT * g)


def test_laminar_exchange_as_computed_independently() -> None:
    # Tube 0.4 × 50 mm, 5 mL, −60 kPa supply, laminar formula: evacuating to −30 kPa 79.65 ms, venting to −30 kPa 62.83 ms.
    g = math.pi * (0.4e-3) ** 4 / (256 * 1.81e-5 * RT * 50e-3)  # computed with 1.81e-5 Pa s
    low, middle = ATMOSPHERE_Pa - 60e3, ATMOSPHERE_Pa - 30e3
    assert 1e3 * laminar_time_s(ATMOSPHERE_Pa, middle, low, g, 5e-6) == pytest.approx(79.65, abs=0.01)
    assert 1e3 * laminar_time_s(low, middle, ATMOSPHERE_Pa, g, 5e-6) == pytest.approx(62.83, abs=0.01)


@pytest.mark.parametrize(("start_kPa", "source_kPa", "end_kPa"), [(44.3, 101.325, 96.3), (101.325, 41.325, 71.325)])
def test_laminar_filling_and_emptying_follow_tanh_and_coth(start_kPa: float, source_kPa: float, end_kPa: float) -> None:
    from gaitlab.air.section import section_of

    g = 1.0 / section_of(CAPILLARY).laminar_Pa2_s_per_kg(GAS.viscosity_Pa_s(), RT)
    start, source, end = (1e3 * p for p in (start_kPa, source_kPa, end_kPa))
    found = time_to(FlowElements.of([CAPILLARY], GAS), start, source, end, 1e-12)
    assert found == pytest.approx(laminar_time_s(start, end, source, g, 1e-12), rel=1e-4)


@pytest.mark.parametrize(
    ("name", "milliseconds"),
    [("square 0.5", 194.7), ("square 1.0", 43.0), ("tube 1 x 200", 111.8), ("tube 2 x 1000", 40.4)],
)
def test_filling_times_computed_independently(name: str, milliseconds: float) -> None:
    # 10 mL from 44.3 to 96.3 kPa out of the atmosphere, isothermal.
    part: FlowPart = PARTS[name]
    fast = time_to(FlowElements.of([part], GAS), 44.3e3, ATMOSPHERE_Pa, 96.3e3, VESSEL_M3)
    assert 1e3 * fast == pytest.approx(milliseconds, rel=0.02)
    reading = RiseReading(ATMOSPHERE_Pa - 44.3e3, ATMOSPHERE_Pa - 96.3e3, VESSEL_M3, 1.0)
    assert isinstance(part, SquareDuct | RoundDuct)
    assert 1e3 * rise_time_s(part, reading, GAS) == pytest.approx(milliseconds, rel=3e-3)
