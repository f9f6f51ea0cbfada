"""Sums over a robot's parts that several commands print."""

from __future__ import annotations

from gaitlab.robot.records import Robot


def mass_kg(robot: Robot) -> float:
    """Mass of blocks, bellows, feet and payloads [kg]; tubes, fittings and the air itself are not counted."""
    body = robot.body
    bellows = sum(robot.bellows_named(unit.bellows).mass_kg for chain in robot.chains() for unit in chain.units)
    feet = sum(robot.foot_named(leg.foot).mass_kg for leg in body.legs)
    feet += sum(robot.foot_named(skid.foot).mass_kg for skid in body.skids)
    return bellows + feet + sum(block.mass_kg for block in body.blocks) + sum(load.mass_kg for load in body.payloads)
