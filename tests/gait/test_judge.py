"""Outcomes told from constructed motion: standing, fallen, dragging, flying."""

from __future__ import annotations

import math

import numpy as np
import pytest

from gaitlab.gait.judge import fault_of
from gaitlab.gait.motion import LOOK_EVERY, Motion, attitude, rotations
from gaitlab.gait.outcomes import REMEDIES, remedy_of

SAMPLES = 40


def standing(periods: int = 1) -> Motion:
    instants, looks = periods * SAMPLES + 1, periods * SAMPLES // LOOK_EVERY + 1
    zeros = np.zeros(instants)
    return Motion(
        samples=SAMPLES,
        sample_s=0.005,
        position_m=np.tile([0.0, 0.0, 0.04], (instants, 1)),
        yaw_rad=zeros,
        pitch_rad=zeros,
        roll_rad=zeros,
        foot_m=np.zeros((instants, 2, 3)),
        sole_m_s=np.zeros((instants, 2, 2)),
        loaded=np.ones((instants, 2), dtype=bool),
        contact_m=np.zeros((instants, 4, 3)),
        contact_loaded=np.ones((instants, 4), dtype=bool),
        look_at=np.arange(0, instants, LOOK_EVERY),
        centre_m=np.tile([0.0, 0.0, 0.04], (looks, 1)),
        clearance_m=np.full(looks, 0.03),
    )


def test_a_standing_body_has_no_fault() -> None:
    assert fault_of(standing()) == ""


@pytest.mark.parametrize(
    ("pitch_deg", "roll_deg", "fault"), [(0, 61, "fell_over"), (-59, 0, ""), (50, 50, "fell_over")]
)
def test_a_lean_of_more_than_60_degrees_is_a_fall(pitch_deg: float, roll_deg: float, fault: str) -> None:
    motion = standing()
    motion.pitch_rad[20], motion.roll_rad[20] = math.radians(pitch_deg), math.radians(roll_deg)
    assert fault_of(motion) == fault


def test_a_block_on_the_floor_drags_but_one_touch_does_not() -> None:
    motion = standing(periods=4)
    motion.clearance_m[3] = 0.0
    assert fault_of(motion) == ""
    motion.clearance_m[3:6] = 0.0
    assert fault_of(motion) == "dragging"


def test_feet_in_the_air_for_most_of_the_period_have_lost_contact() -> None:
    motion = standing()
    motion.loaded[: SAMPLES // 2] = False
    assert fault_of(motion) == ""
    motion.loaded[: SAMPLES // 2 + 2] = False
    assert fault_of(motion) == "lost_contact"
    motion.loaded[:, 0] = True
    assert fault_of(motion) == ""


def test_last_periods_are_cut_from_the_end() -> None:
    motion = standing(periods=3)
    motion.position_m[:, 0] = np.arange(len(motion.position_m))
    motion.clearance_m[:] = np.arange(len(motion.clearance_m))
    last = motion.last(1)
    assert (last.periods, motion.periods) == (1, 3)
    assert last.position_m[0, 0] == 2 * SAMPLES
    assert last.clearance_m[0] == 2 * SAMPLES // LOOK_EVERY
    assert len(last.clearance_m) == SAMPLES // LOOK_EVERY + 1
    np.testing.assert_array_equal(last.look_at, np.arange(0, SAMPLES + 1, LOOK_EVERY))


def test_every_outcome_but_success_has_a_remedy() -> None:
    assert remedy_of("walked") == ""
    assert all(REMEDIES[name] for name in REMEDIES if name != "walked")
    with pytest.raises(KeyError):
        remedy_of("flew")


def test_attitude_of_single_turns_and_their_rotation_matrices() -> None:
    # A quaternion of a turn by θ about axis a is (a sin θ/2, cos θ/2).
    half = 0.3 / 2
    yaw, pitch, roll = attitude(
        np.array([[0, 0, math.sin(half), math.cos(half)], [0, math.sin(half), 0, math.cos(half)], [math.sin(half), 0, 0, math.cos(half)]])
    )  # fmt: skip
    np.testing.assert_allclose(yaw, [0.3, 0.0, 0.0], atol=1e-12)
    np.testing.assert_allclose(pitch, [0.0, -0.3, 0.0], atol=1e-12)  # a turn about +y points the nose down
    np.testing.assert_allclose(roll, [0.0, 0.0, 0.3], atol=1e-12)
    turned = rotations(np.array([0.0, 0.0, math.sin(half), math.cos(half)])) @ np.array([1.0, 0.0, 0.0])
    np.testing.assert_allclose(turned, [math.cos(0.3), math.sin(0.3), 0.0], atol=1e-12)
