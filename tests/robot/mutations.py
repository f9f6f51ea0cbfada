"""Spoils good robot files in every way a hand, an editor or an enemy might: values, keys, tables, text and bytes.

Each way takes a `Pick` that chooses from a list, so that the same ways serve a shrinking test and a long seeded run.
"""

from __future__ import annotations

import copy
import math
import tomllib
from collections.abc import Callable, Sequence
from typing import Any, TypeVar

from tests.robot.documents import ROBOTS
from tests.robot.toml_writer import toml_text

T = TypeVar("T")
Pick = Callable[[Sequence[Any]], Any]
Place = tuple[Any, ...]
Document = dict[str, Any]

GOOD = {path.stem: tomllib.loads(path.read_text(encoding="utf-8")) for path in ROBOTS}

NUMBERS: list[Any] = [
    math.nan, math.inf, -math.inf, 0, -0.0, 1, -1, 2, 3, 1e-300, 5e-324, 1e300, -1e300, 1e-9, 1e9, 1e-6, 1e6, 10**30, 10**400,
    0.5, 2**63, 31, 32, 64,
]  # fmt: skip
OTHER_TYPES: list[Any] = [
    "5", "5 mm", "", "nan", True, False, [], [1], [[1]], {}, {"a": 1}, [1, 2, 3], ["a"], [{}], "1979-05-27", [1, "a"],
    [0, 0, 0], [1e300, -1e300, 0], [0.0] * 20_000, "x" * 5_000,
]  # fmt: skip
NAMES = [
    "", " ", ".", "..", "../../etc/passwd", "/etc/passwd", "a/b", "a\\b", "C:\\x", "a=b", "a b", "a\nb", "a\x00b", "\x1b[31m", "é",
    "日本語", "🐛", "\u202ereversed", "a" * 65, "a" * 1500, "open", "held", "OPEN", "nan", "1", "-a", "<script>alert(1)</script>",
    "&amp;", "'; DROP TABLE walks; --", "$(reboot)", "%s%n", "{0}", "__class__", "trunk", "leg", "a", "b", "pad", "con", "*",
]  # fmt: skip
UNITS = ["_mm", "_cm", "_m", "_kPa", "_Pa", "_bar", "_mL", "_g", "_kg", "_ms", "_s", "_deg", "_rad", "_in", ""]


def spoiled_document(pick: Pick) -> Document:
    """One good document with one to four things wrong with it."""
    document = copy.deepcopy(GOOD[pick(sorted(GOOD))])
    for _ in range(pick([1, 1, 1, 1, 2, 4])):
        pick(DOCUMENT_WAYS)(document, pick)
    return document


def spoiled_bytes(pick: Pick) -> bytes:
    """A spoiled file: always its document, at times its text and its bytes too."""
    text = toml_text(spoiled_document(pick))
    for way in pick([[], [], [], [], [], [], [pick(TEXT_WAYS)], [pick(TEXT_WAYS), pick(TEXT_WAYS)]]):
        text = way(text, pick)
    return bytes(pick([*[utf8] * 12, pick(BYTE_WAYS)])(text, pick))


def places(node: Any, at: Place = ()) -> list[Place]:
    """Every place of a document, tables and list items included."""
    found: list[Place] = [at] if at else []
    items: list[tuple[Any, Any]] = []
    if isinstance(node, dict):
        items = list(node.items())
    elif isinstance(node, list):
        items = list(enumerate(node[:50]))
    for key, value in items:
        found += places(value, (*at, key))
    return found


def holder(document: Document, place: Place) -> Any:
    """What holds the value at a place."""
    node: Any = document
    for part in place[:-1]:
        node = node[part]
    return node


def _set(document: Document, place: Place, value: Any) -> None:
    holder(document, place)[place[-1]] = value


def _get(document: Document, place: Place) -> Any:
    return holder(document, place)[place[-1]]


def _some_place(document: Document, pick: Pick, test: Callable[[Any], bool] = lambda _: True) -> Place | None:
    fitting = [place for place in places(document) if test(_get(document, place))]
    return pick(fitting) if fitting else None


def _is_number(value: Any) -> bool:
    return isinstance(value, int | float) and not isinstance(value, bool)


def take_away(document: Document, pick: Pick) -> None:
    """A missing key, table or item."""
    place = _some_place(document, pick)
    if place:
        del holder(document, place)[place[-1]]


def wrong_number(document: Document, pick: Pick) -> None:
    """A number out of any range."""
    place = _some_place(document, pick, _is_number)
    if place:
        _set(document, place, pick(NUMBERS))


