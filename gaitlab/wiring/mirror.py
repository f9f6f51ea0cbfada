"""Whether a robot is its own mirror image (y → −y), and which inlet then stands where which one stood.

A wiring carried over to the mirrored inlets walks the mirrored path: travel is kept, drift and turn change their sign.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence

from gaitlab.robot.circuit import Vector
from gaitlab.robot.parts import Leg, Spine, Unit
from gaitlab.robot.records import Robot

PLACE_TOLERANCE_m = 1e-9  # file values in mm differ by more than this or not at all; chosen by us
ANGLE_TOLERANCE_rad = 1e-9
BASE_ANGLE = {
    "left": 0.0,
    "up": 0.5 * math.pi,
    "right": math.pi,
    "down": 1.5 * math.pi,
}  # seen along the body, y then z


def mirror_of(robot: Robot) -> tuple[int, ...] | None:
    """Position of each inlet's mirror image, or None where the body is not mirror-symmetric or all inlets lie on the midline.

    Looked at: blocks (paired by the spines that hold them), legs, spines, skids, payloads and the tubes' manifold. Blocks are
    boxes of even density and feet are the same on both sides by their definition. A splayed leg on the midline has no
    mirror image because its side is not given.
    """
    if abs(robot.tubes.manifold_m[1]) > PLACE_TOLERANCE_m:
        return None
    blocks = _block_pairs(robot)
    if blocks is None or not _fixtures_pair(robot, blocks):
        return None
    names = _inlet_pairs(robot, blocks)
    if names is None or all(a == b for a, b in names.items()):
        return None
    position = {inlet: i for i, inlet in enumerate(robot.inlets())}
    return tuple(position[names[inlet]] for inlet in robot.inlets())


def _block_pairs(robot: Robot) -> dict[str, str] | None:
    """The mirror image of each block by name, found along the spines from the root outwards."""
    rears = {spine.rear for spine in robot.body.spines}
    pairs = {block.name: block.name for block in robot.body.blocks if block.name not in rears}
    waiting = list(robot.body.spines)
    while waiting:
        spine = next((s for s in waiting if s.front in pairs), None)
        if spine is None:
            return None
        image = next((s for s in robot.body.spines if _spines_match(spine, s, pairs[spine.front])), None)
        if image is None:
            return None
        pairs[spine.rear] = image.rear
        waiting.remove(spine)
    return pairs if _blocks_match(robot, pairs) else None


def _blocks_match(robot: Robot, pairs: dict[str, str]) -> bool:
    blocks = {block.name: block for block in robot.body.blocks}
    if sorted(pairs.values()) != sorted(blocks):
        return False
    return all(
        blocks[a].size_m == blocks[b].size_m and blocks[a].mass_kg == blocks[b].mass_kg for a, b in pairs.items()
    )


def _spines_match(spine: Spine, image: Spine, image_front: str) -> bool:
    return (
        image.front == image_front
        and _places_match(spine.front_at_m, image.front_at_m)
        and _places_match(spine.rear_at_m, image.rear_at_m)
        and _unit_pairs(spine, image) is not None
    )


def _legs_match(leg: Leg, image: Leg, blocks: dict[str, str]) -> bool:
    on_midline = abs(leg.at_m[1]) <= PLACE_TOLERANCE_m
    return (
        image.block == blocks[leg.block]
        and image.foot == leg.foot
        and _places_match(leg.at_m, image.at_m)
        and abs(leg.splay_rad - image.splay_rad) <= ANGLE_TOLERANCE_rad
        and not (on_midline and abs(leg.splay_rad) > ANGLE_TOLERANCE_rad)
        and _unit_pairs(leg, image) is not None
    )


def _inlet_pairs(robot: Robot, blocks: dict[str, str]) -> dict[str, str] | None:
    names: dict[str, str] = {}
    for leg in robot.body.legs:
        image = next((other for other in robot.body.legs if _legs_match(leg, other, blocks)), None)
        if image is None:
            return None
        names.update(_unit_pairs(leg, image) or {})
    for spine in robot.body.spines:
        twin = next(s for s in robot.body.spines if _spines_match(spine, s, blocks[spine.front]))
        names.update(_unit_pairs(spine, twin) or {})
    return names if sorted(names.values()) == sorted(robot.inlets()) else None


def _unit_pairs(chain: Leg | Spine, image: Leg | Spine) -> dict[str, str] | None:
    """The inlets of `image` that mirror those of `chain`; None if the chains are not mirror images."""
    if len(chain.units) != len(image.units):
        return None
    names: dict[str, str] = {}
    for unit, twin in zip(chain.units, image.units, strict=True):
        pairs = _pairs_of_unit(unit, twin, _mirrored_base(chain), _base(image))
        if pairs is None:
            return None
        names.update(pairs)
    return names


def _pairs_of_unit(unit: Unit, twin: Unit, base: float, twin_base: float) -> dict[str, str] | None:
    if unit.bellows != twin.bellows or (unit.opposed_inlet is None) != (twin.opposed_inlet is None):
        return None
    turn = -unit.turn_rad
    if _same_angle(base, twin_base) and _same_angle(turn, twin.turn_rad):
        return dict(_named([(unit.inlet, twin.inlet), (unit.opposed_inlet, twin.opposed_inlet)]))
    flipped = _same_angle(base + math.pi, twin_base) and _same_angle(turn, twin.turn_rad)
    flipped = flipped or (_same_angle(base, twin_base) and _same_angle(turn + math.pi, twin.turn_rad))
    if flipped and unit.opposed_inlet is not None:
        return dict(_named([(unit.inlet, twin.opposed_inlet), (unit.opposed_inlet, twin.inlet)]))
    return None


def _named(pairs: Sequence[tuple[str | None, str | None]]) -> Iterator[tuple[str, str]]:
    return ((a, b) for a, b in pairs if a is not None and b is not None)


def _base(chain: Leg | Spine) -> float:
    return chain.heading_rad if isinstance(chain, Leg) else BASE_ANGLE[chain.toward]


def _mirrored_base(chain: Leg | Spine) -> float:
    """Heading of the mirrored chain: seen from above a leg's turns round, seen along the body a spine's left and right swap."""
    return -chain.heading_rad if isinstance(chain, Leg) else math.pi - BASE_ANGLE[chain.toward]


def _fixtures_pair(robot: Robot, blocks: dict[str, str]) -> bool:
    skids = [(s.block, s.at_m, s.foot) for s in robot.body.skids]
    loads = [(p.block, p.at_m, p.mass_kg) for p in robot.body.payloads]
    return _all_mirrored(skids, blocks) and _all_mirrored(loads, blocks)


def _all_mirrored(things: Sequence[tuple[str, Vector, object]], blocks: dict[str, str]) -> bool:
    return all(
        any(blocks[block] == other and kind == sort and _places_match(at, place) for other, place, sort in things)
        for block, at, kind in things
    )


def _places_match(a: Vector, b: Vector) -> bool:
    image = (a[0], -a[1], a[2])
    return all(abs(p - q) <= PLACE_TOLERANCE_m for p, q in zip(image, b, strict=True))


def _same_angle(a: float, b: float) -> bool:
    return abs(math.remainder(a - b, 2 * math.pi)) <= ANGLE_TOLERANCE_rad
