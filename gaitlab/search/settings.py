"""How a candidate is walked: engine and numerics, and how long."""

from __future__ import annotations

import json
from dataclasses import asdict, dataclass, replace
from functools import cached_property

SETTLED = "settled"
# Of a screening walk: `tests/benchmarks/search_cost.py screening` prints how well each of the first periods ranks; chosen by us.
SHORT_PERIODS = 2


@dataclass(frozen=True)
class WalkSettings:
    """Engine and numerics of a walk; None means as the robot file says. `periods` None walks until the travel has settled.

    `nudge_m` moves the start by that much, for rechecks. The fields are keyword arguments of `gaitlab.gait.walk.walk`.
    """

    engine: str = "pybullet"
    step_s: float | None = None
    inertia_factor: float | None = None
    periods: int | None = None
    nudge_m: float = 0.0

    @property
    def level(self) -> str:
        """How far the walk goes, in words: ``settled`` or ``2 periods``.

        >>> WalkSettings(periods=2).level
        '2 periods'
        """
        return SETTLED if self.periods is None else f"{self.periods} periods"

    @cached_property
    def text(self) -> str:
        """Everything but the length, as JSON: walks are ranked among those of one such text."""
        return json.dumps(asdict(replace(self, periods=None)), sort_keys=True)

    def lasting(self, periods: int | None) -> WalkSettings:
        """The same walk with another length."""
        return replace(self, periods=periods)
