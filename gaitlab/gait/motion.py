"""The recorded motion of a walk on a grid of whole periods: what every measure is computed from."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]
IntArray = NDArray[np.int_]

# Every fourth sample looks at the whole body too (centre of mass, blocks): it costs as much as a step (chosen by us).
LOOK_EVERY = 4


@dataclass(frozen=True)
class Motion:
    """Samples at phases 0, 1/S, … of every period and one at the very end: T = periods · S + 1 instants, `sample_s` apart.

    In the floor's frame, z the height above it, also on a slope: `position_m` (T, 3) of the root block's middle; `yaw_rad`,
    `pitch_rad` (nose up positive) and `roll_rad` (T,) of the root block; `foot_m` (T, F, 3) the middles of the feet;
    `sole_m_s` (T, F, 2) the speed at which their soles slide on the floor; `loaded` (T, F) whether they carry weight;
    `contact_m` (T, G, 3) the spheres of all feet; `contact_loaded` (T, G) those that stand. At the
    instants `look_at` (L,), every `LOOK_EVERY`-th: `centre_m` (L, 3) the centre of mass and `clearance_m` (L,) of the lowest
    corner of any block.
    """

    samples: int
    sample_s: float
    position_m: FloatArray
    yaw_rad: FloatArray
    pitch_rad: FloatArray
    roll_rad: FloatArray
    foot_m: FloatArray
    sole_m_s: FloatArray
    loaded: BoolArray
    contact_m: FloatArray
    contact_loaded: BoolArray
    look_at: IntArray
    centre_m: FloatArray
    clearance_m: FloatArray

    @property
    def periods(self) -> int:
        """How many whole periods are recorded."""
        return (len(self.position_m) - 1) // self.samples

    def last(self, periods: int) -> Motion:
        """The motion of the last `periods` periods."""
        start = len(self.position_m) - 1 - periods * self.samples
        arrays = {name: getattr(self, name)[start:] for name in _EVERY_SAMPLE}
        keep = self.look_at >= start
        looks = {name: getattr(self, name)[keep] for name in _EVERY_LOOK}
        return Motion(
            samples=self.samples, sample_s=self.sample_s, look_at=self.look_at[keep] - start, **arrays, **looks
        )


_EVERY_LOOK = ("centre_m", "clearance_m")
_EVERY_SAMPLE = tuple(
    name for name in Motion.__dataclass_fields__ if name not in (*_EVERY_LOOK, "samples", "sample_s", "look_at")
)


def rotations(quaternion: FloatArray) -> FloatArray:
    """Rotation matrices (…, 3, 3) of unit quaternions (…, 4), x y z w."""
    x, y, z, w = np.moveaxis(np.asarray(quaternion, dtype=np.float64), -1, 0)
    rows = [
        [1 - 2 * (y * y + z * z), 2 * (x * y - z * w), 2 * (x * z + y * w)],
        [2 * (x * y + z * w), 1 - 2 * (x * x + z * z), 2 * (y * z - x * w)],
        [2 * (x * z - y * w), 2 * (y * z + x * w), 1 - 2 * (x * x + y * y)],
    ]
    return np.moveaxis(np.array(rows), (0, 1), (-2, -1))


def attitude(quaternion: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Yaw (left +), pitch (nose up +) and roll (right side down +) of x-forward frames (T, 4), each (T,) in rad."""
    matrix = rotations(quaternion)
    yaw = np.arctan2(matrix[..., 1, 0], matrix[..., 0, 0])
    pitch = np.arcsin(np.clip(matrix[..., 2, 0], -1.0, 1.0))
    roll = np.arctan2(matrix[..., 2, 1], matrix[..., 2, 2])
    return yaw, pitch, roll
