"""Engines as a whole: worlds of their own, the same bytes twice, failures by name, order of loading and stepping."""

from __future__ import annotations

import subprocess
import sys
from dataclasses import replace

import numpy as np
import pytest

from gaitlab.body.bullet import BulletEngine
from gaitlab.body.engine import Engine, EngineSettings, advance, failure
from gaitlab.body.engines import open_engine
from gaitlab.body.model import body_model
from gaitlab.errors import InputError
from gaitlab.robot.parts import Skid
from tests.body.rigs import ROW5, G, crawler, held, opened

ENGINES = ("pybullet", "mujoco")


def waved(engine: Engine, steps: int) -> np.ndarray:
    """Joint state (J, 2) after so many steps of a wave."""
    phase = engine.settings.step_s * np.arange(steps)[:, None] + np.linspace(0.0, 0.8, len(engine.model.inlets))
    assert advance(engine, 20e3 * (1.0 - np.cos(2.0 * np.pi * phase))) == ""
    return engine.joint_state()


@pytest.mark.parametrize("name", ENGINES)
def test_two_bodies_in_one_process_do_not_feel_each_other(name: str) -> None:
    """Stepped in turns or alone, a body ends in the same state to the bit."""
    alone = waved(opened(ROW5, name), 300)
    first, second = opened(ROW5, name), opened(crawler(ahead=0.1, back=0.9), name)
    for _ in range(3):
        waved(second, 100)
    assert np.array_equal(waved(first, 300), alone)
    second.close()
    assert np.array_equal(waved(opened(ROW5, name), 300), alone)


@pytest.mark.parametrize("name", ENGINES)
def test_a_nudge_moves_the_start_and_nothing_else(name: str) -> None:
    still, moved = opened(ROW5, name), opened(ROW5, name, nudge_m=1e-4)
    assert moved.base_pose()[0] - still.base_pose()[0] == pytest.approx([1e-4] * 3, rel=1e-3)
    assert np.array_equal(moved.joint_state(), still.joint_state())


@pytest.mark.parametrize("name", ENGINES)
def test_base_velocity_is_the_rate_of_the_base_pose(name: str) -> None:
    """Semi-implicit steps move by the speed at their end, so the difference of places over a step is that speed."""
    engine = opened(crawler(ahead=0.1, back=0.9), name)
    for vacuum in (20e3, 0.0):
        advance(engine, np.full((60, 1), vacuum))
        before = engine.base_pose()[0]
        advance(engine, np.full((1, 1), vacuum))
        speed, spin = engine.base_velocity()
        rate = (engine.base_pose()[0] - before) / engine.settings.step_s
        com = np.array(engine.model.links[0].com_m)
        assert speed - np.cross(spin, com) == pytest.approx(rate, rel=0.02, abs=2e-5)


@pytest.mark.parametrize("name", ENGINES)
def test_speed_of_a_foot_is_the_rate_of_its_place(name: str) -> None:
    """Semi-implicit steps: the way over the last step is the speed at its end, but for what a millisecond of turning bends it."""
    engine = opened(ROW5, name)
    held(engine, 30e3, 0.3)
    advance(engine, np.zeros((40, 5)))
    before = engine.feet()
    advance(engine, np.zeros((1, 5)))
    after = engine.feet()
    rate = (after.position_m - before.position_m) / engine.settings.step_s
    assert np.abs(rate).max() > 0.01
    assert after.velocity_m_s == pytest.approx(rate, rel=0.03, abs=0.03 * np.abs(rate).max())


@pytest.mark.parametrize("name", ENGINES)
def test_feet_that_share_a_link_carry_their_own_loads(name: str) -> None:
    """Four skids under one block, the load moved forward: moments about the rear pair give the front ones' share."""
    robot = crawler(ahead=0.1, back=0.9)
    skids = tuple(skid for skid in robot.body.skids if skid.block == "rear")
    corner = tuple(Skid(f"f{i}", "front", (x, 0.0, -0.012), "bristle") for i, x in enumerate((0.014, -0.006)))
    engine = opened(replace(robot, body=replace(robot.body, skids=(*corner, *skids))), name)
    held(engine, 0.0, 1.0)
    loads = dict(zip((foot.name for foot in engine.model.feet), engine.feet().normal_N, strict=True))
    assert sum(loads.values()) == pytest.approx(engine.model.mass_kg * G, rel=1e-3)
    assert loads["f1"] > loads["f0"] > 0.0, "the rear skid is nearer to the weight of block and bellows"


def test_a_blow_up_is_named_diverged() -> None:
    """A body whose springs the checks have not seen: links made a thousand times lighter behind their back."""
    model = body_model(ROW5)
    engine = BulletEngine(model, EngineSettings())
    engine.drive._stiffness *= 1e4
    assert advance(engine, np.full((400, 5), 30e3)) == "diverged"


def test_a_trunk_on_the_ground_is_named_fell_over() -> None:
    model = body_model(ROW5)
    engine = BulletEngine(model, EngineSettings())
    engine.drive._stiffness *= 0.0
    assert advance(engine, np.full((1500, 5), 5e3)) == "fell_over"
    assert failure(engine, np.zeros(25)) == "fell_over"


def test_unknown_engines_are_refused() -> None:
    with pytest.raises(InputError, match="engine must be one of pybullet, mujoco, got 'ode'"):
        open_engine("ode", body_model(ROW5), EngineSettings())


def test_a_flat_body_walks_straight_in_bullet() -> None:
    """A robot that is its own mirror image neither turns nor drifts by more than a per cent of what it travels."""
    engine = opened(ROW5)
    waved(engine, 1000)
    before = engine.base_pose()
    waved(engine, 3000)
    after = engine.base_pose()
    way = after[0] - before[0]
    assert abs(way[0]) > 5e-3
    assert abs(way[1]) < 0.01 * abs(way[0])
    assert abs(2.0 * (after[1][2] - before[1][2])) < 2e-3


def test_importing_bullet_leaves_nothing_on_stderr_and_stderr_as_it_was() -> None:
    """A fresh process: the library prints its build time from C when it is imported."""
    code = (
        "import sys; from gaitlab.body.engines import quiet_import\n"
        "with quiet_import('pybullet'):\n    import pybullet\n"
        "print('after', file=sys.stderr)"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert (done.stdout, done.stderr) == ("", "after\n")
