"""What commands print: JSON or tables on stdout, progress on stderr, files that are never overwritten unasked."""

from __future__ import annotations

import json
import math
import os
import sys
import tempfile
import time
from collections.abc import Callable, Iterable, Iterator, Mapping, Sequence
from contextlib import contextmanager
from pathlib import Path
from typing import Any, NoReturn, TextIO

import click
import numpy as np

from gaitlab.errors import RunFolderError, must

EXIT_FAILED_RUN = 1
QUIET_S = 2.0  # work that ends sooner shows no progress; chosen by us
REFRESH_S = 0.2  # a terminal is redrawn at most this often
LINE_EVERY_S = 10.0  # a log file gets at most one line in this time
BAR_WIDTH = 24


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
    leg     mm
    a     1.25
    bb      10
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


def write_new(path: Path, content: str | bytes, *, force: bool) -> None:
    """Writes a file in one step (all of it or nothing); an existing one only with `force`.

    Raises RunFolderError when the file exists or cannot be written; nothing is left half-written.
    """
    if not force and os.path.lexists(path):
        raise RunFolderError(must("output file", "one that does not exist yet", str(path), "add --force to replace it"))
    data = content.encode("utf-8") if isinstance(content, str) else content
    temporary = ""
    try:
        handle, temporary = tempfile.mkstemp(dir=path.parent, prefix=f".{path.name[:50]}.")
        with os.fdopen(handle, "wb") as file:
            file.write(data)
        os.chmod(temporary, 0o666 & ~_umask())
        os.replace(temporary, path)
    except (OSError, ValueError) as fault:
        if temporary and os.path.exists(temporary):
            os.unlink(temporary)
        reason = (getattr(fault, "strerror", None) or str(fault)).lower()
        raise RunFolderError(must("output file", "writable", str(path), f"{reason}; choose another place")) from None


def _umask() -> int:
    mask = os.umask(0)
    os.umask(mask)
    return mask


class Progress:
    """A bar on stderr with the time left and a note such as the best so far; silent for the first two seconds.

    On a terminal one line is redrawn, in a log a line is added now and then. `clock` gives seconds and is replaced in tests.
    """

    def __init__(
        self, total: int, label: str, *, stream: TextIO | None = None, clock: Callable[[], float] = time.monotonic
    ) -> None:
        self._total, self._label, self._clock = max(1, total), label, clock
        self._stream = sys.stderr if stream is None else stream
        self._start = clock()
        self._shown_s = -math.inf
        self._done = self._skipped = 0
        self._note = ""
        self._drawn = 0

    def advance(self, steps: int = 1, note: str | None = None, *, already_done: bool = False) -> None:
        """Counts `steps` more; `note` replaces the text behind the bar; `already_done` ones do not count for the pace."""
        self._done += steps
        self._skipped += steps if already_done else 0
        self._note = self._note if note is None else note
        self.refresh()

    def refresh(self) -> None:
        """Redraws the bar if it is due."""
        elapsed = self._clock() - self._start
        every = REFRESH_S if self._stream.isatty() else LINE_EVERY_S
        if elapsed >= QUIET_S and elapsed - self._shown_s >= every:
            self._shown_s = elapsed
            self._draw(self.line(elapsed))

    def line(self, elapsed_s: float) -> str:
        """The bar's text after `elapsed_s` seconds."""
        filled = min(BAR_WIDTH, BAR_WIDTH * self._done // self._total)
        bar = "#" * filled + "." * (BAR_WIDTH - filled)
        text = f"{self._label} [{bar}] {self._done}/{self._total}, {self._left(elapsed_s)}"
        return f"{text}; {self._note}" if self._note else text

    def close(self) -> None:
        """Ends the line, if anything was drawn on a terminal."""
        if self._drawn and self._stream.isatty():
            self._draw(self.line(self._clock() - self._start))
            self._stream.write("\n")
        self._stream.flush()

    def _left(self, elapsed_s: float) -> str:
        paced = self._done - self._skipped
        if self._done >= self._total:
            return f"{duration_text(elapsed_s)} in all"
        if paced <= 0:
            return "time left not known yet"
        return f"about {duration_text(elapsed_s / paced * (self._total - self._done))} left"

    def _draw(self, text: str) -> None:
        if self._stream.isatty():
            self._stream.write("\r" + text.ljust(self._drawn))
            self._drawn = len(text)
        else:
            self._stream.write(text + "\n")
        self._stream.flush()


@contextmanager
def progress(total: int, label: str) -> Iterator[Progress]:
    """A `Progress` over `total` steps that ends its line however the work ends."""
    bar = Progress(total, label)
    try:
        yield bar
    finally:
        bar.close()


def duration_text(seconds: float) -> str:
    """A duration as a person says it.

    >>> [duration_text(s) for s in (0.4, 75, 7300)]
    ['1 s', '1 min 15 s', '2 h 2 min']
    """
    whole = max(1, math.ceil(seconds))
    if whole < 60:
        return f"{whole} s"
    if whole < 3600:
        return f"{whole // 60} min {whole % 60} s"
    return f"{whole // 3600} h {whole % 3600 // 60} min"
