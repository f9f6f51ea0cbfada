"""Dotted paths to numbers of a robot file, as tolerances use them: ``ring.resistor.square_mm``, ``body.leg.a.at_mm``."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

from gaitlab.robot.faults import Place, fail
from gaitlab.robot.records import Robot


def places_of(document: dict[str, Any], dotted: str) -> tuple[Place, ...]:
    """Where in the document a dotted path leads: none, one, or several when it passes through an array of tables.

    An item of an array of tables is named by its `name` or `number`, by its position from 1, or left out for all of them;
    one number of a list by its place from 0 (``body.leg.a.at_mm.0`` is x).

    >>> places_of({"ring": {"port_mL": 0.6}}, "ring.port_mL")
    (('ring', 'port_mL'),)
    """
    return tuple(_descend(document, tuple(dotted.split(".")), ()))


def value_at(document: dict[str, Any], place: Place) -> Any:
    """The value at a place that exists."""
    value: Any = document
    for part in place:
        value = value[part]
    return value


def check_tolerances(robot: Robot, document: dict[str, Any]) -> None:
    """Every tolerance names numbers that the file states, and one width.

    Raises FaultError.
    """
    for index, tolerance in enumerate(robot.tolerances):
        place: Place = ("tolerance", index)
        if (tolerance.plus_minus is None) == (tolerance.percent is None):
            raise fail((*place, "plus_minus"), "be given, or percent in its place, but not both")
        if tolerance.key.split(".")[0] in ("tolerance", "search", "numerics", "wiring", "name", "notes"):
            raise fail((*place, "key"), "name a physical number of the robot", tolerance.key)
        found = places_of(document, tolerance.key)
        if not found or not all(_is_numeric(value_at(document, p)) for p in found):
            raise fail(
                (*place, "key"),
                "be the dotted path of a number this file states",
                tolerance.key,
                "e.g. ring.resistor.square_mm; write a default into the file before giving it a tolerance",
            )


def _is_numeric(value: Any) -> bool:
    if isinstance(value, list):
        return bool(value) and all(_is_numeric(item) and not isinstance(item, list) for item in value)
    return isinstance(value, int | float) and not isinstance(value, bool)


def _descend(node: Any, parts: tuple[str, ...], place: Place) -> Iterator[Place]:
    if not parts:
        yield place
    elif isinstance(node, dict):
        # Names may hold dots themselves, so the first one, two, … parts are tried as one key.
        for taken in range(1, len(parts) + 1):
            key = ".".join(parts[:taken])
            if key in node:
                yield from _descend(node[key], parts[taken:], (*place, key))
    elif isinstance(node, list) and node and all(isinstance(item, dict) for item in node):
        yield from _through_items(node, parts, place)
    elif isinstance(node, list) and len(parts) == 1 and parts[0] in map(str, range(len(node))):
        yield (*place, int(parts[0]))


def _through_items(items: list[Any], parts: tuple[str, ...], place: Place) -> Iterator[Place]:
    chosen = [i for i, item in enumerate(items) if parts[0] in _labels(item, i)]
    if chosen:
        for i in chosen[:1]:
            yield from _descend(items[i], parts[1:], (*place, i))
        return
    for i, item in enumerate(items):
        yield from _descend(item, parts, (*place, i))


def _labels(item: dict[str, Any], index: int) -> tuple[str, ...]:
    if "name" in item:
        return (str(item["name"]),)
    return (str(item.get("number", index + 1)),)
