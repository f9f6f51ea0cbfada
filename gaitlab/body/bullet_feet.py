"""The feet of a body in Bullet: where they are, what they carry, and the combing of bristles."""

from __future__ import annotations

from typing import Any

import numpy as np
import pybullet
from numpy.typing import NDArray

from gaitlab.body.bristle import Bristles
from gaitlab.body.engine import EngineSettings, FeetState
from gaitlab.body.records import BodyModel
from gaitlab.body.rotation import cross, rotated

FloatArray = NDArray[np.float64]
Contact = tuple[Any, ...]  # as getContactPoints gives it
LINK, PLACE, NORMAL_N, FRICTION = 3, 5, 9, (10, 12)  # indices into it; each friction force is followed by its direction


class BulletFeet:
    """Reads (and, where they have bristles, combs) the feet of one body in one client."""

    def __init__(self, client: int, body: int, plane: int, model: BodyModel, settings: EngineSettings) -> None:
        self._client, self._body, self._plane = client, body, plane
        self._feet = model.feet
        self._links = [foot.link for foot in model.feet]
        self._middles = np.array([np.mean(foot.centres_m, axis=0) for foot in model.feet])
        root_com = pybullet.getDynamicsInfo(body, -1, physicsClientId=client)[3:5]
        self._from_root_com = pybullet.invertTransform(*root_com)
        self._owners: dict[int, list[int]] = {}
        for index, foot in enumerate(model.feet):
            self._owners.setdefault(foot.link - 1, []).append(index)
        self._bristles = Bristles(model, step_s=settings.step_s, inertia_factor=settings.inertia_factor)
        self._ground_friction = model.ground_friction
        self._friction = [foot.friction[0] for foot in model.feet]
        self._down = np.array([(0.0, 0.0, foot.radius_m) for foot in model.feet])

    def state(self) -> FeetState:
        """Places, speeds and loads."""
        com, turn, origin, speed, spin = self._links_motion()
        place = origin + rotated(turn, self._middles)
        velocity = speed + cross(spin, place - com)
        loads = np.array([sum(point[NORMAL_N] for point in points) for points in self._contacts()])
        return FeetState(place, velocity, turn, spin, loads)

    def comb(self) -> None:
        """Give every bristle foot the friction of the way it slides or tends to slide, and its force across."""
        feet = self._bristles.feet
        if not feet:
            return
        com, turn, origin, speed, spin = (column[feet] for column in self._links_motion())
        sole = origin + rotated(turn, self._middles[feet]) - self._down[feet]
        contacts = self._contacts()
        force = np.array([_force(contacts[index]) for index in feet])
        forward = rotated(turn, np.tile((1.0, 0.0, 0.0), (len(feet), 1)))
        along, across = self._bristles.combed(forward, speed + cross(spin, sole - com), force)
        for row, index in enumerate(feet):
            self._set_friction(index, float(along[row]) / self._ground_friction)
            self._push(self._links[index], across[row], sole[row])

    def _push(self, link: int, across_N: FloatArray, place: FloatArray) -> None:
        """Load a force in the plane for the next step."""
        force = [float(across_N[0]), float(across_N[1]), 0.0]
        pybullet.applyExternalForce(
            self._body, link - 1, force, place.tolist(), pybullet.WORLD_FRAME, physicsClientId=self._client
        )

    def _set_friction(self, index: int, friction: float) -> None:
        if friction != self._friction[index]:
            self._friction[index] = friction
            link = self._feet[index].link - 1
            pybullet.changeDynamics(self._body, link, lateralFriction=friction, physicsClientId=self._client)

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


def _force(points: list[Contact]) -> tuple[float, float, float]:
    """The floor's force on a foot: friction in the plane, load across it."""
    forces = [(point[at], point[at + 1]) for point in points for at in FRICTION]
    x, y = (sum(size * way[axis] for size, way in forces) for axis in (0, 1))
    return x, y, sum(point[NORMAL_N] for point in points)
