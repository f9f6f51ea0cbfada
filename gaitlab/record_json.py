"""Frozen records as plain JSON and back: one codec for everything a run folder or a ledger row keeps.

Fields become keys, tuples and arrays become lists, a number that is not finite becomes null (JSON has no NaN), and the
way back is read off the record's own type hints, so that a record and its saved form cannot drift apart unnoticed.
"""

from __future__ import annotations

import dataclasses
import math
import types
import typing
from functools import cache
from typing import Any, TypeVar

import numpy as np

from gaitlab.errors import InputError, must

Record = TypeVar("Record")


def record_to_json(value: Any) -> Any:
    """What `json.dumps` takes: a record as an object, arrays and tuples as lists, nan and infinities as null.

    >>> from gaitlab.gait.records import WaveReading
    >>> record_to_json(WaveReading("direct", 4.0, float("nan")))
    {'direction': 'direct', 'wavelength_legs': 4.0, 'coherence': None}
    """
    if dataclasses.is_dataclass(value) and not isinstance(value, type):
        return {f.name: record_to_json(getattr(value, f.name)) for f in dataclasses.fields(value)}
    if isinstance(value, np.ndarray | np.generic):
        return record_to_json(value.tolist())
    if isinstance(value, tuple | list):
        return [record_to_json(item) for item in value]
    if isinstance(value, float) and not math.isfinite(value):
        return None
    return value


def record_from_json(kind: type[Record], data: Any, *, name: str = "record") -> Record:
    """The record of class `kind` that `record_to_json` wrote; null becomes nan where a number stood.

    Fields with a default may be missing and unknown keys are passed over, so that a folder of a neighbouring version
    still reads. Raises InputError that names the field when a value has the wrong shape.
    """
    if not isinstance(data, dict):
        raise InputError(must(name, "a JSON object", type(data).__name__))
    fields = dataclasses.fields(typing.cast(Any, kind))
    hints = _hints(typing.cast(Any, kind))
    known = {f.name: _value(hints[f.name], data[f.name], f"{name}.{f.name}") for f in fields if f.name in data}
    needed = [f.name for f in fields if f.default is dataclasses.MISSING and f.default_factory is dataclasses.MISSING]
    missing = [key for key in needed if key not in known]
    if missing:
        raise InputError(must(name, f"complete (missing {', '.join(missing)})", sorted(data), "write the folder again"))
    return kind(**known)


@cache
def _hints(kind: Any) -> dict[str, Any]:
    return typing.get_type_hints(kind)


def _value(hint: Any, data: Any, name: str) -> Any:
    origin, choices = typing.get_origin(hint), typing.get_args(hint)
    if dataclasses.is_dataclass(hint):
        return record_from_json(typing.cast(Any, hint), data, name=name)
    if origin in (types.UnionType, typing.Union):
        return _of_union(choices, data, name)
    if origin is np.ndarray:
        return _array(choices[1], data, name)
    if origin is tuple:
        return _tuple(choices, data, name)
    return _scalar(hint, data, name)


def _of_union(choices: tuple[Any, ...], data: Any, name: str) -> Any:
    if data is None and type(None) in choices:
        return None
    for choice in choices:
        try:
            return _value(choice, data, name)
        except InputError:
            continue
    raise InputError(must(name, "one of " + ", ".join(str(choice) for choice in choices), data))


def _array(dtype_hint: Any, data: Any, name: str) -> Any:
    dtype = typing.get_args(dtype_hint)[0]
    try:
        return np.asarray(data, dtype=float).astype(dtype)  # None becomes nan on the way through float
    except (TypeError, ValueError):
        raise InputError(must(name, "a list of numbers of even shape", data)) from None


def _tuple(choices: tuple[Any, ...], data: Any, name: str) -> tuple[Any, ...]:
    if not isinstance(data, list | tuple):
        raise InputError(must(name, "a list", data))
    if len(choices) == 2 and choices[1] is Ellipsis:
        return tuple(_value(choices[0], item, f"{name}[{i}]") for i, item in enumerate(data))
    if len(data) != len(choices):
        raise InputError(must(name, f"a list of {len(choices)}", data))
    return tuple(_value(hint, item, f"{name}[{i}]") for i, (hint, item) in enumerate(zip(choices, data, strict=True)))


def _scalar(hint: Any, data: Any, name: str) -> Any:
    if hint is float and data is None:
        return math.nan
    if hint is float and isinstance(data, int | float) and not isinstance(data, bool):
        return float(data)
    if hint in (int, str, bool) and type(data) is hint:
        return data
    raise InputError(must(name, f"of type {getattr(hint, '__name__', hint)}", data))
