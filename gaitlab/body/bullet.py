"""The body in Bullet: one client, one plane, one multibody, every default that matters set by hand."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np
import pybullet
from numpy.typing import NDArray

from gaitlab.body.bristle import bristle_friction
from gaitlab.body.checks import check_step
from gaitlab.body.drive import Drive
from gaitlab.body.engine import EngineSettings, FeetState
from gaitlab.body.records import BodyModel, Link
from gaitlab.body.rotation import principal

FloatArray = NDArray[np.float64]
Floats = Sequence[float]
NO_TURN = (0.0, 0.0, 0.0, 1.0)


class BulletEngine:
    """A body model in its own Bullet world (DIRECT client), stepped with torques; see the Engine protocol.

    Raises InputError for a step too long for the model's springs and dampers.
    """

    name = "pybullet"

    def __init__(self, model: BodyModel, settings: EngineSettings) -> None:
        check_step(model, step_s=settings.step_s, inertia_factor=settings.inertia_factor)
        self.model = model
        self.settings = settings
        self.drive = Drive.of(model, step_s=settings.step_s, inertia_factor=settings.inertia_factor)
        self._client = pybullet.connect(pybullet.DIRECT)
        _set_physics(self._client, model, settings)
        self._plane = _plane(self._client, model)
        self._body = _multibody(self._client, model, settings)
        self._joints = list(range(len(model.joints)))
        self._feet_links = [foot.link - 1 for foot in model.feet]
        self._friction = [foot.friction[0] for foot in model.feet]
        self._bristles = [index for index, foot in enumerate(model.feet) if foot.bristle]
        root_com = pybullet.getDynamicsInfo(self._body, -1, physicsClientId=self._client)[3:5]
        self._from_root_com = pybullet.invertTransform(*root_com)

    def joint_state(self) -> FloatArray:
        """Joint positions and speeds, shape (J, 2)."""
        states = pybullet.getJointStates(self._body, self._joints, physicsClientId=self._client)
        places, speeds, _, _ = zip(*states, strict=True)
        return np.array((places, speeds)).T

    def step(self, torque: FloatArray) -> None:
        """Load torques (they last one step only) and step."""
        pybullet.setJointMotorControlArray(
            self._body,
            self._joints,
            pybullet.TORQUE_CONTROL,
            forces=torque.tolist(),
            physicsClientId=self._client,
        )
        pybullet.stepSimulation(physicsClientId=self._client)
        if self._bristles:
            self._comb()

    def base_pose(self) -> tuple[FloatArray, FloatArray]:
        """Root block's middle and orientation."""
        place, turn = pybullet.multiplyTransforms(*self._root(), *self._from_root_com)
        return np.array(place), np.array(turn)

    def base_velocity(self) -> tuple[FloatArray, FloatArray]:
        """Velocity of the root link's centre of mass and its turning rate."""
        linear, angular = pybullet.getBaseVelocity(self._body, physicsClientId=self._client)
        return np.array(linear), np.array(angular)

    def feet(self) -> FeetState:
        """Places, speeds and loads of the feet."""
        loads = np.array([sum(point[9] for point in points) for points in self._contacts()])
        places, turns, speeds, spins = self._foot_motion()
        return FeetState(places, speeds, turns, spins, loads)

    def part_poses(self) -> tuple[FloatArray, FloatArray]:
        """Centres and orientations of all parts of the picture."""
        frames = self._link_frames()
        poses = [
            pybullet.multiplyTransforms(*frames[look.link], look.centre_m, look.quaternion) for look in self.model.looks
        ]
        return np.array([pose[0] for pose in poses]), np.array([pose[1] for pose in poses])

    def centre_of_mass(self) -> FloatArray:
        """Centre of mass of the whole body."""
        states = pybullet.getLinkStates(self._body, self._joints, physicsClientId=self._client) if self._joints else ()
        places = [self._root()[0], *(state[0] for state in states)]
        masses = np.array([link.mass_kg for link in self.model.links])
        return np.asarray(masses @ np.array(places) / masses.sum())

    def close(self) -> None:
        """Disconnect the client."""
        pybullet.disconnect(physicsClientId=self._client)

    def _root(self) -> tuple[Floats, Floats]:
        """Pose of the root link's centre-of-mass frame, as Bullet keeps it."""
        place, turn = pybullet.getBasePositionAndOrientation(self._body, physicsClientId=self._client)
        return place, turn

    def _link_frames(self) -> list[tuple[Floats, Floats]]:
        """Poses of all link frames, root first."""
        root = pybullet.multiplyTransforms(*self._root(), *self._from_root_com)
        states = pybullet.getLinkStates(self._body, self._joints, physicsClientId=self._client)
        return [root, *((state[4], state[5]) for state in states)]

    def _contacts(self) -> list[list[tuple[Any, ...]]]:
        """Contact points with the ground, by foot."""
        points: list[list[tuple[Any, ...]]] = [[] for _ in self.model.feet]
        by_link: dict[int, list[int]] = {}
        for index, link in enumerate(self._feet_links):
            by_link.setdefault(link, []).append(index)
        for point in pybullet.getContactPoints(self._body, self._plane, physicsClientId=self._client):
            owners = by_link.get(point[3], [])
            points[owners[0] if len(owners) == 1 else self._nearest(owners, point[5])].append(point)
        return points

    def _nearest(self, owners: list[int], place: Floats) -> int:
        """Which of several feet on one link a contact belongs to: the nearest."""
        places = self._foot_motion()[0][owners]
        return owners[int(np.argmin(np.linalg.norm(places - np.array(place), axis=1)))]

    def _foot_motion(self) -> tuple[FloatArray, FloatArray, FloatArray, FloatArray]:
        """Middle of each foot, orientation, velocity of the middle, turning rate."""
        rows = []
        for foot in self.model.feet:
            frame, com, linear, spin = self._link_motion(foot.link)
            middle = np.mean(foot.centres_m, axis=0)
            place = np.array(pybullet.multiplyTransforms(*frame, middle.tolist(), NO_TURN)[0])
            rows.append((place, frame[1], np.array(linear) + np.cross(spin, place - com), spin))
        places, turns, speeds, spins = (np.array(column) for column in zip(*rows, strict=True))
        return places, turns, speeds, spins

    def _link_motion(self, link: int) -> tuple[tuple[Floats, Floats], FloatArray, Floats, Floats]:
        if link == 0:
            linear, angular = pybullet.getBaseVelocity(self._body, physicsClientId=self._client)
            frame = pybullet.multiplyTransforms(*self._root(), *self._from_root_com)
            return frame, np.array(self._root()[0]), linear, angular
        state = pybullet.getLinkState(self._body, link - 1, computeLinkVelocity=1, physicsClientId=self._client)
        return (state[4], state[5]), np.array(state[0]), state[6], state[7]

    def _comb(self) -> None:
        """Give every bristle foot the friction of the way it tends to slide, read from the force that holds it now."""
        contacts = self._contacts()
        for index in self._bristles:
            force = sum(point[10] * np.array(point[11]) + point[12] * np.array(point[13]) for point in contacts[index])
            if not contacts[index]:
                continue
            foot = self.model.feet[index]
            forward = np.array(pybullet.rotateVector(self._link_motion(foot.link)[0][1], [1.0, 0.0, 0.0]))
            friction = bristle_friction(foot.friction, -np.asarray(force), forward)
            if friction != self._friction[index]:
                self._friction[index] = friction
                pybullet.changeDynamics(
                    self._body, foot.link - 1, lateralFriction=friction, physicsClientId=self._client
                )


