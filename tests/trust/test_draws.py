"""Draws: distributions against their closed forms, bounds, seeds, and what a bad tolerance says."""

import dataclasses
import json
import tracemalloc
from pathlib import Path

import numpy as np
import pytest
from scipy import stats

from gaitlab.errors import InputError
from gaitlab.robot.reader import read_robot, robot_from_document
from gaitlab.robot.records import Tolerance
from gaitlab.trust.draws import checked_draws, drawn_value, draws, quantile_of, sobol_points
from gaitlab.trust.tolerances import tolerances_of

ROW5 = Path(__file__).parents[2] / "robots" / "tray_row5.toml"


@pytest.fixture(scope="module")
def row5():
    document = read_robot(ROW5).document
    document["ring"]["resistor"] = {"square_mm": 0.5, "length_mm": 10}
    document["foot"]["pad"]["friction"] = 0.6
    return document


def test_uniform_reaches_its_limits_and_no_further():
    t = Tolerance("x", plus_minus=0.05)
    assert drawn_value(t, 0.5, 0.0) == pytest.approx(0.45)
    assert drawn_value(t, 0.5, 1.0) == pytest.approx(0.55)


def test_normal_half_width_is_two_standard_deviations():
    u = np.linspace(0.0005, 0.9995, 1000)
    values = [drawn_value(Tolerance("x", "normal", percent=10.0), 200.0, float(q)) for q in u]
    assert values == pytest.approx(stats.norm(200, 10).ppf(u), rel=1e-12)


def test_lognormal_half_width_is_two_standard_deviations_of_the_logarithm():
    u = np.linspace(0.01, 0.99, 99)
    values = [drawn_value(Tolerance("x", "lognormal", percent=30.0), 0.6, float(q)) for q in u]
    assert values == pytest.approx(stats.lognorm(np.log(1.3) / 2, scale=0.6).ppf(u), rel=1e-12)


@pytest.mark.parametrize("kind", ["uniform", "normal", "lognormal"])
def test_quantile_is_the_inverse_of_the_draw(kind):
    t = Tolerance("x", kind, percent=25.0)
    for u in (0.03, 0.5, 0.91):
        assert quantile_of(t, 8.0, drawn_value(t, 8.0, u)) == pytest.approx(u, abs=1e-12)


def test_points_fill_each_axis_evenly():
    """A digital net in base 2: 64 points put exactly one in each 64th of every axis."""
    points = np.array(list(sobol_points(64, 12, seed=9)))
    assert all(sorted((64 * column).astype(int)) == list(range(64)) for column in points.T)


def test_seed_repeats_and_more_draws_only_append():
    few = np.array(list(sobol_points(70, 3, seed=2)))
    many = np.array(list(sobol_points(200, 3, seed=2)))
    assert few.tobytes() == many[:70].tobytes()
    assert not np.array_equal(few, np.array(list(sobol_points(70, 3, seed=5))))


@pytest.mark.parametrize("count", [0, -3, 1.5, True])
def test_draws_must_be_a_count(count):
    with pytest.raises(InputError, match="draws must be a whole number of at least 1"):
        sobol_points(count, 2, seed=0)


@pytest.mark.parametrize("seed", [-1, 0.5, "7", None, True])
def test_seed_must_be_a_whole_number(seed):
    with pytest.raises(InputError, match="seed must be a whole number of at least 0"):
        sobol_points(4, 2, seed=seed)


def test_every_default_draw_is_a_robot(row5):
    built = list(checked_draws(tolerances_of(row5), 64, seed=1))
    assert [d.number for d in built] == list(range(64))
    widths = [stage["resistor"]["square_mm"] for d in built for stage in d.document["ring"]["stage"]]
    assert len(set(widths)) == 64 * 5
    assert 0.45 <= min(widths) < 0.452 and 0.548 < max(widths) <= 0.55


def test_zero_tolerances_leave_the_robot_as_it_is(row5):
    zero = [
        Tolerance("ring.resistor.square_mm", percent=0.0, each="stage"),
        Tolerance("foot.pad.friction", "normal", percent=0.0),
    ]
    robots = {robot_from_document(d.document) for d in draws(tolerances_of(row5, zero), 8, seed=3)}
    assert len(robots) == 1
    assert robots.pop().ring.overrides[2].resistor == robot_from_document(row5).ring.resistor


