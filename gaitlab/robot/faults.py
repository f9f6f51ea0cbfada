"""A fault of a robot file as a value that knows its place: file, table, key and line are put into words here."""

from __future__ import annotations

from dataclasses import dataclass

from gaitlab.errors import RobotFileError

Place = tuple[str | int, ...]  # keys and array positions (from 0) down to the value, e.g. ("body", "leg", 2, "at_mm")

SHOWN_LENGTH = 80  # characters of a wrong value that a message quotes; chosen by us


@dataclass(frozen=True)
class Fault:
    """What is wrong at `place`: `rule` completes "<key> must …", `got` is the value as quoted, `fix` how it is usually put right."""

    place: Place
    rule: str
    got: str = ""
    fix: str = ""

    def text(self, source: str, line: int | None = None) -> str:
        """The one message a user sees.

        >>> Fault(("ring", "stages"), "be at least 1", "0").text("crawler.toml", 7)
        'crawler.toml, line 7, table [ring]: stages must be at least 1, got 0'
        """
        tables, key = split(self.place)
        head = source if line is None else f"{source}, line {line}"
        if tables:
            head += f", table {table_name(tables)}"
        text = f"{head}: {key} must {self.rule}"
        text += f", got {self.got}" if self.got else ""
        return printable(f"{text}; usual fix: {self.fix}" if self.fix else text)


class FaultError(RobotFileError):
    """Carries a `Fault` from the check that found it to the reader, which knows the file's name and lines."""

    def __init__(self, fault: Fault, source: str = "robot", line: int | None = None) -> None:
        super().__init__(fault.text(source, line))
        self.fault = fault


def fail(place: Place, rule: str, got: object = None, fix: str = "") -> FaultError:
    """The error to raise for a value at `place` that breaks `rule`; `got` is left out of the text when None."""
    return FaultError(Fault(place, rule, "" if got is None else quoted(got), fix))


def quoted(value: object) -> str:
    """A wrong value as a message shows it: short, on one line, control characters escaped."""
    if isinstance(value, dict):
        return "a table"
    if isinstance(value, list) and any(isinstance(item, dict) for item in value):
        return "an array of tables"
    text = str(value).lower() if isinstance(value, bool) else repr(value)
    return text if len(text) <= SHOWN_LENGTH else text[: SHOWN_LENGTH - 3] + "..."


def printable(text: str) -> str:
    r"""The text with everything a terminal would obey or hide (control and direction characters) escaped.

    >>> printable("a\tb")
    'a\\tb'
    """
    return "".join(c if c.isprintable() else ascii(c)[1:-1] for c in text)


def split(place: Place) -> tuple[Place, str]:
    """The table of a place and the name of what is wrong in it, array positions counted as a person counts.

    >>> split(("body", "block", 0, "size_mm", 1))
    (('body', 'block', 0), 'size_mm item 2')
    """
    end = len(place)
    while end and isinstance(place[end - 1], int):
        end -= 1
    items = ", ".join(str(part + 1) for part in place[end:] if isinstance(part, int))
    key = str(place[end - 1]) if end else "file"
    return place[: max(0, end - 1)], f"{key} item {items}" if items else key


def table_name(place: Place) -> str:
    """A table as it is written in the file, the item of an array of tables counted from 1.

    >>> table_name(("body", "leg", 2))
    '[body.leg] number 3'
    """
    shown = "[" + ".".join(str(part) for part in place if isinstance(part, str)) + "]"
    positions = [part for part in place if isinstance(part, int)]
    return shown + (" number " + ", ".join(str(p + 1) for p in positions) if positions else "")