def _set_physics(client: int, model: BodyModel, settings: EngineSettings) -> None:
    pybullet.setGravity(*model.gravity_m_s2, physicsClientId=client)
    pybullet.setPhysicsEngineParameter(
        fixedTimeStep=settings.step_s,
        numSubSteps=0,
        numSolverIterations=settings.iterations,
        solverResidualThreshold=settings.residual,
        enableConeFriction=1,
        deterministicOverlappingPairs=1,
        restitutionVelocityThreshold=0.0,
        physicsClientId=client,
    )


def _plane(client: int, model: BodyModel) -> int:
    """The ground: friction of a pair is the product of both, so the plane holds the floor's factor."""
    shape = pybullet.createCollisionShape(pybullet.GEOM_PLANE, physicsClientId=client)
    plane = pybullet.createMultiBody(0.0, shape, physicsClientId=client)
    pybullet.changeDynamics(
        plane,
        -1,
        lateralFriction=model.ground_friction,
        spinningFriction=0.0,
        rollingFriction=0.0,
        restitution=0.0,
        physicsClientId=client,
    )
    return int(plane)


def _multibody(client: int, model: BodyModel, settings: EngineSettings) -> int:
    links = model.links
    principals = [principal(link.inertia(settings.inertia_factor)) for link in links]
    nudge = settings.nudge_m
    shapes = [_shape(client, model, index) for index in range(len(links))]
    kinds = {"revolute": pybullet.JOINT_REVOLUTE, "prismatic": pybullet.JOINT_PRISMATIC}
    body = pybullet.createMultiBody(
        baseMass=links[0].mass_kg,
        baseCollisionShapeIndex=shapes[0],
        basePosition=[nudge, nudge, model.start_height_m + nudge],
        baseInertialFramePosition=links[0].com_m,
        baseInertialFrameOrientation=principals[0][1],
        linkMasses=[link.mass_kg for link in links[1:]],
        linkCollisionShapeIndices=shapes[1:],
        linkVisualShapeIndices=[-1] * (len(links) - 1),
        linkPositions=[joint.origin_m for joint in model.joints],
        linkOrientations=[NO_TURN] * (len(links) - 1),
        linkInertialFramePositions=[link.com_m for link in links[1:]],
        linkInertialFrameOrientations=[turn for _, turn in principals[1:]],
        linkParentIndices=[link.parent for link in links[1:]],
        linkJointTypes=[kinds[joint.kind] for joint in model.joints],
        linkJointAxis=[joint.axis for joint in model.joints],
        physicsClientId=client,
    )
    for index, (moments, _) in enumerate(principals):
        _set_link(client, body, index - 1, links[index], moments)
    for foot in model.feet:
        pybullet.changeDynamics(body, foot.link - 1, lateralFriction=foot.friction[0], physicsClientId=client)
    for joint in range(len(model.joints)):
        pybullet.setJointMotorControl2(body, joint, pybullet.VELOCITY_CONTROL, force=0.0, physicsClientId=client)
    return int(body)


def _set_link(client: int, body: int, index: int, link: Link, moments: FloatArray) -> None:
    """Inertia, and all dampings in one call: Bullet resets those that a later call leaves out."""
    pybullet.changeDynamics(
        body,
        index,
        mass=link.mass_kg,
        localInertiaDiagonal=moments.tolist(),
        linearDamping=0.0,
        angularDamping=0.0,
        jointDamping=0.0,
        spinningFriction=0.0,
        rollingFriction=0.0,
        restitution=0.0,
        physicsClientId=client,
    )


def _shape(client: int, model: BodyModel, link: int) -> int:
    """Collision shape of a link: the spheres of its feet, placed from the joint's frame; -1 for a link without feet."""
    places = [(centre, foot.radius_m) for foot in model.feet if foot.link == link for centre in foot.centres_m]
    if not places:
        return -1
    return int(
        pybullet.createCollisionShapeArray(
            shapeTypes=[pybullet.GEOM_SPHERE] * len(places),
            radii=[radius for _, radius in places],
            collisionFramePositions=[centre for centre, _ in places],
            physicsClientId=client,
        )
    )