def test_equal_seeds_give_equal_bytes(row5):
    t = tolerances_of(row5)
    first, second = (json.dumps([d.document for d in draws(t, 16, seed=6)]) for _ in range(2))
    assert first == second


def test_a_size_below_zero_names_draw_and_key(row5):
    wide = tolerances_of(row5, [Tolerance("ring.resistor.square_mm", plus_minus=0.8, each="stage")])
    with pytest.raises(
        InputError, match=r"draw \d+: ring\.stage\.\d\.resistor\.square_mm must be above 0 .*truncate = true"
    ):
        list(draws(wide, 64, seed=0))


@pytest.mark.parametrize("kind", ["uniform", "normal"])
def test_truncate_cuts_the_distribution_at_the_bound(row5, kind):
    """The truncated distribution, not a pile of draws at the bound: against scipy's own truncated laws."""
    t = tolerances_of(row5, [Tolerance("foot.pad.friction", kind, plus_minus=1.2, truncate=True)])
    values = sorted(d.document["foot"]["pad"]["friction"] for d in draws(t, 512, seed=0))
    law = stats.uniform(0, 1.8) if kind == "uniform" else stats.truncnorm(-1.0, (5 - 0.6) / 0.6, loc=0.6, scale=0.6)
    assert stats.kstest(values, law.cdf).statistic < 0.01
    assert values[0] > 0


def test_a_build_that_cannot_be_is_refused_by_its_number(row5):
    shrunk = tolerances_of(row5, [Tolerance("bellows.leg.solid_bend_deg", plus_minus=84.0)])
    with pytest.raises(InputError, match=r"draw \d+ of the tolerances gives no robot"):
        list(checked_draws(shrunk, 64, seed=0))


def test_one_number_of_a_list_and_a_whole_list():
    document = read_robot(ROW5).document
    document["supply"] = {"table_vacuum_kPa": [0, 30, 57], "table_flow_L_min": [9.0, 4.0, 0.0], "buffer_mL": 60}
    given = [Tolerance("body.leg.b.at_mm.0", plus_minus=1.0), Tolerance("supply.table_flow_L_min", percent=10.0)]
    for d in draws(tolerances_of(document, given), 16, seed=1):
        assert 33 <= d.document["body"]["leg"][1]["at_mm"][0] <= 35
        flow = d.document["supply"]["table_flow_L_min"]
        assert flow[2] == 0.0 and flow[0] / flow[1] == pytest.approx(9 / 4)


def test_truncate_keeps_every_number_of_a_whole_list_within_bounds():
    """A pump whose flow is known to ±200 %: refused below 0 as it stands; cut, its factor follows scipy's truncated normal."""
    document = read_robot(ROW5).document
    document["supply"] = {"table_vacuum_kPa": [0, 30, 57], "table_flow_L_min": [9.0, 4.0, 0.0], "buffer_mL": 60}
    wide = Tolerance("supply.table_flow_L_min", "normal", percent=200.0)
    with pytest.raises(InputError, match=r"draw \d+: supply\.table_flow_L_min must be at least 0"):
        list(draws(tolerances_of(document, [wide]), 64, seed=0))
    cut = tolerances_of(document, [dataclasses.replace(wide, truncate=True)])
    flows = np.array([d.document["supply"]["table_flow_L_min"] for d in draws(cut, 512, seed=0)])
    assert np.all(flows >= 0.0) and flows[:, 1] == pytest.approx(flows[:, 0] * 4 / 9)
    assert stats.kstest(flows[:, 0] / 9.0, stats.truncnorm(-1.0, np.inf, loc=1.0).cdf).statistic < 0.01


def test_memory_does_not_grow_with_the_number_of_draws(row5):
    t = tolerances_of(row5)

    def peak(count):
        tracemalloc.start()
        for _ in draws(t, count, seed=1):
            pass
        return (tracemalloc.get_traced_memory()[1], tracemalloc.stop())[0]

    peak(64)
    assert peak(1024) < 1.5 * peak(128)
