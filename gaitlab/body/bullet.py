"""The body in Bullet: one client, one plane, one multibody, every default that matters set by hand."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import pybullet
from numpy.typing import NDArray

from gaitlab.body.bullet_feet import BulletFeet
from gaitlab.body.checks import check_step
from gaitlab.body.drive import Drive
from gaitlab.body.engine import EngineSettings, FeetState
from gaitlab.body.records import GRAVITY_M_S2, BodyModel, Link
from gaitlab.body.rotation import multiplied, principal, rotated

FloatArray = NDArray[np.float64]
Floats = Sequence[float]
NO_TURN = (0.0, 0.0, 0.0, 1.0)
# A sphere of a foot sinks this far under its share of the weight, with this time constant, which is critical damping for that
# share. Rigid spheres carry a body on several feet in as many ways as there are orders of solving, and a symmetric body then
# turns; on giving ones it walks straight (tests/body/test_engine.py).
CONTACT_SINK_M = 1e-5
CONTACT_S = 2e-3


class BulletEngine:
    """A body model in its own Bullet world (DIRECT client), stepped with torques; see the Engine protocol.

    Raises InputError for a step too long for the model's springs and dampers.
    """

    name = "pybullet"

    def __init__(self, model: BodyModel, settings: EngineSettings) -> None:
        check_step(model, step_s=settings.step_s, inertia_factor=settings.inertia_factor)
        self.model = model
        self.settings = settings
        self.drive = Drive(model, step_s=settings.step_s, inertia_factor=settings.inertia_factor)
        self._client = pybullet.connect(pybullet.DIRECT)
        _set_physics(self._client, model, settings)
        self._plane = _plane(self._client, model)
        self._body = _multibody(self._client, model, settings)
        self._joints = list(range(len(model.joints)))
        self._look_links = [look.link for look in model.looks]
        self._look_centres = np.array([look.centre_m for look in model.looks])
        self._look_turns = np.array([look.quaternion for look in model.looks])
        self._masses = np.array([link.mass_kg for link in model.links])
        self._feet = BulletFeet(self._client, self._body, self._plane, model, settings)

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
        self._feet.comb()

    def base_pose(self) -> tuple[FloatArray, FloatArray]:
        """Root block's middle and orientation."""
        place, turn = self._feet.root_frame()
        return np.array(place), np.array(turn)

    def base_velocity(self) -> tuple[FloatArray, FloatArray]:
        """Velocity of the root link's centre of mass and its turning rate."""
        linear, angular = pybullet.getBaseVelocity(self._body, physicsClientId=self._client)
        return np.array(linear), np.array(angular)

    def feet(self) -> FeetState:
        """Places, speeds and loads of the feet."""
        return self._feet.state()

    def part_poses(self) -> tuple[FloatArray, FloatArray]:
        """Centres and orientations of all parts of the picture."""
        places, turns = self._link_frames()
        links = self._look_links
        place = places[links] + rotated(turns[links], self._look_centres)
        return place, multiplied(turns[links], self._look_turns)

    def centre_of_mass(self) -> FloatArray:
        """Centre of mass of the whole body."""
        states = (
            pybullet.getLinkStates(self._body, self._joints, computeForwardKinematics=1, physicsClientId=self._client)
            if self._joints
            else ()
        )
        root = pybullet.getBasePositionAndOrientation(self._body, physicsClientId=self._client)[0]
        places = [root, *(state[0] for state in states)]
        return np.asarray(self._masses @ np.array(places) / self._masses.sum())

    def close(self) -> None:
        """Disconnect the client."""
        pybullet.disconnect(physicsClientId=self._client)

    def _link_frames(self) -> tuple[FloatArray, FloatArray]:
        """Places and orientations of all link frames, root first."""
        states = pybullet.getLinkStates(
            self._body, self._joints, computeForwardKinematics=1, physicsClientId=self._client
        )
        frames = [self._feet.root_frame(), *((state[4], state[5]) for state in states)]
        places, turns = zip(*frames, strict=True)
        return np.array(places), np.array(turns)


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
    stiffness = model.mass_kg * GRAVITY_M_S2 / sum(len(foot.centres_m) for foot in model.feet) / CONTACT_SINK_M
    for foot in model.feet:
        pybullet.changeDynamics(
            body,
            foot.link - 1,
            lateralFriction=foot.friction[0],
            contactStiffness=stiffness,
            contactDamping=stiffness * CONTACT_S,
            physicsClientId=client,
        )
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
