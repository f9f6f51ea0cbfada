"""How a candidate is walked: engine and numerics, and how long."""

from __future__ import annotations

import json
from dataclasses import asdict, dataclass, replace
from functools import cached_property
from typing import Any

SETTLED = "settled"
COARSE = "coarse"
# Of a screening walk: `tests/benchmarks/search_cost.py screening` prints how well each of the first periods ranks; chosen by us.
SHORT_PERIODS = 2
# Coarse walks in one go: fewer cost more each, more keep a core waiting at the end; chosen by us.
BUNDLE = 48


@dataclass(frozen=True)
class WalkSettings:
    """Engine and numerics of a walk; None means as the robot file says. `periods` None walks until the travel has settled.

    `nudge_m` moves the start by that much, for rechecks. `coarse`: no walk in an engine but one of `gaitlab.gait.coarse_walk`.
    """

    engine: str = "pybullet"
    step_s: float | None = None
    inertia_factor: float | None = None
    periods: int | None = None
    nudge_m: float = 0.0
    coarse: bool = False

    @property
    def level(self) -> str:
        """How far the walk goes, in words: ``settled``, ``2 periods`` or ``coarse``.

        >>> WalkSettings(periods=2).level
        '2 periods'
        """
        if self.coarse:
            return COARSE
        return SETTLED if self.periods is None else f"{self.periods} periods"

    @cached_property
    def text(self) -> str:
        """Everything but the length and coarseness, as JSON: walks are ranked among those of one such text."""
        return json.dumps(replace(self, periods=None).arguments(), sort_keys=True)

    def arguments(self) -> dict[str, Any]:
        """The keyword arguments of `gaitlab.gait.walk.walk`."""
        return {name: value for name, value in asdict(self).items() if name != "coarse"}

    def lasting(self, periods: int | None, *, coarse: bool = False) -> WalkSettings:
        """The same walk with another length, or coarse."""
        return replace(self, periods=periods, coarse=coarse)
