"""How a record's field is spelled in a robot file: the key with its unit, the factor to SI and the rule it must keep.

A record is a frozen dataclass whose fields are made with the helpers below; the reader needs nothing else to check a
table and to build the record, and the starter file and the tolerances find every number the same way.
"""

from __future__ import annotations

import dataclasses
import math
from dataclasses import dataclass
from typing import Any

REQUIRED = dataclasses.MISSING

MILLI = 1e-3
KILO = 1e3
ML = 1e-6  # m³ per mL
GRAM = 1e-3
MINUTE_LITRE = 1e-3 / 60.0  # m³/s per L/min
DM3_S_BAR = 1e-3 / 1e5  # m³/(s Pa) per dm³/(s bar)
DEGREE = math.pi / 180.0
KELVIN_AT_ZERO_C = 273.15


@dataclass(frozen=True)
class Key:
    """One key of a table: ``value_SI = value · scale + offset``, and the bounds that the *file's* value must keep."""

    name: str
    kind: str  # number | integer | text | flag | numbers | texts | vector | table | tables | named_tables | mapping
    scale: float = 1.0
    offset: float = 0.0
    above: float | None = None
    at_least: float | None = None
    below: float | None = None
    at_most: float | None = None
    choices: tuple[str, ...] = ()
    item: Any = None  # record class (or tuple of classes, told apart by their keys) for tables
    length: int | None = None
    fix: str = ""

    def rule(self) -> str:
        """The bounds in words, as an error message says them."""
        parts = []
        if self.choices:
            parts.append("one of " + ", ".join(self.choices))
        for bound, word in (
            (self.above, "above"),
            (self.at_least, "at least"),
            (self.below, "below"),
            (self.at_most, "at most"),
        ):
            if bound is not None:
                parts.append(f"{word} {bound:g}")
        return " and ".join(parts) or f"a {self.kind}"


def _field(key: Key, default: Any) -> Any:
    if default is REQUIRED:
        return dataclasses.field(metadata={"key": key})
    return dataclasses.field(default=default, metadata={"key": key})


def number(
    name: str,
    scale: float = 1.0,
    *,
    default: Any = REQUIRED,
    offset: float = 0.0,
    above: float | None = None,
    at_least: float | None = None,
    below: float | None = None,
    at_most: float | None = None,
    fix: str = "",
) -> Any:
    """A finite number; `name` carries the unit, `scale` takes it to SI, bounds are in the file's unit, `default` in SI."""
    return _field(Key(name, "number", scale, offset, above, at_least, below, at_most, fix=fix), default)


def integer(
    name: str, *, default: Any = REQUIRED, at_least: int | None = None, at_most: int | None = None, fix: str = ""
) -> Any:
    """A whole number (TOML integer; true and false are refused)."""
    return _field(Key(name, "integer", at_least=at_least, at_most=at_most, fix=fix), default)


def text(name: str, *, default: Any = REQUIRED, choices: tuple[str, ...] = (), fix: str = "") -> Any:
    """A string, out of `choices` if any are given."""
    return _field(Key(name, "text", choices=choices, fix=fix), default)


def flag(name: str, *, default: Any = REQUIRED) -> Any:
    """true or false."""
    return _field(Key(name, "flag"), default)


def numbers(
    name: str,
    scale: float = 1.0,
    *,
    default: Any = REQUIRED,
    at_least: float | None = None,
    length: int | None = None,
    fix: str = "",
) -> Any:
    """A list of finite numbers, stored as a tuple in SI; `length` fixes how many (a vector has three)."""
    return _field(Key(name, "numbers", scale, at_least=at_least, length=length, fix=fix), default)


def texts(name: str, *, default: Any = REQUIRED) -> Any:
    """A list of strings, stored as a tuple."""
    return _field(Key(name, "texts"), default)


def text_lists(name: str, *, default: Any = REQUIRED) -> Any:
    """A list of lists of strings, stored as a tuple of tuples."""
    return _field(Key(name, "text_lists"), default)


def mapping(name: str, *, default: Any = REQUIRED) -> Any:
    """A table from names to whole numbers or strings, stored as a sorted tuple of pairs."""
    return _field(Key(name, "mapping"), default)


def table(name: str, item: Any, *, default: Any = REQUIRED, fix: str = "") -> Any:
    """A sub-table that becomes a record; with several classes in `item` the keys present choose the class."""
    return _field(Key(name, "table", item=item, fix=fix), default)


def tables(name: str, item: Any, *, default: Any = REQUIRED, fix: str = "") -> Any:
    """An array of tables, stored as a tuple of records."""
    return _field(Key(name, "tables", item=item, fix=fix), default)


def named_tables(name: str, item: Any, *, default: Any = REQUIRED, fix: str = "") -> Any:
    """Sub-tables by name (``[bellows.leg]``), stored as a tuple of records whose `name` field is the sub-table's."""
    return _field(Key(name, "named_tables", item=item, fix=fix), default)
