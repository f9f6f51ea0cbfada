"""Static stability margin: how far the weight is inside the polygon of the feet that carry it."""

from __future__ import annotations

import numpy as np

from gaitlab.gait.motion import BoolArray, FloatArray

_AXES = np.array([[1.0, 0.0], [-1.0, 0.0], [0.0, 1.0], [0.0, -1.0]])


def projected(centre_m: FloatArray, slope_rad: float) -> FloatArray:
    """Where a plumb line from the centre of mass meets the floor, (T, 2), in the floor's frame, uphill forward +x.

    Gravity there is g (−sin α, 0, −cos α), so the point is (x − z tan α, y).
    """
    shift = centre_m[:, 2] * np.tan(slope_rad)
    return np.stack([centre_m[:, 0] - shift, centre_m[:, 1]], axis=1)


def stability_margins(contact_m: FloatArray, loaded: BoolArray, plumb_m: FloatArray) -> FloatArray:
    """Signed distance of the plumb point from the edge of the support polygon, (T,): inside +, outside −, nan in the air.

    The polygon is the convex hull of the loaded contacts, `contact_m` (T, G, 2 or 3), `loaded` (T, G). Its signed distance
    is min over directions u of h(u) − u·c with the support function h(u) = max u·p. The least is met at the normal of an
    edge or, outside a corner, along the line to it, so those directions are tried and no others are needed. McGhee &
    Frank (1968), Math. Biosci. 3, 331–351, define the static stability margin so; the smallest over a cycle is the gait's.

    >>> import numpy as np
    >>> square = np.array([[[-1.0, -1.0], [1.0, -1.0], [1.0, 1.0], [-1.0, 1.0]]])
    >>> float(stability_margins(square, np.ones((1, 4), bool), np.zeros((1, 2))).round(3)[0])
    1.0
    """
    points = np.asarray(contact_m[..., :2] - plumb_m[:, None, :], dtype=np.float64)
    directions = _directions(points)
    reach = np.einsum("tgi,tki->tgk", points, directions)
    reach = np.where(loaded[..., None], reach, -np.inf).max(axis=1)
    reach = np.where((directions == 0.0).all(axis=2), np.inf, reach)
    return np.where(loaded.any(axis=1), reach.min(axis=1), np.nan)


def _directions(points: FloatArray) -> FloatArray:
    """Unit normals of every pair of points, both ways, the lines from the points to the origin, and the axes: (T, K, 2)."""
    between = points[:, None, :, :] - points[:, :, None, :]
    normals = np.stack([between[..., 1], -between[..., 0]], axis=-1).reshape(len(points), -1, 2)
    candidates = np.concatenate([normals, -points], axis=1)
    length = np.linalg.norm(candidates, axis=2, keepdims=True)
    unit = candidates / np.where(length > 0.0, length, 1.0)
    return np.concatenate([unit, np.broadcast_to(_AXES, (len(points), 4, 2))], axis=1)


def smallest_margin(margins_m: FloatArray) -> float:
    """The least margin over the instants at which anything stands; nan if nothing ever does."""
    return float(np.nanmin(margins_m)) if np.any(np.isfinite(margins_m)) else float("nan")
