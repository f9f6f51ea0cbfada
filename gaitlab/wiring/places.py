"""Where things are on a body that lies straight: blocks along it, inlets on it."""

from __future__ import annotations

from gaitlab.robot.parts import Leg
from gaitlab.robot.records import Robot

Place = tuple[float, float]  # forward, left [m]


def block_origins(robot: Robot) -> dict[str, float]:
    """Forward position [m] of each block's centre with the first root block at 0, spines lying straight."""
    rears = {spine.rear for spine in robot.body.spines}
    origins = {block.name: 0.0 for block in robot.body.blocks if block.name not in rears}
    waiting = list(robot.body.spines)
    while any(spine.front in origins for spine in waiting):
        spine = next(s for s in waiting if s.front in origins)
        length = sum(robot.bellows_named(unit.bellows).length_m for unit in spine.units)
        origins[spine.rear] = origins[spine.front] + spine.front_at_m[0] - length - spine.rear_at_m[0]
        waiting.remove(spine)
    return origins


def inlet_places(robot: Robot) -> tuple[Place, ...]:
    """Where each inlet is on the body, forward and left [m]: a leg's mount, a spine's bellows along the spine."""
    origins = block_origins(robot)
    places: list[Place] = []
    for chain in robot.chains():
        along = 0.0
        for unit in chain.units:
            if isinstance(chain, Leg):
                place = (origins[chain.block] + chain.at_m[0], chain.at_m[1])
            else:
                half = 0.5 * robot.bellows_named(unit.bellows).length_m
                place = (origins[chain.front] + chain.front_at_m[0] - along - half, chain.front_at_m[1])
                along += 2 * half
            places += [place] * (1 if unit.opposed_inlet is None else 2)
    return tuple(places)
