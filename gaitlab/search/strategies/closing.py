"""What every search owes its ranking: the smooth waves, and the reversed waves of its best, walked until they settle."""

from __future__ import annotations

from collections.abc import Sequence

from gaitlab.search.strategies.ask_tell import Ask, Reading, Strategy
from gaitlab.wiring.space import WiringSpace
from gaitlab.wiring.wiring import Wiring

BEST = 5  # best wirings whose reversed waves are walked; chosen by us


class Closing:
    """Lets `inner` search; then asks for settled walks of `owed` and of the reversed waves of the best, where they are missing."""

    listens = True

    def __init__(self, inner: Strategy, space: WiringSpace, owed: Sequence[Wiring]) -> None:
        self._inner, self._space, self._owed = inner, space, list(owed)
        self._settled: dict[Wiring, Reading] = {}
        self._asked: set[Wiring] = set()
        self._stage = 0

    def expected(self) -> int:
        """The inner strategy's walks and those that are owed."""
        return self._inner.expected() + len(self._owed) + BEST

    def ask(self) -> Sequence[Ask]:
        """The inner strategy's asks, then the smooth waves, then the reversed waves of what is best then."""
        asks = list(self._inner.ask()) if self._stage == 0 else []
        while not asks and self._stage < 2:
            self._stage += 1
            asks = self._missing(self._owed if self._stage == 1 else self._reversed())
        self._asked.update(ask.wiring for ask in asks if ask.settled)
        return asks

    def tell(self, readings: Sequence[Reading]) -> None:
        """Passes on what the inner strategy asked for and keeps the settled readings."""
        if self._stage == 0:
            self._inner.tell(readings)
        self._settled.update((r.ask.wiring, r) for r in readings if r.ask.settled and not r.failed)

    def _missing(self, wirings: Sequence[Wiring]) -> list[Ask]:
        return [Ask(wiring) for wiring in dict.fromkeys(wirings) if wiring not in self._asked]

    def _reversed(self) -> list[Wiring]:
        best = sorted(self._settled.values(), key=lambda r: (-r.score, r.ask.wiring.text()))[:BEST]
        backwards = (self._space.reversed(reading.ask.wiring) for reading in best)
        return [wiring for wiring in backwards if wiring is not None]
