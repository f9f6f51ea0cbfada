"""The support polygon's signed distance against plane geometry and the half planes of a hull."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.spatial import ConvexHull

from gaitlab.gait.stability import projected, smallest_margin, stability_margins


def margin(points: np.ndarray, centre: np.ndarray, loaded: np.ndarray | None = None) -> float:
    flags = np.ones(len(points), dtype=bool) if loaded is None else loaded
    return float(stability_margins(points[None], flags[None], centre[None])[0])


def test_square_inside_outside_and_corner() -> None:
    square = np.array([[-1.0, -1], [1, -1], [1, 1], [-1, 1]])
    assert margin(square, np.zeros(2)) == pytest.approx(1.0, rel=1e-12)
    assert margin(square, np.array([0.75, 0.2])) == pytest.approx(0.25, rel=1e-12)
    assert margin(square, np.array([3.0, 0.0])) == pytest.approx(-2.0, rel=1e-12)
    assert margin(square, np.array([2.0, 2.0])) == pytest.approx(-np.sqrt(2), rel=1e-12)


def test_a_line_and_a_point_support_nothing() -> None:
    assert margin(np.array([[0.0, -1], [0, 1]]), np.array([0.3, 0.0])) == pytest.approx(-0.3, rel=1e-12)
    assert margin(np.array([[0.0, 0.0]]), np.array([0.3, 0.4])) == pytest.approx(-0.5, rel=1e-12)


def test_unloaded_contacts_do_not_count_and_the_air_has_no_margin() -> None:
    square = np.array([[-1.0, -1], [1, -1], [1, 1], [-1, 1]])
    assert margin(square, np.array([0.0, 0.5]), np.array([True, True, False, False])) == pytest.approx(-1.5, rel=1e-12)
    assert np.isnan(margin(square, np.zeros(2), np.zeros(4, dtype=bool)))
    assert smallest_margin(np.array([np.nan, 0.3, 0.1])) == 0.1
    assert np.isnan(smallest_margin(np.array([np.nan])))


def test_random_polygons_against_the_half_planes_of_their_hull() -> None:
    # Independent route: inside, the distance to the edge is the least distance to the hull's half planes (qhull).
    rng = np.random.default_rng(11)
    for _ in range(50):
        points = rng.normal(size=(8, 2))
        centre = points.mean(axis=0)
        equations = ConvexHull(points).equations
        expected = float(np.min(-(equations[:, :2] @ centre + equations[:, 2])))
        assert margin(points, centre) == pytest.approx(expected, rel=1e-9)


def test_plumb_point_on_a_slope() -> None:
    centre = np.array([[0.1, 0.02, 0.05]])
    np.testing.assert_allclose(projected(centre, 0.0), [[0.1, 0.02]], atol=1e-15)
    np.testing.assert_allclose(projected(centre, np.deg2rad(45)), [[0.05, 0.02]], atol=1e-12)
