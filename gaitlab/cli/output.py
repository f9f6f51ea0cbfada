"""What commands print on stdout: one JSON object, or tables for people."""

from __future__ import annotations

import json
import math
from collections.abc import Iterable, Mapping, Sequence
from typing import Any, NoReturn

import click
import numpy as np

from gaitlab.cli.files import write_new as write_new
from gaitlab.cli.progress import Progress as Progress
from gaitlab.cli.progress import progress as progress

EXIT_FAILED_RUN = 1


def json_text(value: Any) -> str:
    """JSON as --json prints it: NaN and infinities become null, −0 becomes 0, arrays become lists.

    >>> json_text({"a": float("nan"), "b": -0.0})
    '{\\n  "a": null,\\n  "b": 0.0\\n}'
    """
    return json.dumps(plain(value), indent=2, allow_nan=False)


def print_json(value: Any) -> None:
    """Prints one JSON object on stdout."""
    click.echo(json_text(value))


def plain(value: Any) -> Any:
    """`value` in the types JSON knows; numpy scalars and arrays, tuples, paths and mappings are taken apart."""
    if isinstance(value, Mapping):
        return {str(key): plain(item) for key, item in value.items()}
    if isinstance(value, np.ndarray):
        return plain(value.tolist())
    if isinstance(value, list | tuple):
        return [plain(item) for item in value]
    if isinstance(value, bool | np.bool_):
        return bool(value)
    if isinstance(value, int | np.integer):
        return int(value)
    if isinstance(value, float | np.floating):
        return float(value) + 0.0 if math.isfinite(value) else None
    return value if value is None or isinstance(value, str) else str(value)


def print_failure(outcome: str, remedy: str, *, as_json: bool, **more: Any) -> NoReturn:
    """Prints a failed run (with --json ``{"outcome": …, "remedy": …, …}``) and ends the command with exit code 1."""
    if as_json:
        print_json({"outcome": outcome, "remedy": remedy, **more})
    else:
        click.echo(f"outcome: {outcome}")
        click.echo(f"remedy: {remedy}")
    raise click.exceptions.Exit(EXIT_FAILED_RUN)


def print_facts(facts: Iterable[tuple[str, object]]) -> None:
    """Prints pairs of a label and a value, the values in one column."""
    rows = [(label, cell(value)) for label, value in facts]
    width = max((len(label) for label, _ in rows), default=0)
    for label, value in rows:
        click.echo(f"{label:<{width}}  {value}")


def print_table(headers: Sequence[str], rows: Iterable[Sequence[object]]) -> None:
    """Prints a table on stdout, numbers to the right, texts to the left."""
    click.echo(table_text(headers, rows))


def table_text(headers: Sequence[str], rows: Iterable[Sequence[object]]) -> str:
    """The table that `print_table` prints.

    >>> print(table_text(["leg", "mm"], [["a", 1.25], ["bb", 10.0]]))
    leg    mm
    a    1.25
    bb     10
    """
    given = [list(row) for row in rows]
    cells = [[cell(value) for value in row] for row in given]
    widths = [max(len(text) for text in column) for column in zip(headers, *cells, strict=True)]
    right = [all(_is_number(row[i]) for row in given) and bool(given) for i in range(len(headers))]
    lines = [headers, *cells]
    return "\n".join(
        "  ".join(t.rjust(w) if r else t.ljust(w) for t, w, r in zip(line, widths, right, strict=True)).rstrip()
        for line in lines
    )


def cell(value: object) -> str:
    """One value as a table shows it: four significant digits, a dash for what is not known.

    >>> [cell(v) for v in (1234.567, -0.0, float("nan"), None, "a", True)]
    ['1235', '0', '–', '–', 'a', 'yes']
    """
    if value is None:
        return "–"
    if isinstance(value, bool | np.bool_):
        return "yes" if value else "no"
    if isinstance(value, float | np.floating):
        return _number_cell(float(value))
    return str(value)


def _number_cell(value: float) -> str:
    if not math.isfinite(value):
        return "–"
    if value != 0.0 and not 1e-4 <= abs(value) < 1e6:
        return f"{value:.3e}"
    digits = 3 if value == 0.0 else max(0, 3 - math.floor(math.log10(abs(value))))
    text = f"{value + 0.0:.{digits}f}"
    text = text.rstrip("0").rstrip(".") if "." in text else text
    return "0" if text in ("-0", "") else text


def _is_number(value: object) -> bool:
    return value is None or (isinstance(value, int | float | np.number) and not isinstance(value, bool))


def warn(text: str) -> None:
    """Prints one warning on stderr."""
    click.echo(f"warning: {text}", err=True)
