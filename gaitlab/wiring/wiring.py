"""A wiring: which ring output (or atmosphere, or supply) each inlet is tubed to."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from gaitlab.errors import InputError, must

OPEN = "open"  # tubed to atmosphere
HELD = "held"  # tubed to the supply
Source = int | str


@dataclass(frozen=True, order=True)
class Wiring:
    """Sources by inlet, in the robot's inlet order: outputs are 1…N, `open` is atmosphere, `held` the supply.

    >>> Wiring.of({"a": 1, "b": 3}).text()
    'a=1 b=3'
    """

    pairs: tuple[tuple[str, Source], ...]

    @classmethod
    def of(cls, sources: Mapping[str, Source]) -> Wiring:
        """The wiring with these sources, in the mapping's order."""
        return cls(tuple(sources.items()))

    def source(self, inlet: str) -> Source:
        """Where `inlet` is tubed to. Raises KeyError for an unknown inlet."""
        return dict(self.pairs)[inlet]

    def as_dict(self) -> dict[str, Source]:
        """Sources by inlet."""
        return dict(self.pairs)

    def text(self) -> str:
        """The form the command line takes."""
        return " ".join(f"{inlet}={source}" for inlet, source in self.pairs)

    def inlets_on(self, source: Source) -> tuple[str, ...]:
        """The inlets tubed to one output (or to `open` or `held`)."""
        return tuple(inlet for inlet, s in self.pairs if s == source)

    def turned(self, steps: int, stages: int) -> Wiring:
        """Every output number moved on by `steps` round a ring of `stages`: for equal stages a shift in time only."""
        return Wiring(tuple((i, (s - 1 + steps) % stages + 1 if isinstance(s, int) else s) for i, s in self.pairs))

    def reversed(self, stages: int) -> Wiring:
        """The same wiring with the wave run the other way in time, for equal stages: output i becomes 2 − i (mod N)."""
        return Wiring(tuple((i, (1 - s) % stages + 1 if isinstance(s, int) else s) for i, s in self.pairs))


def wiring_from_text(text: str, inlets: tuple[str, ...], stages: int) -> Wiring:
    """Read ``"a=1 b=3 c=open"``; every inlet exactly once, outputs 1…`stages`.

    Raises InputError for an unknown, missing or doubled inlet and for a source that is none.
    """
    sources: dict[str, Source] = {}
    for word in text.replace(",", " ").split():
        inlet, separator, value = word.partition("=")
        if not separator:
            raise InputError(must("wiring", "inlet=source pairs such as a=1", word))
        if inlet not in inlets:
            raise InputError(must("wiring inlet", "one of " + ", ".join(inlets), inlet))
        if inlet in sources:
            raise InputError(must(f"wiring of {inlet}", "given once", text))
        sources[inlet] = _source(inlet, value, stages)
    missing = [inlet for inlet in inlets if inlet not in sources]
    if missing:
        raise InputError(
            must("wiring", "complete (missing " + ", ".join(missing) + ")", text, "add e.g. " + missing[0] + "=open")
        )
    return Wiring(tuple((inlet, sources[inlet]) for inlet in inlets))


def _source(inlet: str, value: str, stages: int) -> Source:
    if value in (OPEN, HELD):
        return value
    if value.isascii() and value.isdigit() and 1 <= int(value) <= stages:
        return int(value)
    raise InputError(must(f"source of {inlet}", f"an output 1…{stages}, open or held", value))
