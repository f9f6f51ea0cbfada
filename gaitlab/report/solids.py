"""The parts of a body as point clouds whose outline, seen along any direction, is their convex hull.

A bellows segment becomes a stack of ribs, each a flat rounded disc across the segment's axis, which is what makes a
bellows look like one; boxes give their corners, spheres stay spheres.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from gaitlab.gait.records import Part

FloatArray = NDArray[np.float64]
RIB_PITCH_M = 0.0042  # chosen by us: about two ribs on a segment of 8 mm
RIB_CORNERS = 14
NECK = 0.80  # radius of a rib's flat faces over its rim


@dataclass(frozen=True)
class Solid:
    """One thing to draw, about its part's centre: its outline points (n, 3), or a ball of `radius_m` round a single point."""

    part: int
    kind: str  # box | rib | ball
    points_m: FloatArray
    radius_m: float
    inlet: str | None


def solids_of(parts: tuple[Part, ...]) -> tuple[Solid, ...]:
    """The solids of every part, in the parts' order."""
    found: list[Solid] = []
    for index, part in enumerate(parts):
        if part.kind == "box":
            found.append(Solid(index, "box", _corners(part.size_m), 0.0, part.inlet))
        elif part.kind == "sphere":
            found.append(Solid(index, "ball", np.zeros((1, 3)), part.size_m[0], part.inlet))
        else:
            found += [Solid(index, "rib", rib, 0.0, part.inlet) for rib in _ribs(part.size_m[0], part.size_m[1])]
    return tuple(found)


def _corners(size_m: tuple[float, float, float]) -> FloatArray:
    signs = np.array([[x, y, z] for x in (-1, 1) for y in (-1, 1) for z in (-1, 1)])
    return np.asarray(0.5 * signs * np.asarray(size_m))


def _ribs(radius_m: float, length_m: float) -> list[FloatArray]:
    """Discs stacked along z over the length of a segment."""
    count = max(round(length_m / RIB_PITCH_M), 1)
    pitch = length_m / count
    turn = 2 * np.pi * np.arange(RIB_CORNERS) / RIB_CORNERS
    ring = np.stack([np.cos(turn), np.sin(turn), np.zeros_like(turn)], axis=1) * radius_m
    ribs = []
    for k in range(count):
        middle = np.array([0.0, 0.0, (k + 0.5) * pitch - 0.5 * length_m])
        faces = [ring * (NECK, NECK, 0.0) + middle + (0.0, 0.0, side * 0.48 * pitch) for side in (-1.0, 1.0)]
        rims = [ring + middle + (0.0, 0.0, side * 0.22 * pitch) for side in (-1.0, 1.0)]
        ribs.append(np.concatenate([*faces, *rims]))
    return ribs


def rotated(points_m: FloatArray, quaternion: FloatArray) -> FloatArray:
    """Points (n, 3) turned by a unit quaternion (x y z w): R = I + 2 w [q] + 2 [q]², [q] the matrix of q × ."""
    x, y, z, w = quaternion
    across = np.array([[0.0, -z, y], [z, 0.0, -x], [-y, x, 0.0]])
    turn = np.eye(3) + 2.0 * w * across + 2.0 * across @ across
    return np.asarray(points_m @ turn.T)
