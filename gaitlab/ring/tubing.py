"""How long each tube is: from the ring block to every air inlet, with the robot standing in its drawn shape."""

from __future__ import annotations

import math

import numpy as np

from gaitlab.ring.waves import FloatArray
from gaitlab.robot.parts import Leg, Spine
from gaitlab.robot.records import Robot

LENGTH_STEP_M = 1e-6  # lengths are rounded to this, so that legs drawn as mirror images have equal tubes bit for bit


def tube_lengths(robot: Robot) -> dict[str, float]:
    """Tube length [m] by inlet: straight distance from the manifold times slack, plus the extra; never shorter than LENGTH_STEP_M.

    Air enters a bellows at its root end; an opposed inlet sits beside its partner.
    """
    tubes, places = robot.tubes, inlet_places(robot)
    start = np.array(tubes.manifold_m)
    return {inlet: _rounded(tubes.slack * _distance(place - start) + tubes.extra_m) for inlet, place in places.items()}


def inlet_places(robot: Robot) -> dict[str, FloatArray]:
    """Where air enters each inlet's bellows, in the root block's frame [m]."""
    blocks = block_places(robot)
    places: dict[str, FloatArray] = {}
    for chain in robot.chains():
        root, along = _chain_start(chain)
        at = blocks[root] + along[0]
        for unit in chain.units:
            places[unit.inlet] = at
            if unit.opposed_inlet is not None:
                places[unit.opposed_inlet] = at
            at = at + along[1] * robot.bellows_named(unit.bellows).length_m
    return places


def block_places(robot: Robot) -> dict[str, FloatArray]:
    """Centres of the blocks in the root block's frame [m], spines straight."""
    rears = {spine.rear for spine in robot.body.spines}
    places = {block.name: np.zeros(3) for block in robot.body.blocks if block.name not in rears}
    waiting = list(robot.body.spines)
    while waiting:
        ready = [spine for spine in waiting if spine.front in places]
        if not ready:  # the reader refuses loops; a body without a root would otherwise never end
            raise ValueError("spines form a loop")
        for spine in ready:
            length = sum(robot.bellows_named(unit.bellows).length_m for unit in spine.units)
            joint = places[spine.front] + np.array(spine.front_at_m) - np.array((length, 0.0, 0.0))
            places[spine.rear] = joint - np.array(spine.rear_at_m)
            waiting.remove(spine)
    return places


def _chain_start(chain: Leg | Spine) -> tuple[str, tuple[FloatArray, FloatArray]]:
    """Block that carries a chain, its first point in that block's frame and the direction in which it runs."""
    if isinstance(chain, Spine):
        return chain.front, (np.array(chain.front_at_m), np.array((-1.0, 0.0, 0.0)))
    aside = math.copysign(math.sin(chain.splay_rad), chain.at_m[1]) if chain.at_m[1] else 0.0
    return chain.block, (np.array(chain.at_m), np.array((0.0, aside, -math.cos(chain.splay_rad))))


def _distance(offset: FloatArray) -> float:
    return float(math.sqrt(float(offset @ offset)))


def _rounded(length_m: float) -> float:
    return max(1, round(length_m / LENGTH_STEP_M)) * LENGTH_STEP_M
