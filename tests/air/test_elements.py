"""The fast form against the exact model, and the smoothness an integrator counts on."""

from __future__ import annotations

from functools import lru_cache

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray

from gaitlab.air.duct import exact_mass_flow
from gaitlab.air.elements import FlowElements
from gaitlab.air.tables import ELLIPSE_KNOTS
from gaitlab.errors import InputError
from tests.air.parts import GAS, PARTS, ATMOSPHERE_Pa
from tests.air.test_duct import COMPUTED_MG_S, DROPS_KPA

NAMES = tuple(PARTS)
ALL = FlowElements.of(list(PARTS.values()), GAS)
RATIOS = (0.02, 0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 0.95, 0.98, 0.99, 0.998, 0.9995, 0.9999)
BLOCK = 1000
FloatArray = NDArray[np.float64]


@lru_cache(maxsize=4)
def block_of(name: str) -> FlowElements:
    """Many equal elements, so that a sweep takes few calls."""
    return FlowElements.of([PARTS[name]] * BLOCK, GAS)


def flow_of(name: str, p_a: float | FloatArray, p_b: float | FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Flow and slopes of one part at many pressures."""
    a, b = np.broadcast_arrays(np.atleast_1d(np.asarray(p_a, float)), np.atleast_1d(np.asarray(p_b, float)))
    blocks = -(-a.size // BLOCK)
    sides = [np.resize(side, blocks * BLOCK).reshape(blocks, BLOCK) for side in (a, b)]
    found = [block_of(name).flow(*pair) for pair in zip(*sides, strict=True)]
    flow, by_a, by_b = (np.concatenate(column)[: a.size] for column in zip(*found, strict=True))
    return flow, by_a, by_b


@pytest.mark.parametrize("up_Pa", np.geomspace(8e3, 200e3, 5))
def test_within_two_percent_of_the_exact_model(up_Pa: float) -> None:
    for ratio in RATIOS:
        fast = ALL.flow(np.full(len(NAMES), up_Pa), np.full(len(NAMES), ratio * up_Pa))[0]
        exact = [exact_mass_flow(part, up_Pa, ratio * up_Pa, GAS) for part in PARTS.values()]
        assert fast == pytest.approx(exact, rel=0.02)


def test_root_mean_square_error_is_below_one_percent() -> None:
    up = 60e3
    errors = [
        ALL.flow(np.full(len(NAMES), up), np.full(len(NAMES), r * up))[0]
        / [exact_mass_flow(part, up, r * up, GAS) for part in PARTS.values()]
        - 1.0
        for r in RATIOS
    ]
    assert np.sqrt(np.mean(np.square(errors))) < 0.008


@pytest.mark.parametrize("name", COMPUTED_MG_S)
def test_flows_computed_independently_within_two_percent(name: str) -> None:
    down = np.array([ATMOSPHERE_Pa - 1e3 * drop for drop in DROPS_KPA])
    assert 1e6 * flow_of(name, ATMOSPHERE_Pa, down)[0] == pytest.approx(COMPUTED_MG_S[name], rel=0.02)


@settings(max_examples=60, deadline=None)
@given(st.floats(3e3, 2.4e5), st.floats(3e3, 2.4e5))
def test_jacobian_against_central_differences(first: float, second: float) -> None:
    a, b, step = np.full(len(NAMES), first), np.full(len(NAMES), second), 0.02
    _, by_a, by_b = ALL.flow(a, b)
    scale = np.abs(by_a) + np.abs(by_b)
    near_a = (ALL.flow(a + step, b)[0] - ALL.flow(a - step, b)[0]) / (2 * step)
    near_b = (ALL.flow(a, b + step)[0] - ALL.flow(a, b - step)[0]) / (2 * step)
    # Where the slope itself bends within the step (near zero difference) the difference quotient is the coarser one.
    loose = 0.3 if abs(first - second) < 20 * step else 2e-4
    assert np.all(np.abs(near_a - by_a) <= loose * scale)
    assert np.all(np.abs(near_b - by_b) <= loose * scale)


@settings(max_examples=60, deadline=None)
@given(st.floats(1e3, 2.4e5), st.floats(1e3, 2.4e5))
def test_reversed_pressures_reverse_flow_and_slopes(first: float, second: float) -> None:
    a, b = np.full(len(NAMES), first), np.full(len(NAMES), second)
    there, back = ALL.flow(a, b), ALL.flow(b, a)
    assert np.array_equal(there[0], -back[0])
    if first != second:
        assert np.array_equal(there[1], -back[2])
        assert np.array_equal(there[2], -back[1])


@settings(max_examples=60, deadline=None)
@given(st.floats(2e3, 2.4e5), st.floats(2e3, 2.4e5))
def test_more_pressure_never_means_less_flow(first: float, second: float) -> None:
    _, by_a, by_b = ALL.flow(np.full(len(NAMES), first), np.full(len(NAMES), second))
    assert np.all(by_a >= -1e-20)
    assert np.all(by_b <= 1e-20)


def largest_jump(name: str, down_Pa: FloatArray) -> float:
    """Largest change of the slope dm/dp_b between neighbouring points, over the largest slope."""
    slope = flow_of(name, ATMOSPHERE_Pa, down_Pa)[2]
    return float(np.max(np.abs(np.diff(slope))) / np.max(np.abs(slope)))


@pytest.mark.parametrize("name", NAMES)
@pytest.mark.parametrize(
    ("where", "low", "high"),
    [("choking", 2e3, 60e3), ("transition", 60e3, 101e3), ("zero", ATMOSPHERE_Pa - 50.0, ATMOSPHERE_Pa + 50.0)],
)
def test_slope_is_continuous(name: str, where: str, low: float, high: float) -> None:
    # A kink keeps its jump however fine the grid; a continuous slope's jumps shrink with the step (down to 0.2 % of the
    # steepest slope, what the first interval of the flow's table spreads over a few mPa).
    coarse, fine = (largest_jump(name, np.linspace(low, high, points)) for points in (2001, 16001))
    assert fine < max(0.5 * coarse, 2e-3)
    assert fine < 0.15


@pytest.mark.parametrize("name", NAMES)
def test_flow_is_the_integral_of_its_slope(name: str) -> None:
    # Continuity of the flow itself, from far below choking to reversed flow: between two points it changes by no more
    # than its steepest slope allows; the slope is steepest at zero difference, which is one of the points.
    away = np.geomspace(1e-4, 99e3, 15000)
    down = np.concatenate([ATMOSPHERE_Pa - away[::-1], [ATMOSPHERE_Pa], ATMOSPHERE_Pa + away])
    flow, _, slope = flow_of(name, ATMOSPHERE_Pa, down)
    steepest = np.maximum(np.abs(slope[1:]), np.abs(slope[:-1]))
    assert np.all(np.abs(np.diff(flow)) <= 1.02 * steepest * np.diff(down) + 1e-18)


@pytest.mark.parametrize("name", NAMES)
def test_upstream_slope_is_continuous_across_the_table_of_critical_ratios(name: str) -> None:
    up = np.linspace(9e3, 200e3, 8001)
    slope = flow_of(name, up, 8e3)[1]
    assert np.max(np.abs(np.diff(slope))) < 0.05 * np.max(slope)


def test_zero_difference_has_the_laminar_slope() -> None:
    # m = (p_u² − p_d²)/a: dm/dp = 2 p/a at zero difference.
    name = "tube 0.15 x 100"
    from gaitlab.air.section import section_of

    linear = section_of(PARTS[name]).laminar_Pa2_s_per_kg(GAS.viscosity_Pa_s(), GAS.RT)
    flow, by_a, by_b = flow_of(name, 50e3, 50e3)
    assert flow[0] == 0.0
    assert by_a[0] == pytest.approx(2 * 50e3 / linear, rel=2e-3)
    assert by_b[0] == pytest.approx(-by_a[0], rel=1e-12)


def test_choked_flow_does_not_feel_the_pressure_behind() -> None:
    _, by_a, by_b = flow_of("square 0.5", 101e3, 10e3)
    assert abs(by_b[0]) < 1e-9 * by_a[0]


def test_trial_steps_outside_the_range_stay_finite() -> None:
    for pressures in ((-5e3, 2e3), (0.0, 0.0), (5e6, 1e5), (1.0, -1e5)):
        for values in ALL.flow(np.full(len(NAMES), pressures[0]), np.full(len(NAMES), pressures[1])):
            assert np.all(np.isfinite(values))


def test_a_table_takes_less_than_10_kB() -> None:
    assert ALL.bytes_per_element < 10_000
    assert ELLIPSE_KNOTS == 96


def test_results_are_not_shared_between_calls() -> None:
    a, b = np.full(len(NAMES), 101e3), np.full(len(NAMES), 60e3)
    first = ALL.flow(a, b)
    kept = [values.copy() for values in first]
    ALL.flow(b, a)
    assert all(np.array_equal(values, copy) for values, copy in zip(first, kept, strict=True))


def test_no_elements_are_refused() -> None:
    with pytest.raises(InputError, match="parts must be at least one flow part"):
        FlowElements.of([], GAS)
