"""The recorded motion of a walk on a grid of whole periods: what every measure is computed from."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]


@dataclass(frozen=True)
class Motion:
    """Samples at phases 0, 1/S, … of every period, one more at the very end: T = periods · S + 1 instants.

    `position_m` (T, 3) of the root block's centre in the frame of the floor (z is the height above it, also on a slope),
    `yaw_rad`, `pitch_rad` (nose up positive) and `roll_rad` (T,) of the root block, `centre_m` (T, 3) the centre of mass,
    `foot_m` (T, F, 3) the centres of the feet, `contact_m` (T, G, 3) the centres of the spheres that touch the ground,
    `loaded` (T, F) and `contact_loaded` (T, G) whether they carry weight, `slide_m` (T, F) the distance that the loaded
    sole slid on the floor since the sample before. The period k covers the instants k·S … (k+1)·S.
    """

    samples_per_period: int
    position_m: FloatArray
    yaw_rad: FloatArray
    pitch_rad: FloatArray
    roll_rad: FloatArray
    centre_m: FloatArray
    foot_m: FloatArray
    loaded: BoolArray
    contact_m: FloatArray
    contact_loaded: BoolArray
    slide_m: FloatArray

    @property
    def periods(self) -> int:
        """How many whole periods are recorded."""
        return (len(self.position_m) - 1) // self.samples_per_period

    def last(self, periods: int) -> Motion:
        """The motion of the last `periods` periods."""
        keep = slice(len(self.position_m) - 1 - periods * self.samples_per_period, None)
        arrays = {name: getattr(self, name)[keep] for name in _ARRAYS}
        return Motion(samples_per_period=self.samples_per_period, **arrays)


_ARRAYS = tuple(name for name in Motion.__dataclass_fields__ if name != "samples_per_period")
