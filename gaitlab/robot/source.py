"""From the bytes on disk to a plain TOML document, with the limits that keep a hostile file from costing time or memory."""

from __future__ import annotations

import re
import stat
import tomllib
from pathlib import Path
from typing import Any

from gaitlab.errors import RobotFileError, must
from gaitlab.robot.faults import printable

# Limits chosen by us: the largest honest robot file is a few dozen kB. The line limit bounds how many dots one key may
# have (the TOML parser copies a dotted key once per dot), the depth limit how far a table may nest.
SIZE_MAX = 1_000_000
LINE_MAX = 2_000
DEPTH_MAX = 12

Document = dict[str, Any]


def document_from_file(path: Path) -> tuple[str, Document]:
    """The text of the file and the TOML document in it.

    Raises RobotFileError when the file cannot be read, is too large, is not UTF-8 or is not TOML.
    """
    text = _decoded(_bytes(path), str(path))
    return text, document_from_text(text, source=str(path))


def document_from_text(text: str, *, source: str) -> Document:
    """The TOML document in `text`; `source` names it in messages."""
    for number, line in enumerate(text.split("\n"), start=1):
        if len(line) > LINE_MAX:
            raise RobotFileError(
                f"{source}, line {number}: "
                + must("line", f"at most {LINE_MAX} characters", len(line), "break the array over several lines")
            )
    try:
        document = tomllib.loads(text)
    except RecursionError:
        raise RobotFileError(_too_deep(source)) from None
    except ValueError as fault:  # TOMLDecodeError, and numbers too long for Python to read
        raise RobotFileError(_not_toml(source, str(fault))) from None
    if _depth_exceeds(document, DEPTH_MAX):
        raise RobotFileError(_too_deep(source))
    return document


def _bytes(path: Path) -> bytes:
    try:
        kind = path.stat().st_mode
        if not stat.S_ISREG(kind):
            what = "a folder" if stat.S_ISDIR(kind) else "a device or pipe"
            raise RobotFileError(must(str(path), "a robot file (TOML)", what, "name the .toml file itself"))
        with path.open("rb") as file:
            data = file.read(SIZE_MAX + 1)
    except (OSError, ValueError) as fault:
        if isinstance(fault, RobotFileError):
            raise
        reason = getattr(fault, "strerror", None) or str(fault)
        raise RobotFileError(
            must(
                "robot file",
                "one that can be read",
                str(path),
                f"{reason.lower()}; check the path, or write one with `gaitlab new`",
            )
        ) from None
    if len(data) > SIZE_MAX:
        raise RobotFileError(
            f"{path}: "
            + must("file", f"at most {SIZE_MAX} bytes", path.stat().st_size, "name the robot file, not a recording")
        )
    return data


def _decoded(data: bytes, source: str) -> str:
    try:
        return data.decode("utf-8-sig").replace("\r\n", "\n")
    except UnicodeDecodeError as fault:
        line = data.count(b"\n", 0, fault.start) + 1
        byte = f"byte 0x{data[fault.start]:02x}"
        raise RobotFileError(
            f"{source}, line {line}: " + must("text", "UTF-8", byte, "save the file as UTF-8 in your editor")
        ) from None


def _depth_exceeds(document: Document, limit: int) -> bool:
    level: list[Any] = [document]
    for _ in range(limit):
        level = [
            child
            for node in level
            if isinstance(node, dict | list)
            for child in (node.values() if isinstance(node, dict) else node)
        ]
        if not level:
            return False
    return any(isinstance(node, dict | list) for node in level)


def _too_deep(source: str) -> str:
    return f"{source}: " + must(
        "nesting", f"at most {DEPTH_MAX} levels", "more", "compare with the file `gaitlab new` writes"
    )


def _not_toml(source: str, reason: str) -> str:
    found = re.search(r"\(at line (\d+), column (\d+)\)", reason)
    where = f"{source}, line {found[1]}, column {found[2]}" if found else source
    shown = printable(re.sub(r"\s*\(at [^)]*\)$", "", reason)[:200])
    return f"{where}: must be TOML, got: {shown}; usual fix: key = value, texts in quotes, one key once per table"
