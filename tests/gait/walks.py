"""Robots and short walks that several tests share."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path
from typing import Any

from gaitlab.gait.records import Trace, Walk
from gaitlab.gait.walk import walk_waves
from gaitlab.ring.sequence import ideal_waves
from gaitlab.robot.circuit import Ground, Vector
from gaitlab.robot.parts import Leg
from gaitlab.robot.reader import read_robot
from gaitlab.robot.records import Robot
from gaitlab.wiring.wiring import wiring_from_text

ROBOTS = Path(__file__).resolve().parents[2] / "robots"
ROW5 = read_robot(ROBOTS / "tray_row5.toml").robot
HEX6 = read_robot(ROBOTS / "hex6_ring3.toml").robot

# The best wiring of each shipped robot (all of its distinct wirings, or two dozen of them, walked with the solved ring).
BEST = {
    "hex6_ring3": "l1=1 r1=1 l2=2 r2=2 l3=3 r3=3",
    "quad_spine": "fl_lift=1 fl_swing=3 fr_lift=5 fr_swing=4 hl_lift=4 hl_swing=1 hr_lift=3 hr_swing=5 back=2",
    "sinuous6": "j1l=1 j1r=2 j1w=open j2l=3 j2r=4 j2w=open j3l=5 j3r=1 j3w=open "
    "j4l=2 j4r=3 j4w=open j5l=4 j5r=5 j5w=open j6l=1 j6r=2 j6w=open",
    "tray_curl5": "a=1 b=2 c=4 d=3 e=5",
    "tray_row5": "a=1 b=3 c=5 d=2 e=4",
    "worm5": "a=1 b=3 c=5 d=2 e=4",
}


def ideal_walk(
    robot: Robot,
    wiring: str,
    *,
    period_s: float = 0.6,
    vacuum_Pa: float = 50e3,
    sequence: str = "alternate",
    **how: Any,
) -> tuple[Walk, Trace | None]:
    """A walk driven by ideal waves: cheap, and the same for every load."""
    placed = wiring_from_text(wiring, robot.inlets(), robot.ring.stages)
    return walk_waves(robot, ideal_waves(robot, placed, sequence, period_s, vacuum_Pa), **how)


def on_slope(robot: Robot, slope_rad: float) -> Robot:
    """The same robot on a floor that rises forward."""
    return replace(robot, ground=Ground(slope_rad, robot.ground.friction_factor))


def with_payload(robot: Robot, mass_kg: float) -> Robot:
    """The same robot with its first payload changed."""
    first, *others = robot.body.payloads
    return replace(robot, body=replace(robot.body, payloads=(replace(first, mass_kg=mass_kg), *others)))


def mirrored(robot: Robot) -> Robot:
    """Left and right of a legged robot exchanged: names stay where their legs go, places and headings change sign."""
    return replace(robot, body=replace(robot.body, legs=tuple(_mirrored_leg(leg) for leg in robot.body.legs)))


def _mirrored_leg(leg: Leg) -> Leg:
    x, y, z = leg.at_m
    at: Vector = (x, -y, z)
    units = tuple(replace(unit, turn_rad=-unit.turn_rad) for unit in leg.units)
    return replace(leg, at_m=at, heading_rad=-leg.heading_rad, units=units)
