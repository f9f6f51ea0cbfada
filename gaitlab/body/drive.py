"""Pressure, spring, damper and solid limit of all joints at once, as one small matrix product a step."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from gaitlab.body.dynamics import free_joint_mass
from gaitlab.body.records import BodyModel

FloatArray = NDArray[np.float64]


@dataclass(frozen=True)
class Drive:
    """The law of all joints: torque = pressure − K q − C q̇ − stop.

    `per_Pa` (J, inlets) turns vacuum into torque; `feedback` (J, 2J) multiplies all q, then all q̇;
    `damping` is the C inside it (J, J).
    """

    per_Pa: FloatArray
    feedback: FloatArray
    damping: FloatArray
    stop_at: FloatArray
    stop_gain: FloatArray

    @classmethod
    def of(cls, model: BodyModel, *, step_s: float, inertia_factor: float) -> Drive:
        """The drive of a model for one step length and inertia factor."""
        joints = model.joints
        damping = step_damping(model, step_s=step_s, inertia_factor=inertia_factor)
        feedback = np.zeros((len(joints), 2 * len(joints)))
        feedback[:, : len(joints)] = -np.diag([joint.stiffness for joint in joints])
        feedback[:, len(joints) :] = -damping
        return cls(
            per_Pa=_per_Pa(model),
            feedback=feedback,
            damping=damping,
            stop_at=np.array([joint.stop_at for joint in joints]),
            stop_gain=np.array([joint.stop_gain for joint in joints]),
        )

    def pressure_torque(self, vacuum_Pa: FloatArray) -> FloatArray:
        """Torques or forces (steps, J) of the vacuum (steps, inlets) [Pa]."""
        return np.asarray(vacuum_Pa @ self.per_Pa.T)

    def torque(self, pressure_torque: FloatArray, state: FloatArray) -> FloatArray:
        """Torques or forces (J,) at one instant; `state` is (J, 2) of positions and speeds."""
        torque = pressure_torque + self.feedback @ state.T.ravel()
        past = np.abs(state[:, 0]) - self.stop_at
        if past.max() > 0.0:
            torque -= np.sign(state[:, 0]) * self.stop_gain * np.maximum(past, 0.0) ** 2
        return np.asarray(torque)


def step_damping(model: BodyModel, *, step_s: float, inertia_factor: float) -> FloatArray:
    """Damping matrix (J, J) that one explicit step of `step_s` can take.

    Slides keep their own c. Turns of light segments would need tens of kHz, so theirs is the linearly implicit damper
    C̃ = (C⁻¹ + Δt M⁻¹)⁻¹ with the mass matrix M frozen at zero pose: no mode is damped faster than 1/Δt, slow modes keep
    their damping, statics do not see it.
    """
    joints = model.joints
    plain = np.array([joint.damping for joint in joints])
    turns = np.array([index for index, joint in enumerate(joints) if joint.implicit], dtype=int)
    damping = np.diag(plain)
    if turns.size:
        mass = free_joint_mass(model, inertia_factor)[np.ix_(turns, turns)]
        soft = np.linalg.inv(np.diag(1.0 / plain[turns]) + step_s * np.linalg.inv(mass))
        damping[np.ix_(turns, turns)] = 0.5 * (soft + soft.T)
    return damping


def _per_Pa(model: BodyModel) -> FloatArray:
    per_Pa = np.zeros((len(model.joints), len(model.inlets)))
    for row, joint in enumerate(model.joints):
        for inlet, gain in joint.actuation:
            per_Pa[row, model.inlets.index(inlet)] = gain
    return per_Pa
