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
        carriers = sorted(set(self._links))
        self._jointed = [link - 1 for link in carriers if link > 0]
        self._row_of_foot = [carriers.index(link) for link in self._links]
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
        x, y, z, w = turn.T
        forward = np.stack([1.0 - 2.0 * (y * y + z * z), 2.0 * (x * y + w * z)], axis=1)
        force = self._forces()[feet]
        along, across = self._bristles.combed(forward, speed + cross(spin, sole - com), force)
        for row, (coefficient, push, place) in enumerate(
            zip(along.tolist(), across.tolist(), sole.tolist(), strict=True)
        ):
            self._set_friction(feet[row], coefficient / self._ground_friction)
            self._push(self._links[feet[row]], push, place)

    def _push(self, link: int, across_N: list[float], place: list[float]) -> None:
        """Load a force in the plane for the next step."""
        force = [*across_N, 0.0]
        pybullet.applyExternalForce(
            self._body, link - 1, force, place, pybullet.WORLD_FRAME, physicsClientId=self._client
        )

    def _set_friction(self, index: int, friction: float) -> None:
        if friction != self._friction[index]:
            self._friction[index] = friction
            link = self._feet[index].link - 1
            pybullet.changeDynamics(self._body, link, lateralFriction=friction, physicsClientId=self._client)

    def _forces(self) -> FloatArray:
        """The floor's force (F, 3) on every foot: friction in the plane, load across it."""
        forces = [[0.0, 0.0, 0.0] for _ in self._feet]
        for force, points in zip(forces, self._contacts(), strict=True):
            for point in points:
                for at in FRICTION:
                    size, way = point[at], point[at + 1]
                    force[0] += size * way[0]
                    force[1] += size * way[1]
                force[2] += point[NORMAL_N]
        return np.array(forces)

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
        rows = [self._root_motion()] if 0 in self._links else []
        if self._jointed:
            # Without forward kinematics the places are those of one step before.
            states = pybullet.getLinkStates(
                self._body,
                self._jointed,
                computeLinkVelocity=1,
                computeForwardKinematics=1,
                physicsClientId=self._client,
            )
            rows += [(state[0], state[5], state[4], state[6], state[7]) for state in states]
        columns = zip(*rows, strict=True)
        return tuple(np.array(column)[self._row_of_foot] for column in columns)

    def _root_motion(self) -> tuple[Any, ...]:
        origin, turn = self.root_frame()
        com, _ = pybullet.getBasePositionAndOrientation(self._body, physicsClientId=self._client)
        speed, spin = pybullet.getBaseVelocity(self._body, physicsClientId=self._client)
        return com, turn, origin, speed, spin

    def root_frame(self) -> tuple[Any, Any]:
        """Pose of the root's frame; Bullet itself keeps that of its principal axes."""
        principal = pybullet.getBasePositionAndOrientation(self._body, physicsClientId=self._client)
        place, turn = pybullet.multiplyTransforms(*principal, *self._from_root_com)
        return place, turn
