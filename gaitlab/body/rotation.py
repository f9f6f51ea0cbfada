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


def cross(a: FloatArray, b: FloatArray) -> FloatArray:
    """Cross products of rows (…, 3); a tenth of numpy's overhead on a few rows."""
    return np.asarray(a[..., [1, 2, 0]] * b[..., [2, 0, 1]] - a[..., [2, 0, 1]] * b[..., [1, 2, 0]])


def rotated(quaternion: FloatArray, vector: FloatArray) -> FloatArray:
    """Vectors (n, 3) turned by quaternions (n, 4): v + 2 w (u × v) + 2 u × (u × v), u the imaginary part.

    >>> import numpy as np
    >>> (rotated(np.array([[0.0, 0.0, 0.5**0.5, 0.5**0.5]]), np.array([[1.0, 0.0, 0.0]])).round(9) + 0.0).tolist()
    [[0.0, 1.0, 0.0]]
    """
    part = quaternion[:, :3]
    once = 2.0 * cross(part, vector)
    return np.asarray(vector + quaternion[:, 3:] * once + cross(part, once))


def multiplied(a: FloatArray, b: FloatArray) -> FloatArray:
    """Products (n, 4) of quaternions: first `b`, then `a`."""
    imaginary = a[:, 3:] * b[:, :3] + b[:, 3:] * a[:, :3] + cross(a[:, :3], b[:, :3])
    real = a[:, 3:] * b[:, 3:] - np.sum(a[:, :3] * b[:, :3], axis=1, keepdims=True)
    return np.hstack([imaginary, real])
