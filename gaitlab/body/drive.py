"""Pressure, spring, damper and solid limit of all joints at once, as one small matrix product a step."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.linalg import helmert

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

    The lengthwise motion of a whole bellows keeps its own c. What moves only light segments (the turns, and the segments of
    one bellows against each other) would need tens of kHz, so it gets the linearly implicit damper C̃ = (C⁻¹ + Δt M⁻¹)⁻¹
    with the mass matrix M frozen at zero pose: no such mode is damped faster than 1/Δt, slow modes keep their damping,
    statics do not see it. Lengthwise motion must not be among them: its true mass is the trunk once the foot stands.
    """
    plain = np.diag([joint.damping for joint in model.joints])
    light = light_motions(model)
    if not light.shape[1]:
        return plain
    mass = light.T @ free_joint_mass(model, inertia_factor) @ light
    stiff = light.T @ plain @ light
    soft = np.linalg.inv(np.linalg.inv(stiff) + step_s * np.linalg.inv(mass))
    return np.asarray(plain + light @ (0.5 * (soft + soft.T) - stiff) @ light.T)


def light_motions(model: BodyModel) -> FloatArray:
    """Orthonormal directions (J, n) of joint space that move light segments only: turns, and slides of one bellows apart."""
    columns = []
    slides: dict[tuple[str, str], list[int]] = {}
    for index, joint in enumerate(model.joints):
        if joint.kind == "revolute":
            columns.append(np.eye(len(model.joints))[index])
        else:
            slides.setdefault((joint.chain, joint.unit), []).append(index)
    for members in slides.values():
        for mode in helmert(len(members)) if len(members) > 1 else ():
            columns.append(np.bincount(members, weights=mode, minlength=len(model.joints)))
    return np.array(columns).reshape(-1, len(model.joints)).T


def _per_Pa(model: BodyModel) -> FloatArray:
    per_Pa = np.zeros((len(model.joints), len(model.inlets)))
    for row, joint in enumerate(model.joints):
        for inlet, gain in joint.actuation:
            per_Pa[row, model.inlets.index(inlet)] = gain
    return per_Pa
