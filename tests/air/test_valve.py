"""The membrane valve: its switching law, the estimate from a drawing and the fits to published measurements."""

from __future__ import annotations

import dataclasses
import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from gaitlab.air.elastomer import lift_pressure_Pa, membrane_deflection_m
from gaitlab.air.valve import ValveBank, conductance_share, opening_target, threshold_Pa, valve_numbers
from gaitlab.air.valve_fit import fit_flow_curve, fit_sealing
from gaitlab.air.valve_geometry import curtain_lift_m, full_lift_m, valve_warnings
from gaitlab.errors import InputError
from gaitlab.robot.circuit import BenchRestrictor, IsoPart, SquareDuct, Valve, ValveGeometry
from gaitlab.robot.rubber import youngs_from_shore_Pa

OPEN = SquareDuct(1.2e-3, 6e-3)
VALVE = Valve(16e3, 6e3, 0.15, OPEN, leak_fraction=1e-3, hysteresis_Pa=2e3, travel_s=0.008)
DRAWING = ValveGeometry(0.5e-3, 8e-3, 1e-3, OPEN, shore_A=30.0)
vacuums = st.floats(-5e3, 90e3)


def target(control: float, a: float, b: float, opening: float, valve: Valve = VALVE) -> float:
    """Opening target of one valve."""
    values = (np.array([v]) for v in (control, a, b, opening))
    return float(opening_target(*values, ValveBank.of([valve]))[0][0])


def test_shut_below_and_open_above() -> None:
    assert target(0.0, 0.0, 0.0, 0.0) == 0.0
    assert target(16e3, 0.0, 0.0, 0.0) == 0.0
    assert target(19e3, 0.0, 0.0, 0.0) == pytest.approx(0.5)
    assert target(22e3, 0.0, 0.0, 0.0) == 1.0


def test_vacuum_on_the_flow_side_holds_it_shut() -> None:
    # 40 kPa on one side raises the threshold by sealing × 40 kPa = 6 kPa (within the 200 Pa blend).
    assert target(21e3, 0.0, 40e3, 0.0) == pytest.approx(0.0, abs=0.001)
    assert target(25e3, 0.0, 40e3, 0.0) == pytest.approx(0.5, abs=0.02)
    assert threshold_Pa(VALVE, 40e3, 0.0) == pytest.approx(22e3)


def test_hysteresis_keeps_an_open_valve_open() -> None:
    assert target(16e3, 0.0, 0.0, 0.0) == 0.0
    assert target(17e3, 0.0, 0.0, 1.0) == pytest.approx(0.5)
    assert target(14e3, 0.0, 0.0, 1.0) == 0.0


@settings(max_examples=100, deadline=None)
@given(vacuums, vacuums, vacuums, st.floats(0.0, 1.0), st.floats(-20e3, 20e3))
def test_only_pressure_differences_matter(control: float, a: float, b: float, opening: float, shift: float) -> None:
    # The membrane feels no absolute pressure: raising control and both flow sides together changes nothing.
    shifted = target(control + shift, a + shift, b + shift, opening)
    assert shifted == pytest.approx(target(control, a, b, opening), abs=1e-9)


@settings(max_examples=100, deadline=None)
@given(vacuums, vacuums, vacuums, st.floats(0.0, 1.0))
def test_the_two_flow_ends_are_alike(control: float, a: float, b: float, opening: float) -> None:
    assert target(control, a, b, opening) == target(control, b, a, opening)


@settings(max_examples=150, deadline=None)
@given(vacuums, vacuums, vacuums, st.floats(0.0, 1.0))
def test_slopes_against_central_differences(control: float, a: float, b: float, opening: float) -> None:
    bank, at = ValveBank.of([VALVE]), np.array([[control], [a], [b], [opening]])
    _, slopes = opening_target(*at, bank)
    found = (slopes.by_control, slopes.by_a, slopes.by_b, slopes.by_opening)
    for row, (slope, step) in enumerate(zip(found, (1.0, 1.0, 1.0, 1e-4), strict=True)):
        moved = np.zeros((4, 1))
        moved[row] = step
        near = (opening_target(*(at + moved), bank)[0] - opening_target(*(at - moved), bank)[0]) / (2 * step)
        assert slope[0] == pytest.approx(near[0], abs=2e-3 / (6e3 if row < 3 else 1.0))


def test_the_shut_valve_leaks_and_never_disappears() -> None:
    bank = ValveBank.of([VALVE, dataclasses.replace(VALVE, leak_fraction=1e-4)])
    assert conductance_share(np.zeros(2), bank) == pytest.approx([1e-3, 1e-4])
    assert conductance_share(np.ones(2), bank) == pytest.approx([1.0, 1.0])


