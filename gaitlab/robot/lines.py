"""Finds the line of a table or key in TOML text, for messages only: a best effort that never fails."""

from __future__ import annotations

import re
from collections.abc import Iterator

from gaitlab.robot.faults import Place

_HEADER = re.compile(r"^\s*(\[\[?)\s*([^\[\]]+?)\s*\]\]?\s*(#.*)?$")
_KEY = re.compile(r"""^\s*((?:[\w-]+|"[^"]*"|'[^']*')(?:\s*\.\s*(?:[\w-]+|"[^"]*"|'[^']*'))*)\s*=""")


def line_of(text: str, place: Place) -> int | None:
    """The line (from 1) where `place` is written, or its nearest enclosing table or key that can be found.

    >>> line_of("a = 1\\n[b]\\nc = 2\\n", ("b", "c"))
    3
    """
    found = dict(_reversed_places(text))
    for end in range(len(place), 0, -1):
        if place[:end] in found:
            return found[place[:end]]
    return None


def _reversed_places(text: str) -> Iterator[tuple[Place, int]]:
    # Later pairs win in a dict: going backwards keeps the first line on which a place appears.
    return reversed(list(_places(text)))


def _places(text: str) -> Iterator[tuple[Place, int]]:
    table: Place = ()
    counts: dict[Place, int] = {}
    for number, line in _logical_lines(text):
        header = _HEADER.match(line)
        if header:
            table = _opened(header[1] == "[[", _parts(header[2]), counts)
            yield from ((table[:end], number) for end in range(1, len(table) + 1))
            continue
        key = _KEY.match(line)
        if key:
            place = (*table, *_parts(key[1]))
            yield from ((place[:end], number) for end in range(len(table) + 1, len(place) + 1))


def _opened(is_array: bool, names: tuple[str, ...], counts: dict[Place, int]) -> Place:
    """The place a header opens; every array of tables on the way stands at its latest item."""
    place: Place = ()
    for depth, name in enumerate(names, start=1):
        place = (*place, name)
        if is_array and depth == len(names):
            counts[place] = counts.get(place, -1) + 1
        if place in counts:
            place = (*place, counts[place])
    return place


def _parts(dotted: str) -> tuple[str, ...]:
    return tuple(part.strip().strip("\"'") for part in re.findall(r"""[^."'\s]+|"[^"]*"|'[^']*'""", dotted))


def _logical_lines(text: str) -> Iterator[tuple[int, str]]:
    """Lines that can open a table or a key: those inside a multi-line text or array are left out."""
    quote, depth = "", 0
    for number, line in enumerate(text.split("\n"), start=1):
        if not quote and depth == 0:
            yield number, line
        quote, depth = _state_after(line, quote, depth)


def _state_after(line: str, quote: str, depth: int) -> tuple[str, int]:
    """Whether a multi-line text is open after this line, and how many brackets are."""
    for token in re.findall(r'''"""|\'\'\'|"(?:\\.|[^"\\])*"|'[^']*'|\\.|#|[\[\]]''', line):
        if quote:
            quote = "" if token == quote else quote
        elif token in ('"""', "'''"):
            quote = token
        elif token == "#":
            break
        elif token in "[]":
            depth = max(0, depth + (1 if token == "[" else -1))
    return quote, depth
