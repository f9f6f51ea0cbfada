"""The robots that the ring's tests vary: the row of five, with other stages, supplies and valves."""

from __future__ import annotations

from dataclasses import replace
from functools import cache
from pathlib import Path
from typing import Any

from gaitlab.robot.circuit import Supply
from gaitlab.robot.reader import read_robot
from gaitlab.robot.records import Robot
from gaitlab.wiring.wiring import Wiring

ROBOTS = Path(__file__).resolve().parents[2] / "robots"


@cache
def tray() -> Robot:
    """The row of five legs on a five-stage ring."""
    return read_robot(ROBOTS / "tray_row5.toml").robot


def in_order(robot: Robot) -> Wiring:
    """Inlets on the outputs one after the other."""
    return Wiring.of({inlet: k % robot.ring.stages + 1 for k, inlet in enumerate(robot.inlets())})


def unloaded(robot: Robot) -> Wiring:
    """Every inlet open to the air: the ring by itself."""
    return Wiring.of(dict.fromkeys(robot.inlets(), "open"))


def with_ring(robot: Robot, **changes: Any) -> Robot:
    """The robot with other numbers in [ring]."""
    return replace(robot, ring=replace(robot.ring, **changes))


def with_valve(robot: Robot, **changes: Any) -> Robot:
    """The robot with other numbers in [ring.valve]."""
    return with_ring(robot, valve=replace(robot.ring.valve, **changes))


def with_supply(robot: Robot, supply: Supply | None = None, **changes: Any) -> Robot:
    """The robot on another supply, or with other numbers of its own."""
    return replace(robot, supply=supply if supply is not None else replace(robot.supply, **changes))
