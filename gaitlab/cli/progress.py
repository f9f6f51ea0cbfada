"""Progress of long work on stderr: a bar, the time left, and what is best so far."""

from __future__ import annotations

import math
import sys
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from typing import TextIO

QUIET_S = 2.0  # work that ends sooner shows no progress; chosen by us
REFRESH_S = 0.2  # a terminal is redrawn at most this often
LINE_EVERY_S = 10.0  # a log file gets at most one line in this time
BAR_WIDTH = 24


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
        """Counts `steps` more; `note` replaces the text behind the bar; `already_done` ones do not count for the pace.

        No steps before the first say that the work begins now, where the bar was made long before.
        """
        if steps == 0 and self._done == 0:
            self._start = self._clock()
        self._done += steps
        self._skipped += steps if already_done else 0
        self._note = self._note if note is None else note
        self.refresh()

    def note(self, text: str) -> None:
        """Replaces the text behind the bar without a step."""
        self._note = text
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
    ['1 s', '1 min 15 s', '2 h 1 min']
    """
    whole = max(1, math.ceil(seconds))
    if whole < 60:
        return f"{whole} s"
    if whole < 3600:
        return f"{whole // 60} min {whole % 60} s"
    return f"{whole // 3600} h {whole % 3600 // 60} min"
