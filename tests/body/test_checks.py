"""Bodies that cannot stand or cannot be run are refused with the number and its limit."""

from __future__ import annotations

from dataclasses import replace

import pytest

from gaitlab.body.bullet import BulletEngine
from gaitlab.body.checks import axial_numbers, buckling_load, check_step, explicit_number, resting_gaps
from gaitlab.body.engine import EngineSettings
from gaitlab.body.model import body_model
from gaitlab.errors import InputError
from gaitlab.robot.parts import Body
from gaitlab.robot.records import Robot
from tests.body.rigs import ROW5, crawler, held, opened, robot_with


def with_leg(**changes: float) -> Robot:
    """The five-leg crawler with other legs."""
    return replace(ROW5, bellows=(replace(ROW5.bellows[0], **changes),))  # type: ignore[arg-type]


def with_body(**changes: object) -> Robot:
    """The five-leg crawler with another body."""
    return replace(ROW5, body=replace(ROW5.body, **changes))  # type: ignore[arg-type]


def softer(factor: float) -> Robot:
    """The crawler on legs of another bending stiffness."""
    bend = ROW5.bellows[0].measured_bend
    assert bend is not None and bend.bend_stiffness_N_m_rad is not None
    stiffness = factor * bend.bend_stiffness_N_m_rad
    return with_leg(measured_bend=replace(bend, bend_stiffness_N_m_rad=stiffness))  # type: ignore[arg-type]


def test_a_leg_that_hangs_in_the_air_is_refused() -> None:
    """The middle leg is mounted 5 mm higher than the rest; its limit is a tenth of 32 mm."""
    legs = tuple(replace(leg, at_m=(0.0, 0.0, -0.001)) if leg.name == "c" else leg for leg in ROW5.body.legs)
    words = r"leg c: gap to the ground must be at most 3.2 mm, got '5 mm'"
    with pytest.raises(InputError, match=words):
        body_model(with_body(legs=legs))
    near = tuple(replace(leg, at_m=(0.0, 0.0, -0.005)) if leg.name == "c" else leg for leg in ROW5.body.legs)
    model = body_model(with_body(legs=near))
    assert model.warnings[0].startswith("leg_gap: leg c hangs 1 mm")
    assert resting_gaps(model) == pytest.approx({"a": 0.0, "b": 0.0, "c": 0.001, "d": 0.0, "e": 0.0}, abs=1e-9)


def test_a_body_that_tips_over_is_refused() -> None:
    """All legs before the trunk's middle."""
    legs = tuple(replace(leg, at_m=(0.01 * index + 0.03, 0.0, -0.006)) for index, leg in enumerate(ROW5.body.legs))
    with pytest.raises(InputError, match=r"feet must be all round the centre of mass, got 'centre of mass at x ="):
        body_model(with_body(legs=legs))


def test_a_body_without_feet_is_refused() -> None:
    robot = crawler(ahead=0.1, back=0.9)
    bare = replace(robot, body=replace(robot.body, skids=()))
    with pytest.raises(InputError, match="body must be given at least one leg or skid"):
        body_model(bare)


def test_a_column_that_buckles_is_refused_and_a_thin_margin_is_said() -> None:
    """π² k/(4 L): 1.08 N a leg at 0.014 N m/rad and 32 mm; a fifth of 0.98 N rests on each."""
    model = body_model(ROW5)
    assert buckling_load(model.chains[0]) == pytest.approx(1.08, abs=0.005)
    assert model.warnings == ()
    with pytest.raises(InputError, match=r"leg a: buckling load must be above its share of the weight, 0.196 N"):
        body_model(softer(0.15))
    assert body_model(softer(0.7)).warnings[0].startswith("buckling_margin: leg a folds at 0.756 N")


def test_a_column_just_above_its_buckling_load_stands_and_one_well_below_folds() -> None:
    """The limit itself in the engine: at 1.4 times the load that folds a leg the trunk stays up, at half of it it sinks."""
    upright = opened(softer(0.25), inertia_factor=200.0)
    held(upright, 1e3, 3.0)
    assert upright.base_pose()[0][2] > 0.95 * upright.model.start_height_m
    light = body_model(softer(0.25))
    heavy = replace(light, links=(replace(light.links[0], mass_kg=0.25), *light.links[1:]))
    folding = BulletEngine(heavy, EngineSettings(inertia_factor=200.0))
    held(folding, 1e3, 3.0)
    assert folding.base_pose()[0][2] < 0.7 * folding.model.start_height_m


def test_more_joints_than_the_engine_takes_are_refused() -> None:
    with pytest.raises(InputError, match="number of joints must be at most 120, got 155"):
        body_model(with_leg(segments=30))


def test_a_step_too_long_for_the_axial_damper_is_refused() -> None:
    """2·dt·k·τ/m = 2 · 1 ms · 400 · 10 ms/6 g = 1.33, so twice the step and a little is past 2.7."""
    model = body_model(ROW5)
    assert axial_numbers(model, step_s=1e-3) == pytest.approx(dict.fromkeys("abcde", 4.0 / 3.0))
    check_step(model, step_s=1e-3, inertia_factor=60.0)
    with pytest.raises(InputError, match=r"axial stability number 2·step·k·τ/m of a must be below 2.7, got '2.8 at a"):
        check_step(model, step_s=2.1e-3, inertia_factor=60.0)
    with pytest.raises(InputError, match="axial stability number"):
        opened(ROW5, step_s=2.1e-3)


def test_a_step_too_long_for_light_segments_is_refused() -> None:
    """At the segments' physical inertia the springs are too fast for 1 ms; below the limit the same body stands still."""
    model = body_model(ROW5)
    assert explicit_number(model, step_s=1e-3, inertia_factor=1.0) > 4.0
    with pytest.raises(InputError, match=r"stability number 2·step·λ \+ \(step·ω\)² of the joints must be below 4"):
        check_step(model, step_s=1e-3, inertia_factor=1.0)
    check_step(model, step_s=2.5e-4, inertia_factor=1.0)
    world = opened(ROW5, step_s=2.5e-4, inertia_factor=1.0)
    held(world, 20e3, 0.5)
    assert abs(world.joint_state()[:, 1]).max() < 0.1


def test_a_spine_that_hangs_between_blocks_counts_both_sides() -> None:
    """Two blocks in series: the slide feels m₁ m₂/(m₁ + m₂)."""
    model = body_model(crawler(ahead=0.1, back=0.9))
    first, rest = model.links[0].mass_kg, model.mass_kg - model.links[0].mass_kg
    expected = 2.0 * 1e-3 * 300.0 * 0.01
    slide = axial_numbers(model, step_s=1e-3)["pull"]
    assert expected / min(first, rest) < slide < 1.2 * expected * model.mass_kg / (first * rest)


def test_a_robot_of_blocks_alone_has_no_column_to_buckle() -> None:
    robot = crawler(ahead=0.1, back=0.9)
    assert body_model(robot).warnings == ()
    assert body_model(
        robot_with(Body(robot.body.blocks, (), robot.body.spines, robot.body.skids), robot.bellows, robot.feet)
    )