def mild_numbers(document: Document, pick: Pick) -> None:
    """A few numbers somewhat off: most of these are still robots, and strange ones."""
    for _ in range(pick([1, 3, 10])):
        place = _some_place(
            document, pick, lambda value: isinstance(value, float | int) and not isinstance(value, bool)
        )
        if place:
            value = _get(document, place)
            _set(
                document,
                place,
                value * pick([1, 2]) if isinstance(value, int) else value * pick([0.03, 0.3, 0.8, 1.25, 3.0, 30.0]),
            )


def scaled_number(document: Document, pick: Pick) -> None:
    """A number in another unit, or with the wrong sign."""
    place = _some_place(document, pick, _is_number)
    if place:
        factor = pick([-1, 1e-3, 1e3, 0.1, 10, 1e-6, 1e6, 0.5, 1.5])
        try:
            _set(document, place, _get(document, place) * factor)
        except OverflowError:
            _set(document, place, math.inf)


def wrong_type(document: Document, pick: Pick) -> None:
    """A value of another type."""
    place = _some_place(document, pick)
    if place:
        _set(document, place, copy.deepcopy(pick([*OTHER_TYPES, *NUMBERS])))


def wrong_text(document: Document, pick: Pick) -> None:
    """A name, reference or choice that is none."""
    place = _some_place(document, pick, lambda value: isinstance(value, str))
    if place:
        _set(document, place, pick(NAMES))


def renamed_key(document: Document, pick: Pick) -> None:
    """A typing error in a key, another unit in it, or a table under another name."""
    tables = [place for place in places(document) if isinstance(place[-1], str)]
    if tables:
        place = pick(tables)
        table, key = holder(document, place), place[-1]
        stem = key.rsplit("_", 1)[0]
        table[pick([key[1:], key + "x", key.upper(), key[::-1], stem + pick(UNITS), pick(NAMES)])] = table.pop(key)


def extra_key(document: Document, pick: Pick) -> None:
    """A key that is not known, or is known elsewhere."""
    place = _some_place(document, pick, lambda value: isinstance(value, dict))
    table = _get(document, place) if place else document
    keys = sorted({p[-1] for p in places(document) if isinstance(p[-1], str)})
    table[pick([*keys, *NAMES])] = copy.deepcopy(pick([*OTHER_TYPES, *NUMBERS]))


def doubled_item(document: Document, pick: Pick) -> None:
    """An item of a list twice or many times: doubled names, doubled inlets, more legs than a ring feeds."""
    place = _some_place(document, pick, lambda value: isinstance(value, list) and bool(value))
    if place:
        items = _get(document, place)
        items += [copy.deepcopy(pick(items)) for _ in range(pick([1, 2, 10, 70]))]


def swapped_values(document: Document, pick: Pick) -> None:
    """Two values in each other's place: crossed references, loops of spines, lists for numbers."""
    first, second = _some_place(document, pick), _some_place(document, pick)
    if first and second and first[: len(second)] != second and second[: len(first)] != first:
        a, b = _get(document, first), _get(document, second)
        _set(document, first, b)
        _set(document, second, a)


def deep_nesting(document: Document, pick: Pick) -> None:
    """Lists or tables in each other, deeper than any honest file."""
    place = _some_place(document, pick)
    if place:
        value: Any = 1
        for _ in range(pick([5, 13, 60])):
            value = [value] if pick([True, False]) else {"a": value}
        _set(document, place, value)


def cyclic_tree(document: Document, pick: Pick) -> None:
    """Spines that lead back to where they began."""
    names = [_get(document, place) for place in places(document) if place[-1] in ("name", "block")]
    blocks = [name for name in names if isinstance(name, str)] or ["trunk"]
    spine = {"front_at_mm": [0, 0, 0], "rear_at_mm": [0, 0, 0], "bellows": "leg"}
    body = document.get("body")
    if isinstance(body, dict):
        body["spine"] = [
            {"name": f"loop{k}", "front": pick(blocks), "rear": pick(blocks), **spine} for k in range(pick([1, 2, 3]))
        ]


def odd_wiring(document: Document, pick: Pick) -> None:
    """Limits that contradict each other or the robot."""
    inlets = ["a", "b", "c", "l1", "r1", "fl", "none", "leg"]
    document["wiring"] = {
        "inlets_per_output_max": pick([0, 1, 2, 5, 64, 65]),
        "every_output_used": pick([True, False]),
        "allow_open": pick([True, False]),
        "allow_held": pick([True, False]),
        "tied": [[pick(inlets), pick(inlets)] for _ in range(pick([0, 1, 3]))],
        "fixed": {pick(inlets): pick([1, 5, 6, 0, "open", "held", "x", 1.5]) for _ in range(pick([0, 1, 3]))},
    }


