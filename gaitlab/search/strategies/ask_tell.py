"""What a strategy is: it asks for walks and is told their readings; evaluating is somebody else's business."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Protocol

from gaitlab.wiring.wiring import Wiring


@dataclass(frozen=True)
class Ask:
    """A wanted walk: a wiring (the representative of its equals) and its length, None until the travel has settled.

    `coarse` asks for the coarse body's walk instead of an engine's (its length is fixed).
    """

    wiring: Wiring
    periods: int | None = None
    coarse: bool = False

    @property
    def settled(self) -> bool:
        """Whether it is the walk that a ranking goes by."""
        return self.periods is None and not self.coarse


@dataclass(frozen=True)
class Reading:
    """What came of an ask: score and scatter [SI of the objective], nan for a walk that failed by the name `outcome`."""

    ask: Ask
    score: float
    scatter: float
    outcome: str

    @property
    def failed(self) -> bool:
        """Whether there is no score."""
        return not math.isfinite(self.score)


class Strategy(Protocol):
    """A search in batches: what is asked for depends only on what was told before, never on who was faster."""

    listens: bool  # False: `tell` is not needed, so that nobody reads rows back for it

    def expected(self) -> int:
        """About how many walks it will ask for in all."""

    def ask(self) -> Sequence[Ask]:
        """The next walks wanted; empty when the strategy is done."""

    def tell(self, readings: Sequence[Reading]) -> None:
        """The readings of the last ask, in its order."""
