"""Rigid-body numbers of a body model with every joint at zero: places, mass matrix, what its damper may do in one step."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from gaitlab.body.records import BodyModel

FloatArray = NDArray[np.float64]


def link_origins(model: BodyModel) -> FloatArray:
    """Origins (links, 3) of all link frames in the root's frame, joints at zero."""
    origins = np.zeros((len(model.links), 3))
    for index, link in enumerate(model.links):
        if link.joint is not None:
            origins[index] = origins[link.parent] + link.joint.origin_m
    return origins


def ancestry(model: BodyModel) -> NDArray[np.bool_]:
    """(links, J): whether joint j lies between the root and the link."""
    above = np.zeros((len(model.links), len(model.links) - 1), dtype=bool)
    for index, link in enumerate(model.links):
        if link.joint is not None:
            above[index] = above[link.parent]
            above[index, index - 1] = True
    return above


def centre_of_mass(model: BodyModel) -> FloatArray:
    """Centre of mass (3,) in the root's frame, joints at zero."""
    masses = np.array([link.mass_kg for link in model.links])
    centres = link_origins(model) + np.array([link.com_m for link in model.links])
    return np.asarray(masses @ centres / masses.sum())


def jacobian(model: BodyModel, link: int, point: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Linear and angular Jacobian (3, 6 + J) at `point` of a link: columns are root translation, root turn, joints."""
    linear, angular = _jacobians(model, link_origins(model), ancestry(model)[[link]], point[None])
    return linear[0], angular[0]


def _jacobians(
    model: BodyModel, origins: FloatArray, above: NDArray[np.bool_], points: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Jacobians (n, 3, 6 + J) at `points` (n, 3) that move with the joints `above` (n, J)."""
    axes = np.array([joint.axis for joint in model.joints]).reshape(-1, 3)
    turns = np.array([joint.kind == "revolute" for joint in model.joints], dtype=float)
    moved = np.cross(axes, points[:, None] - origins[1:])  # (n, J, 3), of a turning joint
    linear = np.zeros((len(points), 3, 6 + len(axes)))
    angular = np.zeros_like(linear)
    linear[:, :, :3], angular[:, :, 3:6] = np.eye(3), np.eye(3)
    linear[:, :, 3:6] = np.cross(np.eye(3), points[:, None]).transpose(0, 2, 1)
    by_joint = turns[:, None] * moved + (1.0 - turns)[:, None] * axes
    linear[:, :, 6:] = (above[:, :, None] * by_joint).transpose(0, 2, 1)
    angular[:, :, 6:] = (above[:, :, None] * (turns[:, None] * axes)).transpose(0, 2, 1)
    return linear, angular


def mass_matrix(model: BodyModel, inertia_factor: float) -> FloatArray:
    """Mass matrix (6 + J, 6 + J), joints at zero: Σ m JᵥᵀJᵥ + J_ωᵀ I J_ω over the links."""
    origins = link_origins(model)
    points = origins + np.array([link.com_m for link in model.links])
    linear, angular = _jacobians(model, origins, ancestry(model), points)
    masses = np.array([link.mass_kg for link in model.links])
    inertias = np.array([link.inertia(inertia_factor) for link in model.links])
    moving = np.einsum("l,lik,lim->km", masses, linear, linear, optimize=True)
    turning = np.einsum("lik,lij,ljm->km", angular, inertias, angular, optimize=True)
    return np.asarray(moving + turning)


def free_joint_mass(model: BodyModel, inertia_factor: float) -> FloatArray:
    """Mass matrix (J, J) that the joints feel with the root floating free: M_jj − M_jb M_bb⁻¹ M_bj."""
    total = mass_matrix(model, inertia_factor)
    root, cross, joints = total[:6, :6], total[:6, 6:], total[6:, 6:]
    return np.asarray(joints - cross.T @ np.linalg.solve(root, cross))
