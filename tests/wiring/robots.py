"""Small robots for counting: the drip-tray crawler's parts, with legs, stages and limits of choice."""

from __future__ import annotations

import tomllib
from functools import cache
from pathlib import Path
from typing import Any

from gaitlab.robot.reader import robot_from_document
from gaitlab.robot.records import Robot

ROBOTS = Path(__file__).parents[2] / "robots"


@cache
def _text(name: str) -> str:
    return (ROBOTS / f"{name}.toml").read_text(encoding="utf-8")


def document(name: str = "tray_row5") -> dict[str, Any]:
    return tomllib.loads(_text(name))


def row_document(legs: int, stages: int, **limits: Any) -> dict[str, Any]:
    """A row of `legs` legs named a, b, c, … on `stages` stages, with these wiring limits."""
    data = document()
    data["name"] = f"row{legs}_ring{stages}"
    data["ring"]["stages"] = stages
    data["wiring"] = limits
    leg = data["body"]["leg"][0]
    span = 34.0 * (legs - 1)
    data["body"]["leg"] = [
        {**leg, "name": chr(ord("a") + i), "at_mm": [span / 2 - 34.0 * i, 0, -6]} for i in range(legs)
    ]
    data["body"]["block"][0]["size_mm"] = [span + 24.0, 30, 12]
    return data


def row(legs: int, stages: int, **limits: Any) -> Robot:
    return robot_from_document(row_document(legs, stages, **limits))


def pairs(legs_each_side: int, stages: int, **limits: Any) -> Robot:
    """Two rows, l1 r1 l2 r2 …, each the other's mirror image."""
    data = document("hex6_ring3")
    data["ring"]["stages"] = stages
    data["wiring"] = limits
    leg = data["body"]["leg"][0]
    data["body"]["leg"] = [
        {**leg, "name": f"{side}{i + 1}", "at_mm": [42 - 42 * i, y, -6]}
        for i in range(legs_each_side)
        for side, y in (("l", 20), ("r", -20))
    ]
    return robot_from_document(data)
