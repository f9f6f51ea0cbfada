"""Writes a document as TOML, good or bad: just enough for tests that spoil robot files."""

from __future__ import annotations

import json
import math
import re
from collections.abc import Iterator
from typing import Any


def toml_text(document: dict[str, Any]) -> str:
    """The document with a header per table and per item of an array of tables."""
    return "\n".join(_table(document, ())) + "\n"


def _table(table: dict[str, Any], path: tuple[str, ...]) -> Iterator[str]:
    nested = {k: v for k, v in table.items() if _is_table(v) or _is_tables(v)}
    for key, value in table.items():
        if key not in nested:
            yield f"{_key(key)} = {_value(value)}"
    for key, value in nested.items():
        header = ".".join(_key(part) for part in (*path, key))
        for item in value if isinstance(value, list) else [value]:
            yield ""
            yield f"[[{header}]]" if isinstance(value, list) else f"[{header}]"
            yield from _table(item, (*path, key))


def _is_table(value: Any) -> bool:
    return isinstance(value, dict)


def _is_tables(value: Any) -> bool:
    return isinstance(value, list) and bool(value) and all(isinstance(item, dict) for item in value)


def _key(key: str) -> str:
    return key if re.fullmatch(r"[A-Za-z0-9_-]+", key) else _text(key)


def _value(value: Any) -> str:
    if isinstance(value, bool):
        return str(value).lower()
    if isinstance(value, float):
        return repr(value) if math.isfinite(value) else {math.inf: "inf", -math.inf: "-inf"}.get(value, "nan")
    if isinstance(value, int):
        return hex(value) if value > 10**300 else str(value)  # decimal digits are limited, hexadecimal ones are not
    if isinstance(value, list):
        return "[" + ", ".join(_value(item) for item in value) + "]"
    if isinstance(value, dict):
        return "{ " + ", ".join(f"{_key(k)} = {_value(v)}" for k, v in value.items()) + " }"
    return _text(str(value))


def _text(text: str) -> str:
    return json.dumps(text, ensure_ascii=False).replace("\x7f", "\\u007f")
