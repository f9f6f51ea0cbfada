"""Whether a period of walking still is one: fallen over, dragging a block, or off the floor."""

from __future__ import annotations

import math

import numpy as np

from gaitlab.gait.motion import Motion
from gaitlab.gait.outcomes import DRAGGING, FELL_OVER, LOST_CONTACT

# Limits chosen by us, from what a robot still on its feet would hardly reach; not measured on gaits.
TILT_MAX_RAD = math.radians(60.0)
RUBBING_GAP_M = 1e-4
RUBBING_SHARE = 0.05
FLIGHT_SHARE = 0.5


def fault_of(motion: Motion) -> str:
    """The outcome that ends the walk after this period, or "".

    fell_over: the root block leans more than 60° anywhere in the period, cos(tilt) = cos(pitch) · cos(roll). dragging: a
    block's lowest corner is within 0.1 mm of the floor in over 5 % of the looks. lost_contact: no foot carries weight in
    over half of the samples.
    """
    upright = np.cos(motion.pitch_rad) * np.cos(motion.roll_rad)
    if np.min(upright) < math.cos(TILT_MAX_RAD):
        return FELL_OVER
    if np.mean(motion.clearance_m < RUBBING_GAP_M) > RUBBING_SHARE:
        return DRAGGING
    if np.mean(~motion.loaded.any(axis=1)) > FLIGHT_SHARE:
        return LOST_CONTACT
    return ""
