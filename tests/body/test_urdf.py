"""URDF loads back, in Bullet and in MuJoCo, with the same masses, inertias, joints and places."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path
from xml.etree import ElementTree

import mujoco
import numpy as np
import pybullet
import pytest
from scipy.spatial.transform import Rotation

from gaitlab.body.dynamics import link_origins
from gaitlab.body.model import body_model
from gaitlab.body.records import BodyModel
from gaitlab.body.urdf import roll_pitch_yaw, urdf_text
from gaitlab.robot.reader import read_robot
from tests.body.rigs import ROBOTS, ROW5

FILES = sorted(ROBOTS.glob("*.toml"))


@pytest.fixture
def client() -> Iterator[int]:
    number = pybullet.connect(pybullet.DIRECT)
    yield number
    pybullet.disconnect(physicsClientId=number)


def model_of(path: Path) -> BodyModel:
    return body_model(read_robot(path).robot)


@pytest.mark.parametrize("path", FILES, ids=lambda path: path.stem)
def test_bullet_loads_the_same_masses_and_joints(path: Path, client: int, tmp_path: Path) -> None:
    model = model_of(path)
    (tmp_path / "body.urdf").write_text(urdf_text(model), encoding="utf-8")
    body = pybullet.loadURDF(
        str(tmp_path / "body.urdf"), flags=pybullet.URDF_USE_INERTIA_FROM_FILE, physicsClientId=client
    )
    assert pybullet.getNumJoints(body, physicsClientId=client) == len(model.joints)
    place = {link.name: index for index, link in enumerate(model.links)}
    kinds = {pybullet.JOINT_REVOLUTE: "revolute", pybullet.JOINT_PRISMATIC: "prismatic"}
    assert pybullet.getDynamicsInfo(body, -1, physicsClientId=client)[0] == pytest.approx(model.links[0].mass_kg)
    for index in range(len(model.joints)):
        info = pybullet.getJointInfo(body, index, physicsClientId=client)
        link = model.links[place[info[12].decode()]]
        assert link.joint is not None
        assert kinds[info[2]] == link.joint.kind
        assert info[6] == pytest.approx(link.joint.damping)
        dynamics = pybullet.getDynamicsInfo(body, index, physicsClientId=client)
        # Bullet tells the axis in the frame of the principal inertias.
        axis = Rotation.from_quat(dynamics[4]).apply(info[13])
        np.testing.assert_allclose(axis, link.joint.axis, atol=1e-9)
        assert dynamics[0] == pytest.approx(link.mass_kg)
        moments = np.linalg.eigvalsh(link.inertia(1.0))
        np.testing.assert_allclose(np.sort(dynamics[2]), moments, rtol=1e-3, atol=1e-12)


@pytest.mark.parametrize("path", FILES, ids=lambda path: path.stem)
def test_mujoco_loads_the_same_masses_and_places(path: Path) -> None:
    model = model_of(path)
    world = mujoco.MjModel.from_xml_string(urdf_text(model))
    data = mujoco.MjData(world)
    mujoco.mj_forward(world, data)
    assert world.njnt == len(model.joints)
    # MuJoCo welds the root link of a URDF to the world, so its mass is not counted there.
    assert float(np.sum(world.body_mass)) == pytest.approx(model.mass_kg - model.links[0].mass_kg, rel=1e-9)
    origins = link_origins(model)
    for index, link in enumerate(model.links[1:], start=1):
        body = mujoco.mj_name2id(world, mujoco.mjtObj.mjOBJ_BODY, link.name)
        np.testing.assert_allclose(data.xpos[body], origins[index], atol=1e-9)


def test_every_foot_and_look_is_there() -> None:
    model = body_model(ROW5)
    root = ElementTree.fromstring(urdf_text(model))
    assert len(root.findall("./link/collision")) == sum(len(foot.centres_m) for foot in model.feet)
    assert len(root.findall("./link/visual")) == len(model.looks)


def test_texts_are_escaped() -> None:
    model = replace(body_model(ROW5), name="<script>\"&'")
    assert ElementTree.fromstring(urdf_text(model)).get("name") == "<script>\"&'"


def test_roll_pitch_yaw_of_single_turns() -> None:
    half = 0.4 / 2
    sine, cosine = np.sin(half), np.cos(half)
    assert roll_pitch_yaw((sine, 0, 0, cosine)) == pytest.approx((0.4, 0, 0))
    assert roll_pitch_yaw((0, sine, 0, cosine)) == pytest.approx((0, 0.4, 0))
    assert roll_pitch_yaw((0, 0, sine, cosine)) == pytest.approx((0, 0, 0.4))


def test_roll_pitch_yaw_turn_back_into_the_same_rotation_at_the_poles_too() -> None:
    rng = np.random.default_rng(4)
    turns = [Rotation.from_quat(q) for q in rng.normal(size=(20, 4))]
    turns += [Rotation.from_euler("xyz", (0.3, s * np.pi / 2, -0.8)) for s in (1, -1)]
    for turn in turns:
        again = Rotation.from_euler("xyz", roll_pitch_yaw(turn.as_quat()))
        assert (again * turn.inv()).magnitude() < 1e-6
