"""Many copies of one body model at once: where their links and points are, and how their coordinates move the points.

Coordinates of a copy are the root's place and turn and the J joints; a small motion of them is 6 + J numbers, the root's
shift, its turn about the world's axes, and the joints. B copies, L links, P points, n = 6 + J.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from gaitlab.body.dynamics import ancestry
from gaitlab.body.records import BodyModel
from gaitlab.body.rotation import cross

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.intp]
BoolArray = NDArray[np.bool_]
FREE = 6  # coordinates of the root


@dataclass(frozen=True)
class Frames:
    """Link frames of every copy: `origin_m` (B, L, 3), `turn` (B, L, 3, 3), and the joints' axes in the world (B, J, 3)."""

    origin_m: FloatArray
    turn: FloatArray
    axis: FloatArray

    def of(self, copies: BoolArray) -> Frames:
        """The frames of some copies."""
        return Frames(self.origin_m[copies], self.turn[copies], self.axis[copies])


@dataclass(frozen=True)
class Generation:
    """Links of one depth in the tree and one kind of joint, worked out together."""

    links: IntArray
    parents: IntArray
    turning: bool


class Skeleton:
    """A body model as arrays, and points `place_m` (P, 3) fixed in the frames of the links `link` (P,)."""

    def __init__(self, model: BodyModel, link: IntArray, place_m: FloatArray) -> None:
        joints = model.joints
        self.joints = len(joints)
        self.size = FREE + self.joints
        self.link, self.place_m = link, place_m
        self.axis = np.array([joint.axis for joint in joints]).reshape(-1, 3)
        self.origin_m = np.array([joint.origin_m for joint in joints]).reshape(-1, 3)
        self.turning = np.array([joint.kind == "revolute" for joint in joints], dtype=bool)
        self._cross = _cross_matrices(self.axis)
        self._cross_twice = self._cross @ self._cross
        self._generations = _generations(model)
        above = ancestry(model)
        self._pair_joint, self._pair_point = np.nonzero(above[link].T)
        self._pair_turns = self.turning[self._pair_joint][:, None]
        self._turns_by = _turned_by(above, self.turning)

    def frames(self, place_m: FloatArray, turn: FloatArray, joint: FloatArray) -> Frames:
        """Link frames of copies whose roots are at `place_m` (B, 3), turned by `turn` (B, 3, 3), with joints at `joint` (B, J)."""
        copies = len(place_m)
        origins = np.empty((copies, self.joints + 1, 3))
        turns = np.empty((copies, self.joints + 1, 3, 3))
        axes = np.empty((copies, self.joints, 3))
        origins[:, 0], turns[:, 0] = place_m, turn
        for generation in self._generations:
            links, moves = generation.links, generation.links - 1
            base, q = turns[:, generation.parents], joint[:, moves]
            axes[:, moves] = _along(base, self.axis[moves])
            origins[:, links] = origins[:, generation.parents] + _along(base, self.origin_m[moves])
            if generation.turning:
                sine, versine = np.sin(q)[..., None, None], (1.0 - np.cos(q))[..., None, None]
                own = np.eye(3) + sine * self._cross[moves] + versine * self._cross_twice[moves]
                turns[:, links] = base @ own
            else:
                turns[:, links] = base
                origins[:, links] += axes[:, moves] * q[..., None]
        return Frames(origins, turns, axes)

    def points(self, frames: Frames) -> FloatArray:
        """Places (B, P, 3) of the points."""
        return np.asarray(frames.origin_m[:, self.link] + _along(frames.turn[:, self.link], self.place_m))

    def jacobian(self, frames: Frames, points_m: FloatArray) -> FloatArray:
        """How small motions move whatever of the points' links is at `points_m` (B, P, 3) now: (B, P, 3, n)."""
        copies, number = points_m.shape[:2]
        jacobian = np.zeros((copies, number, 3, self.size))
        for k in range(3):
            jacobian[:, :, k, k] = 1.0
        x, y, z = np.moveaxis(points_m - frames.origin_m[:, :1], -1, 0)
        jacobian[:, :, 1, 3], jacobian[:, :, 2, 3] = -z, y
        jacobian[:, :, 0, 4], jacobian[:, :, 2, 4] = z, -x
        jacobian[:, :, 0, 5], jacobian[:, :, 1, 5] = -y, x
        axis = frames.axis[:, self._pair_joint]
        arm = points_m[:, self._pair_point] - frames.origin_m[:, self._pair_joint + 1]
        moved = np.where(self._pair_turns, cross(axis, arm), axis)
        jacobian[:, self._pair_point, :, FREE + self._pair_joint] = np.swapaxes(moved, 0, 1)
        return jacobian

    def stiffness_of_forces(self, frames: Frames, jacobian: FloatArray, force_N: FloatArray) -> FloatArray:
        """Σ over the points of force · second derivative of their places, (B, n, n): what turning does to constant forces.

        The derivative of column j of the Jacobian by coordinate i, a turn about a that lies on the way to joint j, is a × column j.
        """
        copies = len(jacobian)
        columns = jacobian.reshape(copies, -1, self.size)
        moments = np.swapaxes(columns, 1, 2) @ _cross_matrices(force_N.reshape(-1, 3)).reshape(copies, -1, 3)
        axes = np.zeros((copies, self.size, 3))
        axes[:, 3:FREE], axes[:, FREE:] = np.eye(3), frames.axis
        upper = np.where(self._turns_by, axes @ np.swapaxes(moments, 1, 2), 0.0)
        return np.asarray(upper + np.where(self._turns_by.T & ~self._turns_by, np.swapaxes(upper, 1, 2), 0.0))


