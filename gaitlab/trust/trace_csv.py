"""Pressure traces from the bench: reads the CSV file that a data logger or a person with a spreadsheet writes.

First row: names. ``time_s`` rising; then any of ``stage_1_kPa`` … ``stage_N_kPa`` (at the output port of that stage),
``inlet_NAME_kPa`` (at that bellows) and ``supply_kPa`` (at the manifold). Values are gauge vacuum in kPa, positive below
atmosphere. All columns are read at the same instants; an empty cell is a missing value; lines that begin with # are notes.
"""

from __future__ import annotations

import csv
import math
import re
import stat
from collections.abc import Iterable
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from gaitlab.errors import InputError, must

FloatArray = NDArray[np.float64]

ROWS_LEAST = 20  # fewer samples cannot show two periods; chosen by us
BYTES_MOST = 200_000_000  # as many rows as allowed, with ten columns; chosen by us
ROWS_MOST = 2_000_000  # chosen by us: an hour at 500 samples a second
VACUUM_RANGE_KPA = (-20.0, 101.4)  # a little pressure may show while venting; nothing is emptier than empty
_STAGE = re.compile(r"stage_([1-9][0-9]?)_kPa")
_INLET = re.compile(r"inlet_(.+)_kPa")


@dataclass(frozen=True)
class BenchTraces:
    """Measured gauge vacuum [Pa]: `time_s` (T,) rising; columns (T,) by stage number, by inlet name, and of the supply."""

    time_s: FloatArray
    stages: tuple[tuple[int, FloatArray], ...]
    inlets: tuple[tuple[str, FloatArray], ...]
    supply_Pa: FloatArray | None


def read_traces(path: str | Path, *, stages: int, inlets: tuple[str, ...]) -> BenchTraces:
    """The traces in the CSV file at `path` of a robot with that many ring stages and those inlets.

    Raises InputError naming file, line and column for what cannot be read.
    """
    path = Path(path)
    try:
        _check_file(path)
        with path.open(newline="", encoding="utf-8-sig") as file:
            return _traces(_rows(file), str(path), stages, inlets)
    except InputError:
        raise
    except (OSError, ValueError, csv.Error) as error:
        raise InputError(unreadable("trace file", path, error)) from None


def unreadable(name: str, path: Path, error: Exception) -> str:
    """The message for a CSV file that cannot be read: what is wrong with it, and what to do about that."""
    missing = isinstance(error, FileNotFoundError)
    reason = (getattr(error, "strerror", None) or str(error)).lower()
    fix = "check the name and the folder" if missing else "save it as CSV in UTF-8, where you may read it"
    return f"{name} must be a readable UTF-8 CSV file, got {str(path)!r}: {reason}; usual fix: {fix}"


def _check_file(path: Path) -> None:
    """Refuses what would be read for ever: devices, pipes, and files that are no log of a bench test."""
    facts = path.stat()
    if not stat.S_ISREG(facts.st_mode):
        raise InputError(must("trace file", "a file", str(path), "name the .csv file itself"))
    if facts.st_size > BYTES_MOST:
        raise InputError(must(f"{path}: size", f"at most {BYTES_MOST} bytes", facts.st_size, "thin the samples out"))


_Row = tuple[int, list[str]]


def _rows(lines: Iterable[str]) -> list[_Row]:
    rows: list[_Row] = []
    for number, line in enumerate(lines, start=1):
        if line.strip() and not line.lstrip().startswith("#"):
            rows.append((number, [cell.strip() for cell in next(csv.reader([line]))]))
        if len(rows) > ROWS_MOST:
            raise InputError(must("trace file", f"at most {ROWS_MOST} rows long", "more", "thin the samples out"))
    return rows


def _traces(rows: list[_Row], source: str, stages: int, inlets: tuple[str, ...]) -> BenchTraces:
    if len(rows) < ROWS_LEAST + 1:
        raise InputError(must(f"{source}: rows", f"a header and at least {ROWS_LEAST} samples", len(rows)))
    names = rows[0][1]
    _check_names(names, source, stages, inlets)
    table = np.array([_numbers(row, names, source) for row in rows[1:]])
    columns = dict(zip(names, table.T, strict=True))
    time_s = columns.pop("time_s")
    _check_times(time_s, rows, source)
    _check_values(columns, source)
    return BenchTraces(
        time_s,
        tuple((k, columns[f"stage_{k}_kPa"] * 1e3) for k in range(1, stages + 1) if f"stage_{k}_kPa" in columns),
        tuple((i, columns[f"inlet_{i}_kPa"] * 1e3) for i in inlets if f"inlet_{i}_kPa" in columns),
        columns["supply_kPa"] * 1e3 if "supply_kPa" in columns else None,
    )


def _check_names(names: list[str], source: str, stages: int, inlets: tuple[str, ...]) -> None:
    if "time_s" not in names:
        raise InputError(
            must(f"{source}: columns", "with one named time_s", names, "name the columns in the first row")
        )
    for name in names:
        if names.count(name) > 1:
            raise InputError(must(f"{source}: column {name}", "given once", f"{names.count(name)} times"))
        stage, inlet = _STAGE.fullmatch(name), _INLET.fullmatch(name)
        known = (
            name in ("time_s", "supply_kPa") or (stage and int(stage[1]) <= stages) or (inlet and inlet[1] in inlets)
        )
        if not known:
            rule = f"time_s, supply_kPa, stage_1_kPa … stage_{stages}_kPa or inlet_NAME_kPa of {', '.join(inlets)}"
            raise InputError(must(f"{source}: column", rule, name))
    if not any(_STAGE.fullmatch(name) for name in names):
        raise InputError(must(f"{source}: columns", "with at least one stage_K_kPa", names))


def _numbers(row: _Row, names: list[str], source: str) -> list[float]:
    line, cells = row
    if len(cells) != len(names):
        raise InputError(must(f"{source}, line {line}: cells", f"{len(names)} as in the first row", len(cells)))
    return [_cell(cell, f"{source}, line {line}: {name}") for cell, name in zip(cells, names, strict=True)]


def _cell(cell: str, where: str) -> float:
    if not cell:
        return math.nan
    try:
        value = float(cell)
    except ValueError:
        raise InputError(must(where, "a number with a decimal point, or empty", cell)) from None
    if math.isinf(value):
        raise InputError(must(where, "finite", cell))
    return value


def _check_times(time_s: FloatArray, rows: list[_Row], source: str) -> None:
    if np.isnan(time_s).any():
        line = rows[1 + int(np.isnan(time_s).argmax())][0]
        raise InputError(must(f"{source}, line {line}: time_s", "given in every row", "nothing"))
    steps = np.diff(time_s)
    if (steps <= 0).any():
        at = int((steps <= 0).argmax()) + 1
        raise InputError(
            must(f"{source}, line {rows[1 + at][0]}: time_s", "later than in the row before", float(time_s[at]))
        )


def _check_values(columns: dict[str, FloatArray], source: str) -> None:
    low, high = VACUUM_RANGE_KPA
    for name, values in columns.items():
        good = values[np.isfinite(values)]
        if len(good) < 0.8 * len(values):
            raise InputError(
                must(
                    f"{source}: column {name}", "filled in at least four rows of five", f"{len(good)} of {len(values)}"
                )
            )
        bad = good[(good < low) | (good > high)]
        if len(bad):
            fix = "gauge vacuum is positive below atmosphere: turn the sign, or subtract absolute from ambient"
            raise InputError(must(f"{source}: column {name}", f"from {low:g} to {high:g} kPa", float(bad[0]), fix))
