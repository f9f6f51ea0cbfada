"""Pressure, spring, damper and solid limit of all joints at once, as one small matrix product a step."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray
from scipy.linalg import helmert

from gaitlab.body.dynamics import free_joint_mass
from gaitlab.body.records import BodyModel

FloatArray = NDArray[np.float64]


class Drive:
    """The law of all joints of one running body: torque = pressure − K q − stop − C q̇, a fresh one for every run.

    The lengthwise damping of a whole bellows uses the present q̇. What moves only light segments (see light_motions) would
    need tens of kHz that way, so there the damper is linearly implicit: it uses the speed w at the end of the step,

        (M + Δt C) w = M (2 v − v₋) + Δt (τ − τ₋) + Δt C w₋,

    v the speed, τ the torque of pressure, spring and stop, M the mass matrix frozen at zero pose, and ₋ one step ago. The
    right-hand side carries on the step before, so that what the ground does to the joint is in it: at rest w is zero and
    statics are exact, in the air it is the implicit Euler step, and it is stable where the true mass is above 3/4 of M.
    Lengthwise motion must not be among it: its true mass is the trunk once the foot stands.
    """

    def __init__(self, model: BodyModel, *, step_s: float, inertia_factor: float) -> None:
        joints = model.joints
        self._per_Pa = torque_per_Pa(model)
        self._stiffness = np.array([joint.stiffness for joint in joints])
        self._stop_at = np.array([joint.stop_at for joint in joints])
        self._stop_gain = np.array([joint.stop_gain for joint in joints])
        implicit, explicit = damping_parts(model)
        self._ahead = _look_ahead(model, implicit, step_s=step_s, inertia_factor=inertia_factor)
        # w lies in the light motions, where C is even within each bellows: C w is a product element by element.
        self._implicit = np.array([joint.damping for joint in joints])
        self._explicit = explicit
        self._last: tuple[FloatArray, FloatArray, FloatArray] | None = None

    def pressure_torque(self, vacuum_Pa: FloatArray) -> FloatArray:
        """Torques or forces (steps, J) of the vacuum (steps, inlets) [Pa]."""
        return np.asarray(vacuum_Pa @ self._per_Pa.T)

    def elastic_torque(self, pressure_torque: FloatArray, position: FloatArray) -> FloatArray:
        """Torques or forces (J,) of pressure, spring and solid limit."""
        torque = pressure_torque - self._stiffness * position
        past = np.abs(position) - self._stop_at
        if past.max() > 0.0:
            torque -= np.sign(position) * self._stop_gain * np.maximum(past, 0.0) ** 2
        return np.asarray(torque)

    def torque(self, pressure_torque: FloatArray, state: FloatArray) -> FloatArray:
        """Torques or forces (J,) at this instant; `state` is (J, 2) of positions and speeds. To be called once a step."""
        position, speed = state.T
        elastic = self.elastic_torque(pressure_torque, position)
        speed_was, elastic_was, ahead_was = self._last or (speed, elastic, speed)
        ahead = self._ahead @ np.concatenate([2.0 * speed - speed_was, elastic - elastic_was, ahead_was])
        self._last = (speed, elastic, ahead)
        return np.asarray(elastic - self._implicit * ahead - self._explicit @ speed)


class PressureDrive(Drive):
    """For an engine that has the springs and dampers inside it: pressure and solid limits only."""

    def elastic_torque(self, pressure_torque: FloatArray, position: FloatArray) -> FloatArray:
        """Torques or forces (J,) of pressure and solid limit."""
        return super().elastic_torque(pressure_torque, position) + self._stiffness * position

    def torque(self, pressure_torque: FloatArray, state: FloatArray) -> FloatArray:
        """Torques or forces (J,) at this instant."""
        return self.elastic_torque(pressure_torque, state[:, 0])


def damping_parts(model: BodyModel) -> tuple[FloatArray, FloatArray]:
    """Damping matrices (J, J) of what only moves light segments, and of the rest; their sum is the joints' own damping."""
    plain = np.diag([joint.damping for joint in model.joints])
    light = light_motions(model)
    implicit = light @ light.T @ plain @ light @ light.T
    return implicit, plain - implicit


def _look_ahead(model: BodyModel, implicit: FloatArray, *, step_s: float, inertia_factor: float) -> FloatArray:
    """Matrix (J, 3J) that gives w from (2 v − v₋, τ − τ₋, w₋), zero outside the light motions."""
    light = light_motions(model)
    mass = light.T @ free_joint_mass(model, inertia_factor) @ light
    damping = step_s * light.T @ implicit @ light
    solved = np.linalg.solve(mass + damping, np.hstack([mass @ light.T, step_s * light.T, damping @ light.T]))
    return np.asarray(light @ solved)


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


def torque_per_Pa(model: BodyModel) -> FloatArray:
    """Torque or force of every joint by the vacuum at every inlet, (J, inlets) [N m/Pa or N/Pa]."""
    per_Pa = np.zeros((len(model.joints), len(model.inlets)))
    for row, joint in enumerate(model.joints):
        for inlet, gain in joint.actuation:
            per_Pa[row, model.inlets.index(inlet)] = gain
    return per_Pa
