"""Numbers of a robot document by their place: read, changed in a copy, and looked up in the schema for unit and bounds.

A place is a tuple such as ``("body", "leg", 2, "at_mm", 0)``; people write ``body.leg.c.at_mm.0``.
"""

from __future__ import annotations

import difflib
from collections.abc import Iterator, Mapping
from typing import Any

from gaitlab.errors import InputError, must
from gaitlab.robot.faults import Place
from gaitlab.robot.fields import REQUIRED, Key
from gaitlab.robot.paths import places_of, value_at
from gaitlab.robot.records import Robot

Document = dict[str, Any]


def number_places(document: Document, dotted: str) -> tuple[Place, ...]:
    """The places of the numbers (or lists of numbers) that `dotted` names. Raises InputError, with close matches, for none."""
    found = tuple(p for p in places_of(document, dotted) if is_numeric(value_at(document, p)))
    if not found:
        close = difflib.get_close_matches(dotted, list(dotted_numbers(document)), n=3, cutoff=0.5)
        fix = "close: " + ", ".join(close) if close else "write table.key, items of arrays of tables by name"
        raise InputError(must("tolerance key", "the dotted path of a number that the robot file states", dotted, fix))
    return found


def numbers_at(document: Document, place: Place) -> tuple[float, ...]:
    """The number at a place, or all of a list of numbers.

    >>> numbers_at({"tubes": {"bore_mm": 2}}, ("tubes", "bore_mm"))
    (2.0,)
    """
    value = value_at(document, place)
    return tuple(float(x) for x in value) if isinstance(value, list) else (float(value),)


def is_numeric(value: Any) -> bool:
    """Whether a value is a number or a list of numbers (true and false are none)."""
    if isinstance(value, list):
        return bool(value) and all(_is_number(x) for x in value)
    return _is_number(value)


def with_value(document: Document, place: Place, value: Any) -> Document:
    """A copy of the document with `value` at `place`; only what lies on the way is copied, missing tables are made."""
    copy: Document = _with(document, place, value)
    return copy


def dotted_numbers(document: Document) -> Iterator[str]:
    """The dotted path of every number or list of numbers (for close matches in messages)."""
    yield from _walk(document, "")


def dotted(document: Document, place: Place) -> str:
    """A place as people write it: items of arrays of tables by name or number, items of a list of numbers from 0."""
    words: list[str] = []
    node: Any = document
    for part in place:
        words.append(_label(node, part))
        node = node[part]
    return ".".join(words)


def key_of(place: Place) -> Key | None:
    """The schema's key for a place (unit, bounds), or None where the schema has none."""
    return _schema(place)[0]


def default_at(place: Place) -> float | None:
    """The number that holds where the file leaves `place` out, in the file's unit, or None."""
    key, default = _schema(place)
    if key is None or key.kind != "number" or not _is_number(default):
        return None
    return (float(default) - key.offset) / key.scale


def _schema(place: Place) -> tuple[Key | None, Any]:
    classes: tuple[type, ...] = (Robot,)
    key: Key | None = None
    default: Any = REQUIRED
    parts = iter(place)
    for part in parts:
        found = next((f for c in classes for f in _keyed(c) if f[0].name == part), None)
        if found is None:
            return None, REQUIRED
        key, default = found
        classes = key.item if isinstance(key.item, tuple) else (key.item,) if key.item else ()
        if key.kind in ("tables", "named_tables", "numbers"):
            next(parts, None)  # the item's position or name
    return key, default


def _keyed(record: type) -> Iterator[tuple[Key, Any]]:
    for field in getattr(record, "__dataclass_fields__", {}).values():
        if "key" in field.metadata:
            yield field.metadata["key"], field.default


def _is_number(value: Any) -> bool:
    return isinstance(value, (int, float)) and not isinstance(value, bool)


def _label(node: Any, part: str | int) -> str:
    item = node[part]
    if isinstance(node, list) and isinstance(item, Mapping):
        return str(item.get("name", item.get("number", int(part) + 1)))
    return str(part)


def _with(node: Any, place: Place, value: Any) -> Any:
    if not place:
        return value
    part, rest = place[0], place[1:]
    if isinstance(node, list):
        items = list(node)
        items[int(part)] = _with(items[int(part)], rest, value)
        return items
    return {**node, part: _with(node.get(part, {}), rest, value)}


def _walk(node: Any, prefix: str) -> Iterator[str]:
    if is_numeric(node):
        yield prefix
        return
    parts: list[Any] = list(node) if isinstance(node, Mapping) else []
    if isinstance(node, list) and all(isinstance(item, Mapping) for item in node):
        parts = list(range(len(node)))
    for part in parts:
        label = _label(node, part)
        yield from _walk(node[part], f"{prefix}.{label}" if prefix else label)
