"""A robot document in which every stage and every chain owns its parts, so that each can be off by itself.

Splitting changes no number: the split document describes the same robot, only with one [[ring.stage]] entry per stage and one
bellows or foot type per chain, whose numbers can then be changed one by one.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from gaitlab.errors import InputError, must
from gaitlab.robot.faults import Place
from gaitlab.robot.paths import value_at
from gaitlab.trust.places import Document, with_value

STAGE_PARTS = ("resistor", "valve", "port_mL", "control_mL")
TYPE_TABLES = ("bellows", "foot")

Copies = dict[tuple[str, str], dict[str, str]]  # (table, type) → the name of each chain's own copy, by chain


def stage_part(place: Place) -> str | None:
    """The part of a stage that a place lies in (``("ring", "valve", "threshold_kPa")`` → ``valve``), or None."""
    return str(place[1]) if len(place) > 1 and place[0] == "ring" and place[1] in STAGE_PARTS else None


def part_type(place: Place) -> tuple[str, str] | None:
    """The type that a place lies in (``("foot", "pad", "friction")`` → ``("foot", "pad")``), or None."""
    return (str(place[0]), str(place[1])) if len(place) > 2 and place[0] in TYPE_TABLES else None


def split_by_stage(document: Document, part: str) -> Document:
    """Every stage with its own `part`; a stage whose as-built part is in the file already keeps it."""
    ring = document["ring"]
    built = {int(entry["number"]): dict(entry) for entry in ring.get("stage", [])}
    for stage in range(1, int(ring["stages"]) + 1):
        built.setdefault(stage, {"number": stage}).setdefault(part, ring[part])
    return with_value(document, ("ring", "stage"), [built[stage] for stage in sorted(built)])


def stage_places(document: Document, place: Place) -> dict[str, Place]:
    """Where every stage with a part of its own has the number of [ring] at `place`, by the stage's number."""
    found: dict[str, Place] = {}
    for index, entry in enumerate(document["ring"].get("stage", [])):
        own: Place = ("ring", "stage", index, *place[1:])
        if _exists(document, own):
            found[str(entry["number"])] = own
    return found


def split_by_chain(document: Document, table: str, name: str) -> tuple[Document, dict[str, str]]:
    """Every chain with its own copy of the type `table`.`name`; returns the document and the copies' names by chain.

    Raises InputError if no chain uses that type.
    """
    types = dict(document[table])
    body = dict(document["body"])
    copies: dict[str, str] = {}
    for kind in ("leg", "spine", "skid"):
        if kind in body:
            body[kind] = [_with_own_type(chain, table, name, types, copies) for chain in body[kind]]
    if not copies:
        raise InputError(
            must("tolerance with each = leg", "on a bellows or foot type that some leg uses", f"{table}.{name}")
        )
    del types[name]
    return {**document, table: types, "body": body}, copies


def _with_own_type(
    chain: Mapping[str, Any], table: str, name: str, types: dict[str, Any], copies: dict[str, str]
) -> dict[str, Any]:
    in_units = any(unit.get(table) == name for unit in chain.get("unit", []))
    if chain.get(table) != name and not in_units:
        return dict(chain)
    own = _free_name(f"{name[:40]}_{chain['name'][:20]}", types)
    types[own] = types[name]
    copies[str(chain["name"])] = own
    changed = dict(chain)
    if chain.get(table) == name:
        changed[table] = own
    if in_units:
        changed["unit"] = [{**u, table: own} if u.get(table) == name else dict(u) for u in chain["unit"]]
    return changed


def _free_name(name: str, taken: Mapping[str, Any]) -> str:
    while name in taken:
        name += "_"
    return name


def _exists(document: Document, place: Place) -> bool:
    try:
        value_at(document, place)
    except (KeyError, IndexError, TypeError):
        return False
    return True
