"""Friction that depends on the direction of sliding, as bristles and runners have it, in a form that any engine can take.

The law is F = −N (μ_x û_x, μ_y û_y) with û the direction of sliding in the foot's own axes and μ_x the forward or backward
value by the sign of û_x: the law that Hu, Nirody, Scott & Shelley (2009), "The mechanics of slithering locomotion", PNAS
106, 10081–10085, doi 10.1073/pnas.0812533106, use for snakes. Engines know friction that opposes the sliding, so it is
taken apart: F = −μ_x N û, which is Coulomb's and left to the engine, and −(μ_y − μ_x) N û_y across, a force of our own.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from gaitlab.body.dynamics import jacobian, link_origins, mass_matrix
from gaitlab.body.records import BodyModel, FootModel

FloatArray = NDArray[np.float64]

# A sole slower than this rests: its way is read from the force that holds it (chosen by us).
RESTING_M_S = 1e-3
# Below this speed the part of the force across that is our own falls in proportion: a runner creeps sideways (chosen by us,
# small against the sideways speeds of a slithering body, 50 mm/s and more).
CREEP_M_S = 0.01
# Contact forces come in single strokes; they are averaged over about this time (chosen by us, a hundredth of a period).
AVERAGE_S = 0.01
# Share of a foot's own momentum that the force across may take away in one step (theory: below 1 an explicit step is calm).
MOMENTUM_SHARE = 0.5


class Bristles:
    """The bristle feet of one running body: after every step, their coefficient for the engine and their force across."""

    def __init__(self, model: BodyModel, *, step_s: float, inertia_factor: float) -> None:
        self.feet = [index for index, foot in enumerate(model.feet) if foot.bristle]
        friction = np.array([model.feet[index].friction for index in self.feet]).reshape(-1, 3) * model.ground_friction
        self._ahead, self._back, self._side = friction.T
        masses = sideways_masses(model, inertia_factor)
        self._stiffest = MOMENTUM_SHARE / step_s * masses[self.feet]
        self._keep = float(np.exp(-step_s / AVERAGE_S))
        self._normal = np.zeros(len(self.feet))

    def combed(self, forward: FloatArray, sole_m_s: FloatArray, force_N: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Coefficients (B,) with the floor and forces across (B, 2) [N] for the next step.

        `forward` (B, 2 or 3) are the feet's x axes, `sole_m_s` (B, 2 or 3) the speeds of their soles, `force_N` (B, 3) the
        floor's force on them in the step before, all in the floor's frame; only the plane counts.
        """
        ahead = forward[:, :2] / np.linalg.norm(forward[:, :2], axis=1, keepdims=True)
        across = np.stack([-ahead[:, 1], ahead[:, 0]], axis=1)
        speed = np.hypot(sole_m_s[:, 0], sole_m_s[:, 1])
        way = np.where((speed > RESTING_M_S)[:, None], sole_m_s[:, :2], -force_N[:, :2])
        along = np.where(np.sum(way * ahead, axis=1) >= 0.0, self._ahead, self._back)
        self._normal = self._keep * self._normal + (1.0 - self._keep) * force_N[:, 2]
        grip = (self._side - along) * self._normal / np.maximum(speed, CREEP_M_S)
        grip = np.clip(grip, -self._stiffest, self._stiffest)
        return along, -(grip * np.sum(sole_m_s[:, :2] * across, axis=1))[:, None] * across


def sideways_masses(model: BodyModel, inertia_factor: float) -> FloatArray:
    """Mass (F,) [kg] that a sudden sideways pull at each foot feels, joints at zero: 1/(J M⁻¹ Jᵀ)."""
    inverse = np.linalg.inv(mass_matrix(model, inertia_factor))
    return np.array([1.0 / float(row @ inverse @ row) for row in (_sideways(model, foot) for foot in model.feet)])


def _sideways(model: BodyModel, foot: FootModel) -> FloatArray:
    place = link_origins(model)[foot.link] + np.mean(foot.centres_m, axis=0)
    return np.asarray(jacobian(model, foot.link, place)[0][1])