# Jensen, Grover & Mathies, J. Microelectromech. Syst. 16(6) 1378 (2007), fig. 3c: air flow [mL/min] through one valve
# against control vacuum [kPa], read off the figure to ±0.3 kPa and ±0.1 mL/min.
JENSEN_FLOW = [
    (0.0, 0.0),
    (20.0, 0.0),
    (31.0, 0.05),
    (31.7, 0.06),
    (34.0, 3.44),
    (36.1, 4.49),
    (38.0, 8.37),
    (44.2, 10.34),
    (54.0, 10.35),
    (64.0, 10.47),
    (74.2, 10.65),
    (86.9, 11.55),
]
# Fig. 3a of the same paper: vacuum that a valve passes to a dead end [kPa] against its control vacuum, 87 kPa supplied.
JENSEN_PASSED = [(29.9, 2.0), (35.0, 8.6), (40.0, 16.5), (50.0, 31.4), (60.1, 46.0), (72.1, 65.2), (86.9, 83.9)]


def test_flow_curve_of_jensen_2007_is_reproduced_by_a_fit() -> None:
    control, flow = (np.array(column) for column in zip(*JENSEN_FLOW, strict=True))
    fit = fit_flow_curve(1e3 * control, flow)
    misfit = np.abs(fit.flow(1e3 * control) - flow) / fit.full_flow
    steep = (control >= 34.0) & (control <= 38.0)
    assert np.all(misfit[~steep] < 0.10)
    assert fit.full_flow == pytest.approx(10.7, rel=0.05)
    assert fit.rms < 0.06


def test_threshold_of_jensen_2007_within_1_kPa() -> None:
    # Where flow passes 5 % of the full one: straight between the measured points 31.7 and 34.0 kPa, and in the fit.
    control, flow = (np.array(column) for column in zip(*JENSEN_FLOW, strict=True))
    fit = fit_flow_curve(1e3 * control, flow)
    measured = float(np.interp(0.05 * fit.full_flow, flow[:5], 1e3 * control[:5]))
    fine = np.linspace(20e3, 50e3, 3001)
    fitted = float(np.interp(0.05 * fit.full_flow, fit.flow(fine), fine))
    assert fitted == pytest.approx(measured, abs=1e3)


def test_self_sealing_of_jensen_2007_is_what_the_law_says() -> None:
    # Two numbers, threshold and sealing, reproduce all seven equilibria within 2 kPa; the slope 1.5 of the figure is
    # 1/(1 − sealing); at full control the valve passes 96 to 99 % of the supply.
    control, passed = (1e3 * np.array(column) for column in zip(*JENSEN_PASSED, strict=True))
    threshold, sealing = fit_sealing(control, passed, 87e3)
    assert 1.0 / (1.0 - sealing) == pytest.approx(1.5, abs=0.05)
    valve = dataclasses.replace(VALVE, threshold_Pa=threshold, sealing=sealing)
    settled = (control - threshold - sealing * 87e3) / (1.0 - sealing)
    assert settled == pytest.approx(passed, abs=2e3)
    assert [threshold_Pa(valve, 87e3, v) for v in settled] == pytest.approx(list(control), abs=1.0)
    assert 0.96 < settled[-1] / 87e3 < 0.99


def test_a_fit_recovers_the_law_it_came_from() -> None:
    control = np.linspace(0.0, 40e3, 15)
    bank = ValveBank.of([dataclasses.replace(VALVE, hysteresis_Pa=0.0)] * 15)
    zeros = np.zeros(15)
    flow = 8.0 * conductance_share(opening_target(control, zeros, zeros, zeros, bank)[0], bank)
    fit = fit_flow_curve(control, flow)
    assert (fit.start_Pa, fit.opening_span_Pa) == (pytest.approx(16e3, abs=5.0), pytest.approx(6e3, abs=10.0))
    assert fit.full_flow == pytest.approx(8.0, rel=1e-4)
    assert fit.leak_fraction == pytest.approx(1e-3, rel=0.05)
    assert fit.threshold_Pa(40e3, 0.15) == pytest.approx(fit.start_Pa - 6e3)


@pytest.mark.parametrize(
    ("control", "flow", "message"),
    [
        ([0.0, 1.0, 2.0], [0.0, 1.0, 2.0], "table must be at least 5 pairs"),
        ([0.0, 1.0, 2.0, 3.0, 4.0], [0.0, 1.0], "table must be at least 5 pairs"),
        ([0.0, 1.0, 2.0, 3.0, math.nan], [0.0] * 4 + [1.0], "table must be finite numbers"),
        ([0.0, 1.0, 2.0, 3.0, 4.0], [0.0] * 5, "table must be one with a flow above 0"),
    ],
)
def test_useless_flow_tables_are_refused(control: list[float], flow: list[float], message: str) -> None:
    with pytest.raises(InputError, match=message):
        fit_flow_curve(control, flow)


