"""Quantiles and chances of many builds: closed forms, coverage, and what must not change them."""

import math

import numpy as np
import pytest
from scipy import stats

from gaitlab.trust.draws import sobol_points
from gaitlab.trust.speed import estimate_from_draws, estimate_from_walk
from gaitlab.trust.summary import Outcome, Quantiles, best_shares, chance, quantiles, summaries


def _walked(travel_m: float) -> Outcome:
    return Outcome("walked", True, travel_m, 2 * travel_m, travel_m)


FELL = Outcome("fell_over", True, math.nan, math.nan, math.nan)
STUCK = Outcome("too_weak", False, math.nan, math.nan, math.nan)


def _model(points: np.ndarray) -> np.ndarray:
    """A smooth, bent, interacting stand-in for a walk with six uncertain numbers (analytic, no simulation)."""
    x = 2 * points - 1
    return 9 + 2 * x[..., 0] - x[..., 1] ** 2 + 0.8 * x[..., 2] * x[..., 3] + 0.5 * np.exp(x[..., 4]) + 0.1 * x[..., 5]


def test_a_true_build_falls_within_p05_to_p95_nine_times_in_ten():
    """Coverage: 200 true builds drawn from the tolerances, each against a spread of 64 draws of its own seed."""
    rng = np.random.default_rng(17)
    held = 0
    for case in range(200):
        spread = quantiles(_model(np.array(list(sobol_points(64, 6, seed=case)))))
        held += spread.p05 <= float(_model(rng.random(6))) <= spread.p95
    assert 0.85 <= held / 200 <= 0.95


def test_quantiles_of_a_known_law():
    u = (np.arange(4096) + 0.5) / 4096
    q = quantiles(stats.norm(10, 2).ppf(u))
    assert (q.p05, q.p50, q.p95) == pytest.approx(stats.norm(10, 2).ppf([0.05, 0.5, 0.95]), abs=0.01)


def test_zero_spread_gives_zero_width():
    q = quantiles(np.full(64, 0.0093))
    assert q.p05 == q.p50 == q.p95 == 0.0093


def test_chance_interval_is_wilsons():
    """Against scipy's own Wilson interval."""
    for count, total in ((0, 64), (7, 64), (64, 64), (199, 200)):
        reference = stats.binomtest(count, total).proportion_ci(0.90, method="wilson")
        c = chance(count, total)
        assert (c.low, c.high) == pytest.approx((reference.low, reference.high), abs=2e-5)
        assert c.share == count / total


def test_best_shares_count_ties_once_and_failures_never():
    travel = np.array([[1.0, 2.0, math.nan], [3.0, 3.0, 1.0], [math.nan] * 3, [-1.0, -2.0, -3.0]])
    assert list(best_shares(travel)) == [1.5, 1.5, 0.0]


def test_the_order_of_wirings_changes_nothing():
    rng = np.random.default_rng(0)
    rows = [[_walked(t) for t in rng.normal(size=4)] for _ in range(50)]
    rows[3][2], rows[7][0] = FELL, STUCK
    turned = [row[::-1] for row in rows]
    assert summaries(turned) == summaries(rows)[::-1]


def test_mirrored_travel_gives_the_mirrored_spread():
    rng = np.random.default_rng(1)
    travel = rng.normal(size=200)
    q, m = quantiles(travel), quantiles(-travel)
    assert (m.p05, m.p50, m.p95) == pytest.approx((-q.p95, -q.p50, -q.p05), rel=1e-12)


def test_failures_are_counted_outcomes():
    rows = [[_walked(0.01)], [_walked(-0.002)], [FELL], [STUCK]]
    (s,) = summaries(rows)
    assert dict(s.outcomes) == {"walked": 2, "fell_over": 1, "too_weak": 1}
    assert (s.forward.share, s.ring_fails.share, s.walks.share) == (0.25, 0.25, 0.5)


def test_nothing_walked_leaves_nothing_to_measure():
    (s,) = summaries([[FELL], [STUCK]])
    assert math.isnan(s.travel_m.p50) and s.best.share == 0.0


def test_speed_in_three_units():
    e = estimate_from_draws(Quantiles(0.004, 0.009, 0.012), Quantiles(0.005, 0.01, 0.015), 0.2)
    assert e.body_lengths_s == pytest.approx((0.025, 0.05, 0.075))
    assert e.body_lengths_per_period == pytest.approx((0.02, 0.045, 0.06))
    assert e.warnings == ()


def test_faster_than_published_walkers_is_said():
    e = estimate_from_walk(0.05, 1.0, 0.2)
    assert "more than published walkers reach (about 0.2" in e.warnings[0]
    assert e.body_lengths_per_period == pytest.approx((0.1875, 0.25, 0.3125))


def test_published_pneumatic_walkers_raise_no_warning():
    """Shao et al. 2022: 23 cm, 30.96 cm/min; at one period a second it must pass as ordinary."""
    assert estimate_from_walk(0.3096 / 60, 1.0, 0.23).warnings == ()


def test_far_over_published_speed_is_said():
    e = estimate_from_walk(0.03, 0.05, 0.2)
    assert any("over ten times" in w for w in e.warnings)


def test_undecided_direction_is_said():
    e = estimate_from_draws(Quantiles(-0.004, 0.001, 0.003), Quantiles(-0.004, 0.001, 0.003), 0.2)
    assert any("does not decide which way" in w for w in e.warnings)
