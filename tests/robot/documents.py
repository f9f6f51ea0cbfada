"""Robot documents that the tests of the reader start from."""

from __future__ import annotations

import copy
import tomllib
from pathlib import Path
from typing import Any

ROOT = Path(__file__).resolve().parents[2]
ROBOTS = sorted((ROOT / "robots").glob("*.toml"))
ROW5 = (Path(__file__).parent / "good" / "row5.toml").read_text(
    encoding="utf-8"
)  # kept as it is, whatever the robots become


def row5() -> dict[str, Any]:
    """A fresh document of the five legs in a row."""
    return tomllib.loads(ROW5)


def changed(document: dict[str, Any], place: tuple[Any, ...], value: Any) -> dict[str, Any]:
    """A copy of the document with `value` at `place`; None takes the key away."""
    fresh = copy.deepcopy(document)
    node: Any = fresh
    for part in place[:-1]:
        node = node.setdefault(part, {}) if isinstance(node, dict) else node[part]
    if value is None:
        del node[place[-1]]
    else:
        node[place[-1]] = value
    return fresh


def row5_with(place: tuple[Any, ...], value: Any) -> dict[str, Any]:
    """The five legs in a row with one value changed."""
    return changed(row5(), place, value)
