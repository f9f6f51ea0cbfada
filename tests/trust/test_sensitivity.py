"""First-order shares against functions whose shares are known in closed form, and against a second estimator."""

import numpy as np
import pytest

from gaitlab.trust.draws import sobol_points
from gaitlab.trust.sensitivity import first_order, sensitivities


def _cube(count: int, dimensions: int, seed: int = 3) -> np.ndarray:
    return np.array(list(sobol_points(count, dimensions, seed=seed)))


def _ishigami(points: np.ndarray) -> np.ndarray:
    """Ishigami & Homma (1990): sin x1 + 7 sin² x2 + 0.1 x3⁴ sin x1, each x even on ±π."""
    x1, x2, x3 = (2 * points - 1).T * np.pi
    return np.sin(x1) + 7 * np.sin(x2) ** 2 + 0.1 * x3**4 * np.sin(x1)


# First-order indices of the Ishigami function with a = 7, b = 0.1, from its closed form:
# V1 = (1 + b π⁴/5)²/2, V2 = a²/8, V3 = 0; V = V1 + V2 + 8 b² π⁸/225.
_V1, _V2, _V13 = 0.5 * (1 + 0.1 * np.pi**4 / 5) ** 2, 49 / 8, 8 * 0.01 * np.pi**8 / 225
ISHIGAMI = np.array([_V1, _V2, 0.0]) / (_V1 + _V2 + _V13)


def test_ishigami_closed_form_has_its_published_values():
    # Saltelli et al. 2008, Global Sensitivity Analysis: S1 0.3139, S2 0.4424, S3 0.
    assert pytest.approx([0.3139, 0.4424, 0.0], abs=5e-5) == ISHIGAMI


@pytest.mark.parametrize("count", [512, 2048])
def test_ishigami_shares(count):
    points = _cube(count, 3)
    assert first_order(points, _ishigami(points)) == pytest.approx(ISHIGAMI, abs=0.03)


def test_intervals_hold_the_ishigami_indices():
    points = _cube(1024, 3)
    found = {s.name: s for s in sensitivities(points, _ishigami(points), ["x1", "x2", "x3"])}
    for name, truth in zip(["x1", "x2", "x3"], ISHIGAMI, strict=True):
        assert found[name].low - 0.02 <= truth <= found[name].high + 0.02
    assert [s.name for s in sensitivities(points, _ishigami(points), ["x1", "x2", "x3"])] == ["x2", "x1", "x3"]


def test_pick_freeze_estimator_agrees():
    """An independent route: Saltelli et al. (2010) pick-freeze pairs on the same function."""
    rng = np.random.default_rng(5)
    a, b = rng.random((20_000, 3)), rng.random((20_000, 3))
    ya, yb = _ishigami(a), _ishigami(b)
    pick_freeze = []
    for k in range(3):
        mixed = a.copy()
        mixed[:, k] = b[:, k]
        pick_freeze.append(np.mean(yb * (_ishigami(mixed) - ya)) / np.var(np.concatenate([ya, yb])))
    points = _cube(2048, 3)
    assert first_order(points, _ishigami(points)) == pytest.approx(pick_freeze, abs=0.04)


def test_linear_model_with_64_draws_in_25_dimensions():
    """y = Σ a_k x_k: share a_k² / Σ a². Sixty-four draws find the two that matter and their order."""
    weights = np.zeros(25)
    weights[[4, 17, 9]] = 3.0, 2.0, 0.5
    points = _cube(64, 25)
    shares = first_order(points, points @ weights)
    assert shares[[4, 17]] == pytest.approx([9 / 13.25, 4 / 13.25], abs=0.12)
    assert list(np.argsort(-shares)[:2]) == [4, 17]


def test_chance_alone_is_taken_out():
    """A column that does nothing has a share of zero in the mean over many seeds (that is what the adjustment is for)."""
    rng = np.random.default_rng(11)
    shares = [first_order(rng.random((64, 1)), rng.normal(size=64))[0] for _ in range(400)]
    assert np.mean(shares) == pytest.approx(0.0, abs=0.01)


def test_draws_of_one_tolerance_are_added_up():
    points = _cube(512, 4)
    values = points @ np.array([1.0, 1.0, 1.0, 1.0])
    found = sensitivities(points, values, ["width", "width", "width", "friction"])
    assert [s.name for s in found] == ["width", "friction"]
    assert found[0].share == pytest.approx(0.75, abs=0.03)


def test_constant_result_has_no_sensitivities():
    points = _cube(64, 2)
    assert [s.share for s in sensitivities(points, np.full(64, 0.3), ["a", "b"])] == [0.0, 0.0]


def test_failed_draws_are_left_out_and_too_few_say_nothing():
    points = _cube(64, 2)
    values = points @ np.array([1.0, 0.0])
    values[::2] = np.nan
    assert sensitivities(points, values, ["a", "b"])[0].name == "a"
    assert sensitivities(points[:20], values[:20], ["a", "b"]) == ()


def test_equal_seeds_repeat():
    points = _cube(64, 3)
    values = _ishigami(points)
    assert sensitivities(points, values, "abc", seed=4) == sensitivities(points, values, "abc", seed=4)