def test_useless_sealing_tables_are_refused() -> None:
    with pytest.raises(InputError, match="table must be at least two pairs"):
        fit_sealing([30e3], [2e3], 87e3)


@pytest.mark.parametrize(("youngs", "thickness", "micrometres"), [(750e3, 254e-6, 267), (480e6, 25.4e-6, 66.7)])
def test_membranes_of_grover_2008(youngs: float, thickness: float, micrometres: float) -> None:
    # Grover et al., Lab Chip 8(6) 913 (2008): a = 650 µm, 70 kPa; rubber membrane 267 µm, fluoropolymer film 66.7 µm.
    found = membrane_deflection_m(70e3, radius_m=650e-6, thickness_m=thickness, youngs_Pa=youngs)
    assert 1e6 * found == pytest.approx(micrometres, rel=5e-3)


def test_lift_pressure_is_bending_then_stretching() -> None:
    shape = {"radius_m": 4e-3, "thickness_m": 0.5e-3, "youngs_Pa": 1.1e6}
    # Small lift: clamped plate, q = 64 D w/a⁴ with D = E h³/(12 (1 − ν²)) (Timoshenko & Woinowsky-Krieger, eq. 62).
    stiffness = 1.1e6 * 0.5e-3**3 / (12 * (1 - 0.25))
    assert lift_pressure_Pa(1e-6, **shape) == pytest.approx(64 * stiffness * 1e-6 / 4e-3**4, rel=1e-4)
    # Large lift: the membrane formula.
    thin = shape | {"thickness_m": 10e-6}
    assert membrane_deflection_m(lift_pressure_Pa(1e-3, **thin), **thin) == pytest.approx(1e-3, rel=1e-3)


def test_a_drawing_becomes_numbers() -> None:
    valve = valve_numbers(DRAWING)
    assert valve.open == OPEN
    assert valve.threshold_Pa == pytest.approx(0.5 * 0.3 * 101_325.0)
    assert valve.sealing == pytest.approx(0.35)
    # Full opening: curtain ½ w · span as large as the channel's 1.44 mm².
    assert full_lift_m(DRAWING) == pytest.approx(2 * 1.44e-6 / 8e-3)
    assert 1e3 < valve.opening_span_Pa < 4e3


def test_a_stiffer_or_smaller_membrane_needs_more_vacuum() -> None:
    base = valve_numbers(DRAWING).opening_span_Pa
    harder = dataclasses.replace(DRAWING, shore_A=60.0)
    thicker = dataclasses.replace(DRAWING, membrane_m=1e-3)
    smaller = dataclasses.replace(DRAWING, span_m=6e-3)
    assert all(valve_numbers(valve).opening_span_Pa > 2 * base for valve in (harder, thicker, smaller))


def test_modulus_and_hardness_say_the_same() -> None:
    by_modulus = dataclasses.replace(DRAWING, shore_A=None, youngs_Pa=youngs_from_shore_Pa(30.0))
    assert valve_numbers(by_modulus) == valve_numbers(DRAWING)


def test_valves_with_numbers_stay_as_they_are() -> None:
    assert valve_numbers(VALVE) is VALVE


@pytest.mark.parametrize("both", [{"youngs_Pa": 1e6}, {"shore_A": None}])
def test_exactly_one_stiffness_is_wanted(both: dict[str, float | None]) -> None:
    with pytest.raises(InputError, match="valve must be given by exactly one of youngs_MPa and shore_A"):
        valve_numbers(dataclasses.replace(DRAWING, **both))  # type: ignore[arg-type]


def test_open_parts_of_every_kind_have_an_area() -> None:
    sheet = dataclasses.replace(DRAWING, open=IsoPart(2e-9, 0.4))
    bench = dataclasses.replace(DRAWING, open=BenchRestrictor(57e3, 41e3, 7e-3 / 60, "mass"))
    assert curtain_lift_m(sheet) == pytest.approx(2e-9 * 1.185 * math.sqrt(287.05 * 293.15) / 0.6847 / 4e-3, rel=1e-3)
    assert curtain_lift_m(bench) == pytest.approx(0.25e-6 / 4e-3, rel=0.01)


def test_a_shallow_gap_is_named() -> None:
    assert [text.split(":")[0] for text in valve_warnings(DRAWING)] == ["estimate"]
    shallow = dataclasses.replace(DRAWING, gap_m=0.2e-3)
    assert [text.split(":")[0] for text in valve_warnings(shallow)] == ["estimate", "shallow_gap"]
    assert full_lift_m(shallow) == 0.2e-3
