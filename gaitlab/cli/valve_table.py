"""Two columns of numbers from a CSV file, named in its first row."""

from __future__ import annotations

import csv
import math
from pathlib import Path

from gaitlab.errors import InputError, must
from gaitlab.trust.trace_csv import unreadable

ROWS_MOST = 10_000  # chosen by us: a valve curve has a few dozen points


def read_columns(path: Path, names: tuple[str, str]) -> tuple[list[float], list[float]]:
    """The two columns `names` of a CSV file; lines that begin with # are notes.

    Raises InputError naming file and line for a missing column, a cell that is no finite number, or an unreadable file.
    """
    try:
        with path.open(newline="", encoding="utf-8-sig") as file:
            lines = [(k, line) for k, line in enumerate(file, start=1) if line.strip() and not line.startswith("#")]
        rows = [
            (number, [cell.strip() for cell in next(csv.reader([line]))]) for number, line in lines[: ROWS_MOST + 1]
        ]
    except (OSError, UnicodeDecodeError, csv.Error) as fault:
        raise InputError(unreadable("table file", path, fault)) from None
    header = rows[0][1] if rows else []
    missing = [name for name in names if name not in header]
    if missing:
        shown = ",".join(header)[:60]
        raise InputError(must(f"{path}: first row", f"with columns {' and '.join(names)}", shown, "name the columns"))
    places = [header.index(name) for name in names]
    pairs = [[_number(row, place, path, number) for place in places] for number, row in rows[1:]]
    return [pair[0] for pair in pairs], [pair[1] for pair in pairs]


def _number(row: list[str], place: int, path: Path, line: int) -> float:
    text = row[place] if place < len(row) else ""
    try:
        value = float(text)
    except ValueError:
        value = math.nan
    if not math.isfinite(value):
        raise InputError(must(f"{path}, line {line}", "finite numbers with a decimal point", text, "delete the row"))
    return value
