"""Rotation matrices and quaternions (x y z w), as few as the body needs."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray
from scipy.spatial.transform import Rotation

FloatArray = NDArray[np.float64]
Quaternion = tuple[float, float, float, float]


def quaternion_of(matrix: FloatArray) -> Quaternion:
    """Quaternion of a rotation matrix (3, 3)."""
    x, y, z, w = Rotation.from_matrix(matrix).as_quat()
    return (float(x), float(y), float(z), float(w))


def principal(inertia: FloatArray) -> tuple[FloatArray, Quaternion]:
    """Principal moments (3,) of an inertia matrix and the orientation of their axes, right-handed."""
    moments, axes = np.linalg.eigh(inertia)
    if np.linalg.det(axes) < 0:
        axes[:, 2] = -axes[:, 2]
    return moments, quaternion_of(axes)