def turned(turn: FloatArray, by_rad: FloatArray) -> FloatArray:
    """Rotation matrices (B, 3, 3) turned on by rotation vectors (B, 3) in the world (Rodrigues' formula)."""
    angle = np.linalg.norm(by_rad, axis=1) + 1e-300
    across = _cross_matrices(by_rad / angle[:, None])
    sine, versine = np.sin(angle)[:, None, None], (1.0 - np.cos(angle))[:, None, None]
    return np.asarray((np.eye(3) + sine * across + versine * (across @ across)) @ turn)


def _along(turn: FloatArray, vector: FloatArray) -> FloatArray:
    """Vectors (m, 3) turned by matrices (B, m, 3, 3)."""
    return np.asarray(np.sum(turn * vector[:, None, :], axis=-1))


def _cross_matrices(vectors: FloatArray) -> FloatArray:
    """Matrices (m, 3, 3) that multiply like vectors (m, 3) do in a cross product from the left."""
    matrices = np.zeros((len(vectors), 3, 3))
    x, y, z = vectors.T
    matrices[:, 0, 1], matrices[:, 0, 2], matrices[:, 1, 2] = -z, y, -x
    return matrices - np.swapaxes(matrices, 1, 2)


def _generations(model: BodyModel) -> tuple[Generation, ...]:
    depth = [0] * len(model.links)
    members: dict[tuple[int, bool], list[int]] = {}
    for index, link in enumerate(model.links):
        if link.joint is not None:
            depth[index] = depth[link.parent] + 1
            members.setdefault((depth[index], link.joint.kind == "revolute"), []).append(index)
    parents = np.array([link.parent for link in model.links])
    return tuple(Generation(np.array(at), parents[at], kind) for (_, kind), at in sorted(members.items()))


def _turned_by(above: BoolArray, turning: BoolArray) -> BoolArray:
    """(n, n): whether coordinate i turns what coordinate j moves, i coming first (the root's three turns by number)."""
    size = FREE + len(turning)
    turns = np.zeros((size, size), dtype=bool)
    turns[3:FREE, 3:] = True
    turns[3:FREE, 3:FREE] = np.triu(np.ones((3, 3), dtype=bool))
    turns[FREE:, FREE:] = (above[1:] & turning).T
    return turns
