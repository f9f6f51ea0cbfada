"""Rules that tie several tables of a robot file together; each raises FaultError at the place to put right."""

from __future__ import annotations

from gaitlab.errors import InputError, must
from gaitlab.robot.check_parts import check_bellows, check_opposed, check_supply, check_valves
from gaitlab.robot.check_wiring import check_wiring
from gaitlab.robot.faults import fail
from gaitlab.robot.names import chain_places, check_names
from gaitlab.robot.records import Robot
from gaitlab.robot.tree import check_tree

# A body engine handles some 120 joints, three for each inlet; no walker published has as many. Chosen by us.
INLETS_MAX = 40
BLOCKS_MAX = 64
BLOCK_MIN_M = 1e-4  # thinner than foil; chosen by us


def check_robot(robot: Robot) -> None:
    """Everything that one key alone cannot tell. Raises FaultError for the first rule broken."""
    _check_counts(robot)
    check_names(robot)
    check_tree(robot)
    check_supply(robot)
    check_valves(robot)
    check_bellows(robot)
    check_opposed(robot)
    _check_overrides(robot)
    check_wiring(robot)


def require_odd_ring(robot: Robot) -> None:
    """Raises InputError for a ring that cannot oscillate: an even number of inverters latches, one has no partner.

    Closed loops of an odd number of inverters have no stable resting state to fall into (ring oscillator, textbook rule).
    """
    stages = robot.ring.stages
    if stages % 2 == 0 or stages < 3:
        rule = "an odd number of 3 or more for the ring to oscillate (an even ring latches)"
        raise InputError(must("ring.stages", rule, stages, f"use {max(3, stages - 1)} or {max(3, stages + 1)} stages"))


def _check_counts(robot: Robot) -> None:
    if not robot.body.blocks:
        raise fail(("body", "block"), "hold at least one block")
    for index, block in enumerate(robot.body.blocks):
        if min(block.size_m) < BLOCK_MIN_M:
            raise fail(
                ("body", "block", index, "size_mm"),
                f"be at least {BLOCK_MIN_M * 1e3:g} mm each way",
                min(block.size_m) * 1e3,
            )
    if len(robot.body.blocks) > BLOCKS_MAX:
        raise fail(("body", "block"), f"hold at most {BLOCKS_MAX} blocks", len(robot.body.blocks))
    for place, chain in chain_places(robot):
        if not chain.units:
            raise fail((*place, "bellows"), "be given, or at least one unit", fix='bellows = "type"')
    inlets = len(robot.inlets())
    if not 1 <= inlets <= INLETS_MAX:
        raise fail(("body", "leg"), f"give the robot 1 to {INLETS_MAX} air inlets in all", inlets)


def _check_overrides(robot: Robot) -> None:
    seen: set[int] = set()
    for index, override in enumerate(robot.ring.overrides):
        place = ("ring", "stage", index, "number")
        if override.stage > robot.ring.stages:
            raise fail(place, f"be a stage of the ring, 1 to {robot.ring.stages}", override.stage)
        if override.stage in seen:
            raise fail(place, "be given once per stage", override.stage, "put both changes into one [[ring.stage]]")
        seen.add(override.stage)
