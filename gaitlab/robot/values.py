"""Checks one value of a robot file against its key's rule and takes it to SI."""

from __future__ import annotations

import math
from typing import Any

from gaitlab.robot.faults import Place, fail
from gaitlab.robot.fields import Key
from gaitlab.robot.hints import split_unit

# Nothing a bench could measure lies outside, whatever the unit; keeps products and quotients in range. Chosen by us.
MAGNITUDE_MIN = 1e-9
MAGNITUDE_MAX = 1e9
ITEMS_MAX = 10_000  # entries of one array; chosen by us
REACH_MAX_MM = 10_000  # no part of a crawler lies or measures more than 10 m from where it is fixed; chosen by us
TEXT_MAX = 1_000  # characters of one text; chosen by us


def number_of(key: Key, value: Any, place: Place) -> float:
    """A finite number within the key's bounds, in SI."""
    return _checked(key, value, place) * key.scale + key.offset


def integer_of(key: Key, value: Any, place: Place) -> int:
    """A whole number within the key's bounds."""
    if isinstance(value, bool) or not isinstance(value, int):
        raise fail(place, "be a whole number", value, key.fix or "write it without quotes and without a decimal point")
    return int(_checked(key, value, place))


def text_of(key: Key, value: Any, place: Place) -> str:
    """A text, one of the key's choices if it has any."""
    if not isinstance(value, str):
        raise fail(place, "be a text in quotes", value, key.fix)
    if key.choices and value not in key.choices:
        raise fail(place, "be one of " + ", ".join(key.choices), value, key.fix)
    if len(value) > TEXT_MAX:
        raise fail(place, f"be at most {TEXT_MAX} characters long", len(value))
    return value


def flag_of(key: Key, value: Any, place: Place) -> bool:
    """true or false."""
    if not isinstance(value, bool):
        raise fail(place, "be true or false", value, "write true or false without quotes")
    return value


def numbers_of(key: Key, value: Any, place: Place) -> tuple[float, ...]:
    """A list of finite numbers of the key's length, in SI."""
    items = list_of(value, place, "numbers")
    if key.length is not None and len(items) != key.length:
        raise fail(place, f"have {key.length} numbers", value, "a vector is [x, y, z]: x forward, y left, z up")
    if key.length is not None and key.name.endswith("_mm"):
        _check_reach(items, place)
    return tuple(number_of(key, item, (*place, i)) for i, item in enumerate(items))


def _check_reach(items: list[Any], place: Place) -> None:
    for i, item in enumerate(items):
        if isinstance(item, int | float) and abs(item) > REACH_MAX_MM:
            raise fail((*place, i), f"lie within {REACH_MAX_MM} mm", item, "vectors are in mm")


def texts_of(key: Key, value: Any, place: Place) -> tuple[str, ...]:
    """A list of texts."""
    return tuple(text_of(key, item, (*place, i)) for i, item in enumerate(list_of(value, place, "texts")))


def text_lists_of(key: Key, value: Any, place: Place) -> tuple[tuple[str, ...], ...]:
    """A list of lists of texts."""
    return tuple(texts_of(key, item, (*place, i)) for i, item in enumerate(list_of(value, place, "lists of texts")))


def mapping_of(key: Key, value: Any, place: Place) -> tuple[tuple[str, int | str], ...]:
    """A table from names to whole numbers or texts, sorted by name."""
    if not isinstance(value, dict):
        raise fail(place, "be a table such as { a = 1 }", value)
    for name, item in value.items():
        if isinstance(item, bool) or not isinstance(item, int | str):
            raise fail((*place, name), "be a whole number or a text", item)
    return tuple(sorted(value.items()))


def list_of(value: Any, place: Place, what: str) -> list[Any]:
    """A list that is not longer than any honest file needs."""
    if not isinstance(value, list):
        raise fail(place, f"be a list of {what} in square brackets", value)
    if len(value) > ITEMS_MAX:
        raise fail(place, f"have at most {ITEMS_MAX} items", len(value))
    return value


def _checked(key: Key, value: Any, place: Place) -> float:
    if isinstance(value, bool) or not isinstance(value, int | float):
        unit = split_unit(key.name)[1].replace("_", " ")
        fix = "a plain number" + (f" in {unit}, the unit is in the key" if unit else "") + ", without quotes"
        raise fail(place, "be a number", value, key.fix or fix)
    try:
        number = float(value)
    except OverflowError:
        number = math.inf
    if not math.isfinite(number):
        raise fail(place, "be a finite number", value, key.fix)
    if not _within(key, number):
        raise fail(place, "be " + key.rule(), value, key.fix)
    if number != 0.0 and not MAGNITUDE_MIN <= abs(number) <= MAGNITUDE_MAX:
        raise fail(
            place, f"lie between {MAGNITUDE_MIN:g} and {MAGNITUDE_MAX:g} in size", value, "check the unit in the key"
        )
    return number


def _within(key: Key, number: float) -> bool:
    return (
        (key.above is None or number > key.above)
        and (key.at_least is None or number >= key.at_least)
        and (key.below is None or number < key.below)
        and (key.at_most is None or number <= key.at_most)
    )
