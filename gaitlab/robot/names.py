"""Names in a robot file: which characters they may hold, that they are unique, and that what refers to them finds them."""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator

from gaitlab.robot.faults import Place, fail
from gaitlab.robot.hints import suggestion
from gaitlab.robot.parts import Leg, Payload, Skid, Spine
from gaitlab.robot.records import Robot

# Names end up in file names, circuit decks, dotted tolerance keys and the wiring on the command line: plain ASCII without
# dots, slashes, blanks and "=". Chosen by us.
_NAME = re.compile(r"[A-Za-z0-9_][A-Za-z0-9_-]{0,63}")
RESERVED = ("open", "held")  # what an inlet may be tubed to besides an output

Named = tuple[Place, str]


def check_names(robot: Robot) -> None:
    """Every name is sane and unique among its kind, and every reference leads somewhere. Raises FaultError."""
    body = robot.body
    _check_name((("name",), robot.name))
    chains = [(("body", "leg", i, "name"), leg.name) for i, leg in enumerate(body.legs)]
    chains += [(("body", "spine", i, "name"), spine.name) for i, spine in enumerate(body.spines)]
    for kind in (
        [(("bellows", b.name), b.name) for b in robot.bellows],
        [(("foot", f.name), f.name) for f in robot.feet],
        [(("body", "block", i, "name"), b.name) for i, b in enumerate(body.blocks)],
        chains + [(("body", "skid", i, "name"), s.name) for i, s in enumerate(body.skids)],
        list(_inlets(robot)),
    ):
        _check_unique(kind)
    _check_references(_block_references(robot), {b.name for b in body.blocks}, "block")
    _check_references(_foot_references(robot), {f.name for f in robot.feet}, "foot")
    _check_references(_bellows_references(robot), {b.name for b in robot.bellows}, "bellows")


def _check_name(named: Named) -> None:
    place, name = named
    if not _NAME.fullmatch(name):
        raise fail(place, "be a name of at most 64 letters a-z, digits, _ and -", name)
    if name in RESERVED:
        raise fail(
            place, "be a name other than " + " and ".join(RESERVED), name, "these words stand for atmosphere and supply"
        )


def _check_unique(kind: Iterable[Named]) -> None:
    seen: set[str] = set()
    for place, name in kind:
        _check_name((place, name))
        if name in seen:
            raise fail(place, "be unique", name, "every leg, spine, skid, block and inlet has a name of its own")
        seen.add(name)


def _check_references(references: Iterable[Named], known: set[str], what: str) -> None:
    for place, name in references:
        if name not in known:
            raise fail(
                place, f"name a {what} of this file", name, suggestion(name, known) if known else f"add a {what}"
            )


def chain_places(robot: Robot) -> Iterator[tuple[Place, Leg | Spine]]:
    """Every chain of bellows with its place in the file."""
    for i, leg in enumerate(robot.body.legs):
        yield ("body", "leg", i), leg
    for i, spine in enumerate(robot.body.spines):
        yield ("body", "spine", i), spine


def _inlets(robot: Robot) -> Iterator[Named]:
    for place, chain in chain_places(robot):
        for j, unit in enumerate(chain.units):
            yield (*place, "unit", j, "inlet"), unit.inlet
            if unit.opposed_inlet is not None:
                yield (*place, "unit", j, "opposed_inlet"), unit.opposed_inlet


def _block_references(robot: Robot) -> Iterator[Named]:
    body = robot.body
    groups: dict[str, tuple[Leg | Skid | Payload, ...]] = {
        "leg": body.legs,
        "skid": body.skids,
        "payload": body.payloads,
    }
    for kind, parts in groups.items():
        yield from ((("body", kind, i, "block"), part.block) for i, part in enumerate(parts))
    for i, spine in enumerate(body.spines):
        yield ("body", "spine", i, "front"), spine.front
        yield ("body", "spine", i, "rear"), spine.rear


def _foot_references(robot: Robot) -> Iterator[Named]:
    groups: dict[str, tuple[Leg | Skid, ...]] = {"leg": robot.body.legs, "skid": robot.body.skids}
    for kind, parts in groups.items():
        yield from ((("body", kind, i, "foot"), part.foot) for i, part in enumerate(parts))


def _bellows_references(robot: Robot) -> Iterator[Named]:
    for place, chain in chain_places(robot):
        yield from (((*place, "unit", j, "bellows"), u.bellows) for j, u in enumerate(chain.units))
