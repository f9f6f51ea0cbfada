"""The spread over the build tolerances: every draw solves the ring and walks the body anew, for every wiring alike.

All wirings see the same draws (common random numbers), so that their differences are the wirings' own. A draw whose ring does
not start or whose body falls is a counted outcome. Finished draws leave a few numbers behind, their documents nothing.
"""

from __future__ import annotations

import json
import math
from collections.abc import Callable, Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from gaitlab.errors import InputError, must
from gaitlab.gait.outcomes import REMEDIES
from gaitlab.gait.records import Walk
from gaitlab.search.evaluate import BROKE_DOWN, REFUSED, WORKER_LOST, Job
from gaitlab.search.objective import score_of
from gaitlab.search.settings import WalkSettings
from gaitlab.search.workers import Workers
from gaitlab.trust.draws import checked_draws, draws, sobol_points
from gaitlab.trust.sensitivity import Sensitivity, sensitivities
from gaitlab.trust.speed import SpeedEstimate, estimate_from_draws
from gaitlab.trust.summary import Outcome, WiringSummary, summaries
from gaitlab.trust.tolerances import Tolerances
from gaitlab.wiring.wiring import Wiring

FloatArray = NDArray[np.float64]


@dataclass(frozen=True)
class Request:
    """What to draw: the tolerances, which wirings, how many draws of which seed, how to walk, and what counts as better."""

    tolerances: Tolerances
    wirings: tuple[Wiring, ...]
    draws: int
    seed: int
    settings: WalkSettings = WalkSettings()
    objective: str = "travel"


@dataclass(frozen=True)
class WiringSpread:
    """One wiring over all draws. `speed` is None where no draw walked."""

    wiring: Wiring
    summary: WiringSummary
    sensitivities: tuple[Sensitivity, ...]
    speed: SpeedEstimate | None


@dataclass(frozen=True)
class Spread:
    """All wirings over the draws that ended, in the order asked for; `scores` (draws, wirings), nan where nothing walked.

    `lost` draws are left out of everything: a worker died on one of their walks, which says nothing of the wiring.
    """

    draws: int
    seed: int
    wirings: tuple[WiringSpread, ...]
    scores: FloatArray
    simulated_s: float
    finished: bool
    lost: int = 0

    def best_first(self) -> tuple[WiringSpread, ...]:
        """The wirings by median travel, the best first; one that never walked last."""
        return tuple(sorted(self.wirings, key=lambda w: _falling(w.summary.travel_m.p50)))

    def sensitivities(self) -> tuple[Sensitivity, ...]:
        """Those of the wiring with the best median."""
        return self.best_first()[0].sensitivities


def spread(request: Request, workers: Workers, *, tell: Callable[[int], None] = lambda done: None) -> Spread:
    """Walks every draw with every wiring; `tell` is called with 1 for each walk that ends.

    Ctrl-C ends it with the draws that are complete (`finished` is False). Raises InputError for wirings that are missing or
    given twice, a number of draws or a seed that is none, and, before any run, for a draw that gives no robot; after it
    where no draw is left.
    """
    _check(request)
    collected = _Collected(request)
    finished = True
    try:
        for job, evaluation in workers.evaluated(_jobs(request)):
            collected.add(job, evaluation.walk)
            tell(1)
    except KeyboardInterrupt:
        finished = False
    if not collected.complete() and collected.lost():
        fix = "close other programs or use fewer --workers"
        raise InputError(must("spread", "left with at least one draw", "each one's worker was lost", fix))
    if not collected.complete():
        raise InputError(must("spread", "given time for at least one draw", "interrupted before the first ended"))
    return collected.spread(finished=finished)


def outcome_of(walk: Walk, objective: str = "travel") -> Outcome:
    """What one walk counts as."""
    started = walk.outcome in (*REMEDIES, REFUSED, BROKE_DOWN)
    if not math.isfinite(walk.travel_m):
        return Outcome(walk.outcome, started, math.nan, math.nan, math.nan)
    return Outcome(walk.outcome, started, walk.travel_m, walk.speed_m_s, score_of(walk, objective).value)


def _check(request: Request) -> None:
    texts = [w.text() for w in request.wirings]
    if not texts:
        raise InputError(must("wirings", "at least one", "none", '--wiring "a=1 b=3 …"'))
    double = next((t for t in texts if texts.count(t) > 1), None)
    if double is not None:
        raise InputError(must("wiring", "given once", double, "leave out the second"))
    for _ in checked_draws(request.tolerances, request.draws, seed=request.seed):
        pass


def _jobs(request: Request) -> Iterator[Job]:
    for draw in draws(request.tolerances, request.draws, seed=request.seed):
        document_json = json.dumps(draw.document)
        for place, wiring in enumerate(request.wirings):
            yield Job(document_json, wiring, request.settings, f"{draw.number} {place}")


class _Collected:
    """Outcomes by draw and wiring as they come in, in whatever order."""

    def __init__(self, request: Request) -> None:
        self._request = request
        self._rows: dict[int, dict[int, Outcome]] = {}
        self._body_length_m = math.nan
        self._simulated_s = 0.0

    def add(self, job: Job, walk: Walk) -> None:
        """Keep the few numbers that count of one walk."""
        draw, place = (int(word) for word in job.key.split())
        self._rows.setdefault(draw, {})[place] = outcome_of(walk, self._request.objective)
        self._simulated_s += walk.simulated_s
        if math.isfinite(walk.body_length_m):
            self._body_length_m = walk.body_length_m

    def complete(self) -> list[int]:
        """Draws of which every wiring has ended, without those that lost a worker."""
        return sorted(n for n, row in self._rows.items() if len(row) == len(self._request.wirings) and not _lost(row))

    def lost(self) -> int:
        """How many draws lost a worker."""
        return sum(_lost(row) for row in self._rows.values())

    def spread(self, *, finished: bool) -> Spread:
        """The statistics of the complete draws."""
        request, complete = self._request, self.complete()
        table = [[self._rows[n][k] for k in range(len(request.wirings))] for n in complete]
        dimensions = len(request.tolerances.coordinates)
        points = np.array(list(sobol_points(complete[-1] + 1, dimensions, seed=request.seed)))[complete]
        scores = np.array([[o.score for o in row] for row in table])
        found = tuple(
            WiringSpread(
                wiring=wiring,
                summary=summary,
                sensitivities=sensitivities(points, column, request.tolerances.keys(), seed=request.seed),
                speed=self._speed(summary),
            )
            for wiring, summary, column in zip(request.wirings, summaries(table), scores.T, strict=True)
        )
        return Spread(len(complete), request.seed, found, scores, self._simulated_s, finished, self.lost())

    def _speed(self, summary: WiringSummary) -> SpeedEstimate | None:
        if not math.isfinite(summary.travel_m.p50):
            return None
        return estimate_from_draws(summary.travel_m, summary.speed_m_s, self._body_length_m)


def _lost(row: dict[int, Outcome]) -> bool:
    return any(outcome.outcome == WORKER_LOST for outcome in row.values())


def _falling(value: float) -> float:
    return -value if math.isfinite(value) else math.inf
