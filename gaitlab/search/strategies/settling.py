"""Settled walks for the wirings that short walks leave standing: down the list until none of the rest can be the best.

A short walk's reading differs from the settled one by an error whose size is measured on the wirings walked both ways. A wiring is
out when even its short reading plus `CONFIDENCE` such errors stays below the best settled reading.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from gaitlab.search.strategies.ask_tell import Ask, Reading
from gaitlab.wiring.wiring import Wiring

FIRST = 4  # settled walks before the error of short ones is trusted; chosen by us
AT_A_TIME = 4  # fixed, so that the number of workers changes nothing; chosen by us
CONFIDENCE = 2.33  # standard errors: 1 in 100 if they are normal


class Settling:
    """Asks for settled walks of the wirings that have the best short readings, at most `most` of them."""

    def __init__(self, most: int) -> None:
        self._most = most
        self._short: dict[Wiring, float] = {}
        self._settled: dict[Wiring, float] = {}
        self._failed: set[Wiring] = set()

    def tell(self, readings: Sequence[Reading]) -> None:
        """Takes in readings of either length."""
        for reading in readings:
            known = self._settled if reading.ask.settled else self._short
            if not reading.failed:
                known[reading.ask.wiring] = reading.score
            elif reading.ask.settled:
                self._failed.add(reading.ask.wiring)

    def ask(self) -> list[Ask]:
        """The next settled walks; empty when the rest cannot win or `most` is spent."""
        room = self._most - len(self._settled) - len(self._failed)
        standing = [wiring for wiring in self.ranked() if not self._done(wiring) and self._may_win(wiring)]
        return [Ask(wiring) for wiring in standing[: max(0, min(room, AT_A_TIME))]]

    def ranked(self) -> list[Wiring]:
        """The wirings by short reading, best first."""
        return sorted(self._short, key=lambda wiring: (-self._short[wiring], wiring.text()))

    def error(self) -> float:
        """Standard error of a short reading, from the wirings walked both ways; infinite while too few are."""
        both = [(self._short[w], s) for w, s in self._settled.items() if w in self._short]
        if len(both) < FIRST:
            return float("inf")
        return float(np.sqrt(np.mean([(short - settled) ** 2 for short, settled in both])))

    def _done(self, wiring: Wiring) -> bool:
        return wiring in self._settled or wiring in self._failed

    def _may_win(self, wiring: Wiring) -> bool:
        if not self._settled:
            return True
        return self._short[wiring] + CONFIDENCE * self.error() >= max(self._settled.values())
