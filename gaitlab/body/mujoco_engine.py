"""The body in MuJoCo: the independent second engine for rechecks, from the same model and behind the same protocol."""

from __future__ import annotations

import importlib
from types import ModuleType
from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy.linalg import eigh
from scipy.spatial.transform import Rotation

from gaitlab.body.bristle import Bristles
from gaitlab.body.drive import PressureDrive
from gaitlab.body.dynamics import free_joint_mass
from gaitlab.body.engine import EngineSettings, FeetState
from gaitlab.body.mujoco_scene import scene_xml
from gaitlab.body.records import BodyModel
from gaitlab.body.rotation import principal
from gaitlab.errors import InputError, MissingExtraError, must

FloatArray = NDArray[np.float64]
SPRING_STABILITY_MAX = 4.0  # (step · ω)² of a semi-implicit Euler step with springs and no explicit damper [theory]


def mujoco_module() -> ModuleType:
    """The mujoco library; raises MissingExtraError where it is not installed."""
    try:
        return importlib.import_module("mujoco")
    except ImportError as error:
        text = "engine mujoco needs the extra second-engine: pip install 'gaitlab[second-engine]'"
        raise MissingExtraError(text) from error


class MujocoEngine:
    """A body model in its own MuJoCo world; see the Engine protocol.

    Springs and dampers of the joints are MuJoCo's own and implicit, so the torques that are loaded hold the pressure and the
    solid limits only. Raises InputError for a step too long for the springs.
    """

    name = "mujoco"

    def __init__(self, model: BodyModel, settings: EngineSettings) -> None:
        _check_step(model, settings)
        self._mujoco = mujoco_module()
        self.model = model
        self.settings = settings
        self.drive = PressureDrive(model, step_s=settings.step_s, inertia_factor=settings.inertia_factor)
        self._world = self._mujoco.MjModel.from_xml_string(scene_xml(model, settings))
        self._data = self._mujoco.MjData(self._world)
        _raise_inertia(self._mujoco, self._world, self._data, model, settings.inertia_factor)
        self._mujoco.mj_forward(self._world, self._data)
        self._foot_of = _foot_of_geom(self._mujoco, self._world, model)
        self._foot_of_pair = [self._foot_of[int(geom)] for geom in self._world.pair_geom2]
        self._down = np.array([(0.0, 0.0, foot.radius_m) for foot in model.feet])
        self._links = [foot.link + 1 for foot in model.feet]
        self._middles = np.array([np.mean(foot.centres_m, axis=0) for foot in model.feet]).reshape(-1, 3)
        self._bristles = Bristles(model, step_s=settings.step_s, inertia_factor=settings.inertia_factor)

    def joint_state(self) -> FloatArray:
        """Joint positions and speeds, shape (J, 2)."""
        return np.column_stack([self._data.qpos[7:], self._data.qvel[6:]])

    def step(self, torque: FloatArray) -> None:
        """Load torques and step."""
        self._data.qfrc_applied[6:] = torque
        self._mujoco.mj_step(self._world, self._data)
        if self._bristles.feet:
            self._comb()

    def base_pose(self) -> tuple[FloatArray, FloatArray]:
        """Root block's middle and orientation."""
        return self._data.qpos[:3].copy(), self._data.qpos[[4, 5, 6, 3]].copy()

    def base_velocity(self) -> tuple[FloatArray, FloatArray]:
        """Velocity of the root link's centre of mass and its turning rate."""
        rotation = self._refreshed().xmat[1].reshape(3, 3)
        spin = rotation @ self._data.qvel[3:6]
        arm = rotation @ np.array(self.model.links[0].com_m)
        return self._data.qvel[:3] + np.cross(spin, arm), spin

    def feet(self) -> FeetState:
        """Places, speeds and loads of the feet."""
        forces, count = self._foot_forces(), len(self.model.feet)
        data = self._refreshed()
        rotation = data.xmat[self._links].reshape(count, 3, 3)
        place = data.xpos[self._links] + np.einsum("fij,fj->fi", rotation, self._middles)
        # cvel is the speed of the point of each body that is at its tree's centre of mass.
        spin, speed = data.cvel[self._links, :3], data.cvel[self._links, 3:]
        velocity = speed + np.cross(spin, place - data.subtree_com[1])
        turn = data.xquat[self._links][:, [1, 2, 3, 0]]
        return FeetState(place, velocity, turn, spin.copy(), forces[:, 2])

    def part_poses(self) -> tuple[FloatArray, FloatArray]:
        """Centres and orientations of all parts of the picture."""
        data, looks = self._refreshed(), self.model.looks
        links = [look.link + 1 for look in looks]
        rotation = data.xmat[links].reshape(len(looks), 3, 3)
        place = data.xpos[links] + np.einsum("pij,pj->pi", rotation, np.array([look.centre_m for look in looks]))
        turns = Rotation.from_quat(data.xquat[links][:, [1, 2, 3, 0]])
        return place, np.asarray((turns * Rotation.from_quat([look.quaternion for look in looks])).as_quat())

    def centre_of_mass(self) -> FloatArray:
        """Centre of mass of the whole body."""
        return np.asarray(self._refreshed().subtree_com[1].copy())

    def close(self) -> None:
        """Let go of the world; Python frees it."""
        del self._data, self._world

    def _refreshed(self) -> Any:
        """Data with places and speeds of the present state: a step leaves those of the state before it."""
        self._mujoco.mj_kinematics(self._world, self._data)
        self._mujoco.mj_comPos(self._world, self._data)
        self._mujoco.mj_comVel(self._world, self._data)
        return self._data

    def _foot_forces(self) -> FloatArray:
        """Force (F, 3) of the ground on every foot in the world."""
        forces, in_contact = np.zeros((len(self.model.feet), 3)), np.zeros(6)
        for index in range(self._data.ncon):
            contact = self._data.contact[index]
            self._mujoco.mj_contactForce(self._world, self._data, index, in_contact)
            # The frame's rows are normal and tangents; the force acts on the second geom, away from the first.
            sign = 1.0 if contact.geom2 in self._foot_of else -1.0
            foot = self._foot_of[contact.geom2 if sign > 0 else contact.geom1]
            forces[foot] += sign * contact.frame.reshape(3, 3).T @ in_contact[:3]
        return forces

    def _comb(self) -> None:
        """Give every bristle foot the friction of the way it slides or tends to slide, and its force across."""
        feet, data = self._bristles.feet, self._data
        links = [self._links[index] for index in feet]
        rotation = data.xmat[links].reshape(len(feet), 3, 3)
        sole = data.xpos[links] + np.einsum("fij,fj->fi", rotation, self._middles[feet]) - self._down[feet]
        speed = data.cvel[links, 3:] + np.cross(data.cvel[links, :3], sole - data.subtree_com[1])
        along, across = self._bristles.combed(rotation[:, :, 0], speed, self._foot_forces()[feet])
        for pair, index in enumerate(self._foot_of_pair):
            if index in feet:
                self._world.pair_friction[pair, :2] = along[feet.index(index)]
        self._push(links, sole, across)

    def _push(self, links: list[int], place: FloatArray, across_N: FloatArray) -> None:
        """Load forces in the plane at `place` for the next step."""
        self._data.xfrc_applied[:] = 0.0
        for link, at, (x, y) in zip(links, place, across_N, strict=True):
            force = np.array([x, y, 0.0])
            self._data.xfrc_applied[link, :3] += force
            self._data.xfrc_applied[link, 3:] += np.cross(at - self._data.xipos[link], force)