def odd_tolerance(document: Document, pick: Pick) -> None:
    """Tolerances of numbers that are not there, or of things that are none."""
    keys = [".".join(map(str, place)) for place in places(document)]
    width = pick([{"percent": 5}, {"plus_minus": 0.1}, {"percent": -5}, {}, {"percent": 5, "plus_minus": 1}])
    document["tolerance"] = [{"key": pick([*keys, *NAMES]), "each": pick(["shared", "stage", "leg"]), **width}]


def other_numbers_of_stages(document: Document, pick: Pick) -> None:
    """Rings of every size, with overrides."""
    ring = document.get("ring")
    if isinstance(ring, dict):
        ring["stages"] = pick([1, 2, 3, 4, 7, 9, 30, 31])
        ring["stage"] = [{"number": pick([0, 1, 2, 5, 31]), "port_mL": pick([0.6, 0, -1])}]


DOCUMENT_WAYS = [
    mild_numbers, mild_numbers, mild_numbers, take_away, wrong_number, scaled_number, wrong_type, wrong_text, renamed_key,
    extra_key, doubled_item, swapped_values, deep_nesting, cyclic_tree, odd_wiring, odd_tolerance, other_numbers_of_stages,
]  # fmt: skip


def lost_line(text: str, pick: Pick) -> str:
    """A line deleted."""
    lines = text.split("\n")
    del lines[pick(range(len(lines)))]
    return "\n".join(lines)


def doubled_line(text: str, pick: Pick) -> str:
    """A key or header twice."""
    lines = text.split("\n")
    at = pick(range(len(lines)))
    return "\n".join([*lines[:at], lines[at], *lines[at:]])


def moved_line(text: str, pick: Pick) -> str:
    """A line in another table."""
    lines = text.split("\n")
    line = lines.pop(pick(range(len(lines))))
    lines.insert(pick(range(len(lines) + 1)), line)
    return "\n".join(lines)


def strange_character(text: str, pick: Pick) -> str:
    """A character that does not belong there."""
    at = pick(range(len(text) + 1))
    return (
        text[:at]
        + pick(['"', "'", '"""', "[", "]", "{", "}", "=", "#", ".", "\\", "\x00", "\x7f", "\ufeff", "٣", "é"])
        + text[at:]
    )


def cut_short(text: str, pick: Pick) -> str:
    """A file whose copy broke off."""
    return text[: pick(range(len(text) + 1))]


def long_line(text: str, pick: Pick) -> str:
    """One endless line, or a key with endless dots."""
    return text + pick(
        ["x = " + "[" * 1990, "x" + ".x" * 900 + " = 1", "y = 1" + "0" * 50_000, "#" * 1_900, "z = 0x" + "f" * 1_900]
    )


TEXT_WAYS = [lost_line, doubled_line, moved_line, strange_character, cut_short, long_line]


def utf8(text: str, pick: Pick) -> bytes:
    """As it should be."""
    return text.encode("utf-8", "surrogatepass")


def other_encoding(text: str, pick: Pick) -> bytes:
    """Saved by an editor of another century."""
    return text.encode(pick(["utf-16", "utf-32", "utf-8-sig", "latin-1", "utf-7"]), "replace")


def windows_lines(text: str, pick: Pick) -> bytes:
    """Carriage returns, alone or with line feeds."""
    return text.replace("\n", pick(["\r\n", "\r"])).encode("utf-8", "replace")


def flipped_byte(text: str, pick: Pick) -> bytes:
    """One byte of the file changed."""
    data = bytearray(text.encode("utf-8", "replace") or b" ")
    data[pick(range(len(data)))] = pick([0, 10, 34, 91, 127, 128, 192, 255])
    return bytes(data)


def too_large(text: str, pick: Pick) -> bytes:
    """More bytes than any honest robot file."""
    return text.encode("utf-8", "replace") + b"# padding\n" * 100_000


def empty(text: str, pick: Pick) -> bytes:
    """Nothing at all, or only blanks."""
    return bytes(pick([b"", b"\n", b"\xef\xbb\xbf", b"   "]))


BYTE_WAYS = [other_encoding, windows_lines, flipped_byte, too_large, empty]
