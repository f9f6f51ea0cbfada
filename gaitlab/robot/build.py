"""Builds records from tables, driven by nothing but the keys in the records' field metadata."""

from __future__ import annotations

import dataclasses
from collections.abc import Callable
from functools import cache
from typing import Any

from gaitlab.robot import values
from gaitlab.robot.faults import Place, fail
from gaitlab.robot.fields import Key
from gaitlab.robot.hints import suggestion

_PLAIN: dict[str, Callable[[Key, Any, Place], Any]] = {
    "number": values.number_of,
    "integer": values.integer_of,
    "text": values.text_of,
    "flag": values.flag_of,
    "numbers": values.numbers_of,
    "texts": values.texts_of,
    "text_lists": values.text_lists_of,
    "mapping": values.mapping_of,
}


def record_of(record: type, table: Any, place: Place, **given: Any) -> Any:
    """The record that `table` describes; `given` sets fields that have no key (the name of a named table).

    Raises FaultError for the first unknown key, missing key or bad value, in that order.
    """
    keys = keys_of(record)
    _must_be_table(table, place)
    _no_unknown(table, {key.name for key in keys.values()}, place)
    fields: dict[str, Any] = dict(given)
    for field in dataclasses.fields(record):
        key = keys.get(field.name)
        if key is None:
            continue
        if key.name in table:
            fields[field.name] = _value_of(key, table[key.name], (*place, key.name))
        elif field.default is dataclasses.MISSING:
            raise fail((*place, key.name), "be given" + _example(key), fix=key.fix or f"add {key.name} to this table")
    return record(**fields)


@cache
def keys_of(record: type) -> dict[str, Key]:
    """The file's key of each field of a record class, by the field's name."""
    return {f.name: f.metadata["key"] for f in dataclasses.fields(record) if "key" in f.metadata}


def variant_of(variants: tuple[type, ...], table: Any, place: Place) -> type:
    """Which of several record classes a table is, told by the required keys that only one of them has."""
    _must_be_table(table, place)
    marks = {record: _marks(record, variants) for record in variants}
    present = [record for record in variants if marks[record] & table.keys()]
    if len(present) == 1:
        return present[0]
    ways = " | ".join(" + ".join(sorted(_required(record))) for record in variants)
    if present:
        clash = [next(k for k in table if k in marks[record]) for record in present]
        raise fail(place, "be described in one way only", " and ".join(clash), "keep one of: " + ways)
    _no_unknown(table, {key.name for record in variants for key in keys_of(record).values()}, place)
    raise fail(place, "be described by one of: " + ways)


def _value_of(key: Key, value: Any, place: Place) -> Any:
    if key.kind in _PLAIN:
        return _PLAIN[key.kind](key, value, place)
    if key.kind == "table":
        return _table_of(key, value, place)
    if key.kind == "tables":
        items = values.list_of(value, place, "tables")
        return tuple(_table_of(key, item, (*place, i)) for i, item in enumerate(items))
    _must_be_table(value, place)
    return tuple(record_of(key.item, item, (*place, name), name=name) for name, item in value.items())


def _table_of(key: Key, value: Any, place: Place) -> Any:
    record = variant_of(key.item, value, place) if isinstance(key.item, tuple) else key.item
    return record_of(record, value, place)


def _must_be_table(table: Any, place: Place) -> None:
    if not isinstance(table, dict):
        raise fail(place, "be a table", table, "write it as a section in square brackets or as { key = value }")


def _no_unknown(table: dict[str, Any], known: set[str], place: Place) -> None:
    for name in table:
        if name not in known:
            raise fail((*place, name[:80]), "be a key that this table knows", fix=suggestion(name, known))


def _required(record: type) -> set[str]:
    keys = keys_of(record)
    return {
        keys[f.name].name for f in dataclasses.fields(record) if f.name in keys and f.default is dataclasses.MISSING
    }


def _marks(record: type, variants: tuple[type, ...]) -> set[str]:
    others = {key.name for other in variants if other is not record for key in keys_of(other).values()}
    return _required(record) - others


def _example(key: Key) -> str:
    return "" if key.rule().startswith("a ") else f" ({key.rule()})"
