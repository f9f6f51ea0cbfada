"""The feet of a body in Bullet: where they are, what they carry, and the combing of bristles."""

from __future__ import annotations

from typing import Any

import numpy as np
import pybullet
from numpy.typing import NDArray

from gaitlab.body.bristle import bristle_friction
from gaitlab.body.engine import FeetState
from gaitlab.body.records import BodyModel
from gaitlab.body.rotation import cross, rotated

FloatArray = NDArray[np.float64]
Contact = tuple[Any, ...]  # as getContactPoints gives it
LINK, PLACE, NORMAL_N, FRICTION = 3, 5, 9, (10, 12)  # indices into it; each friction force is followed by its direction
# A foot keeps its friction until it is off by this share, which saves calls (chosen by us).
FRICTION_STEP = 1e-4


class BulletFeet:
    """Reads (and, where they have bristles, combs) the feet of one body in one client."""

    def __init__(self, client: int, body: int, plane: int, model: BodyModel) -> None:
        self._client, self._body, self._plane = client, body, plane
        self._feet = model.feet
        self._links = [foot.link for foot in model.feet]
        self._middles = np.array([np.mean(foot.centres_m, axis=0) for foot in model.feet])
        root_com = pybullet.getDynamicsInfo(body, -1, physicsClientId=client)[3:5]
        self._from_root_com = pybullet.invertTransform(*root_com)
        self._owners: dict[int, list[int]] = {}
        for index, foot in enumerate(model.feet):
            self._owners.setdefault(foot.link - 1, []).append(index)
        self._bristles = [index for index, foot in enumerate(model.feet) if foot.bristle]
        self._friction = [foot.friction[0] for foot in model.feet]

    def state(self) -> FeetState:
        """Places, speeds and loads."""
        com, turn, origin, speed, spin = self._links_motion()
        place = origin + rotated(turn, self._middles)
        velocity = speed + cross(spin, place - com)
        loads = np.array([sum(point[NORMAL_N] for point in points) for points in self._contacts()])
        return FeetState(place, velocity, turn, spin, loads)

    def comb(self) -> None:
        """Give every bristle foot the friction of the way it tends to slide, read from the force that holds it now."""
        if not self._bristles:
            return
        contacts = self._contacts()
        for index in self._bristles:
            if contacts[index]:
                foot = self._feet[index]
                friction = bristle_friction(foot.friction, _sliding(contacts[index]), self._forward(foot.link))
                self._set_friction(index, friction)

    def _set_friction(self, index: int, friction: float) -> None:
        if abs(friction - self._friction[index]) > FRICTION_STEP * friction:
            self._friction[index] = friction
            link = self._feet[index].link - 1
            pybullet.changeDynamics(self._body, link, lateralFriction=friction, physicsClientId=self._client)

    def _forward(self, link: int) -> tuple[float, float]:
        """The foot's forward axis in the ground plane."""
        x, y, z, w = self.root_frame()[1] if link == 0 else self._state(link)[5]
        return 1.0 - 2.0 * (y * y + z * z), 2.0 * (x * y + w * z)

    def _contacts(self) -> list[list[Contact]]:
        """Contact points with the ground, by foot."""
        points: list[list[Contact]] = [[] for _ in self._feet]
        shared = any(len(owners) > 1 for owners in self._owners.values())
        places = self._places() if shared else None
        for point in pybullet.getContactPoints(self._body, self._plane, physicsClientId=self._client):
            owners = self._owners.get(point[LINK], [])
            if len(owners) == 1:
                points[owners[0]].append(point)
            elif places is not None and owners:
                gaps = ((places[owners] - point[PLACE]) ** 2).sum(axis=1)
                points[owners[int(gaps.argmin())]].append(point)
        return points

    def _places(self) -> FloatArray:
        _, turn, origin, _, _ = self._links_motion()
        return origin + rotated(turn, self._middles)

    def _links_motion(self) -> tuple[FloatArray, ...]:
        """For the link of every foot: centre of mass, orientation, frame origin, velocity of the centre, turning rate."""
        rows = [self._root_motion() if link == 0 else self._link_motion(link) for link in self._links]
        return tuple(np.array(column) for column in zip(*rows, strict=True))

    def _link_motion(self, link: int) -> tuple[Any, ...]:
        state = self._state(link, velocity=1)
        return state[0], state[5], state[4], state[6], state[7]

    def _root_motion(self) -> tuple[Any, ...]:
        origin, turn = self.root_frame()
        com, _ = pybullet.getBasePositionAndOrientation(self._body, physicsClientId=self._client)
        speed, spin = pybullet.getBaseVelocity(self._body, physicsClientId=self._client)
        return com, turn, origin, speed, spin

    def _state(self, link: int, velocity: int = 0) -> tuple[Any, ...]:
        state: tuple[Any, ...] = pybullet.getLinkState(
            self._body, link - 1, computeLinkVelocity=velocity, physicsClientId=self._client
        )
        return state

    def root_frame(self) -> tuple[Any, Any]:
        """Pose of the root's frame; Bullet itself keeps that of its principal axes."""
        principal = pybullet.getBasePositionAndOrientation(self._body, physicsClientId=self._client)
        place, turn = pybullet.multiplyTransforms(*principal, *self._from_root_com)
        return place, turn


def _sliding(points: list[Contact]) -> tuple[float, float]:
    """The way a foot tends to slide in the ground plane: against the friction force on it."""
    forces = [(point[at], point[at + 1]) for point in points for at in FRICTION]
    return -sum(size * way[0] for size, way in forces), -sum(size * way[1] for size, way in forces)