def _check_step(model: BodyModel, settings: EngineSettings) -> None:
    mass = free_joint_mass(model, settings.inertia_factor)
    stiffness = np.diag([joint.stiffness for joint in model.joints])
    number = settings.step_s**2 * float(eigh(stiffness, mass, eigvals_only=True)[-1])
    if number >= SPRING_STABILITY_MAX:
        longest = settings.step_s * (SPRING_STABILITY_MAX / number) ** 0.5
        rule, got = f"below {SPRING_STABILITY_MAX:g}", f"{number:.3g} at a step of {settings.step_s * 1e3:g} ms"
        fix = f"a step below {longest * 1e3:.2g} ms or a higher inertia factor"
        raise InputError(must("stability number (step·ω)² of the springs", rule, got, fix))


def _raise_inertia(mujoco: ModuleType, world: Any, data: Any, model: BodyModel, factor: float) -> None:
    """Put in the inertia with its numerical factor, then let MuJoCo work out anew what hangs on it."""
    for index, link in enumerate(model.links):
        moments, (x, y, z, w) = principal(link.inertia(factor))
        world.body_inertia[index + 1] = moments
        world.body_iquat[index + 1] = (w, x, y, z)
    world.body_sameframe[:] = 0  # the inertia frames are no longer the bodies' own, nor are shortcuts through them
    mujoco.mj_setConst(world, data)


def _foot_of_geom(mujoco: ModuleType, world: Any, model: BodyModel) -> dict[int, int]:
    """Index of the foot by the number of the geom."""
    return {
        mujoco.mj_name2id(world, mujoco.mjtObj.mjOBJ_GEOM, f"f{index}_{sphere}"): index
        for index, foot in enumerate(model.feet)
        for sphere in range(len(foot.centres_m))
    }
