"""Engines are opened by name; what cannot be opened says why."""

from __future__ import annotations

import sys
from xml.etree import ElementTree

import numpy as np
import pytest

from gaitlab.body.engine import EngineSettings, advance
from gaitlab.body.engines import open_engine
from gaitlab.body.model import body_model
from gaitlab.body.mujoco_scene import scene_xml
from gaitlab.errors import InputError, MissingExtraError
from tests.body.rigs import ROW5

MODEL = body_model(ROW5)


def test_an_unknown_engine_is_refused_by_name() -> None:
    with pytest.raises(InputError, match="engine must be one of pybullet, mujoco, got 'other'"):
        open_engine("other", MODEL, EngineSettings())


def test_a_missing_library_names_the_extra_that_brings_it(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setitem(sys.modules, "mujoco", None)
    with pytest.raises(MissingExtraError, match=r"gaitlab\[second-engine\]"):
        open_engine("mujoco", MODEL, EngineSettings())


def test_a_step_too_long_for_the_springs_is_refused_with_the_longest_that_works() -> None:
    settings = EngineSettings(step_s=0.01, inertia_factor=1.0)
    with pytest.raises(
        InputError, match=r"stability number .* of the springs must be below 4, got .* a step below"
    ) as fault:
        open_engine("mujoco", MODEL, settings)
    longest_ms = float(str(fault.value).rsplit("a step below ", 1)[1].split(" ms")[0])
    open_engine("mujoco", MODEL, EngineSettings(step_s=0.95e-3 * longest_ms, inertia_factor=1.0)).close()


def test_nothing_of_a_robot_file_is_put_into_the_scene() -> None:
    text = scene_xml(MODEL, EngineSettings())
    assert ROW5.name not in text
    names = [element.get("name", "") for element in ElementTree.fromstring(text).iter()]
    assert all(name == "" or name[0] in "ljf" or name in ("floor", "root") for name in names)


@pytest.mark.parametrize("engine", ["pybullet", "mujoco"])
def test_places_speeds_and_attitudes_of_feet_belong_together(engine: str) -> None:
    """The velocity of each foot is what its place changes by; spin is what its orientation changes by."""
    world = open_engine(engine, MODEL, EngineSettings(step_s=2e-4))
    vacuum = np.full((1, len(MODEL.inlets)), 20e3)
    advance(world, np.repeat(vacuum, 300, axis=0))
    before = world.feet()
    advance(world, vacuum)
    after = world.feet()
    moved = (after.position_m - before.position_m) / 2e-4
    speeds = 0.5 * (before.velocity_m_s + after.velocity_m_s)
    np.testing.assert_allclose(moved, speeds, atol=0.02 * float(np.max(np.abs(speeds))) + 1e-5)
    turned = 2.0 * (after.quaternion - before.quaternion) / 2e-4  # q̇ = ½ ω q, so |q̇| = ½ |ω|
    spins = 0.5 * np.linalg.norm(before.spin_rad_s + after.spin_rad_s, axis=1)
    np.testing.assert_allclose(np.linalg.norm(turned, axis=1), spins, rtol=0.05, atol=1e-2)
    world.close()
