"""Is this order of wirings the physics' or the numerics'? Finalists walked again at half the step, nudged, in another engine."""

from __future__ import annotations

import importlib.util
import math
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, replace

from gaitlab.gait.records import Walk
from gaitlab.robot.records import Robot
from gaitlab.search.evaluate import Job
from gaitlab.search.objective import Score, score_of, tied
from gaitlab.search.settings import WalkSettings
from gaitlab.search.workers import Workers
from gaitlab.wiring.wiring import Wiring

NUDGES_M = (5e-6, 1e-3)  # the first is below anything a builder could set, the second above; chosen by us
OTHER_ENGINE = {"pybullet": "mujoco", "mujoco": "pybullet"}


@dataclass(frozen=True)
class Recheck:
    """One recheck: whether the finalists' order held, the best one's travel in it, the largest relative change, what is to say.

    `order_kept` is None where fewer than two finalists walked.
    """

    name: str
    order_kept: bool | None
    travel_m: float
    change: float
    note: str


def recheck_settings(robot: Robot, settings: WalkSettings) -> tuple[tuple[str, WalkSettings], ...]:
    """The rechecks by name; the second engine's only where it is installed."""
    step_s = settings.step_s or robot.numerics.step_s
    found = [("half step", replace(settings, step_s=step_s / 2))]
    found += [(f"start nudged by {nudge * 1e3:g} mm", replace(settings, nudge_m=nudge)) for nudge in NUDGES_M]
    other = OTHER_ENGINE[settings.engine]
    if importlib.util.find_spec(other) is not None:
        found.append((f"second engine, {other}", replace(settings, engine=other)))
    return tuple(found)


def rechecks(
    robot: Robot,
    document_json: str,
    finalists: Sequence[tuple[Wiring, Walk]],
    *,
    settings: WalkSettings,
    objective: str,
    workers: Workers,
    tell: Callable[[int], None] = lambda done: None,
) -> tuple[Recheck, ...]:
    """Walks every finalist (best first, with its walk in the search) again in every recheck."""
    variants = recheck_settings(robot, settings)
    walks: dict[str, Walk] = {}
    for job, evaluation in workers.evaluated(_jobs(document_json, finalists, variants)):
        walks[job.key] = evaluation.walk
        tell(1)
    before = [walk for _, walk in finalists]
    return tuple(
        judged(name, before, [walks[f"{v} {k}"] for k in range(len(before))], objective=objective)
        for v, (name, _) in enumerate(variants)
    )


def _jobs(
    document_json: str, finalists: Sequence[tuple[Wiring, Walk]], variants: Sequence[tuple[str, WalkSettings]]
) -> Iterator[Job]:
    for v, (_, settings) in enumerate(variants):
        for k, (wiring, _) in enumerate(finalists):
            yield Job(document_json, wiring, settings, f"{v} {k}")


def judged(name: str, before: Sequence[Walk], after: Sequence[Walk], *, objective: str = "travel") -> Recheck:
    """One recheck read: pairs that were tied before may swap, a finalist that no longer walks breaks the order."""
    old = [score_of(walk, objective) for walk in before]
    new = [score_of(walk, objective) for walk in after]
    failed = [walk.outcome for walk, score in zip(after, new, strict=True) if not math.isfinite(score.value)]
    changes = [_change(a.travel_m, b.travel_m) for a, b in zip(before, after, strict=True)]
    note = f"{len(failed)} of {len(after)} did not walk ({', '.join(sorted(set(failed)))})" if failed else ""
    return Recheck(
        name=name,
        order_kept=None if len(before) < 2 else not failed and _order_kept(old, new),
        travel_m=after[0].travel_m,
        change=max((c for c in changes if math.isfinite(c)), default=math.nan),
        note=note,
    )


def verdict(found: Sequence[Recheck]) -> str:
    """The report's line, for example ``order kept in 4 of 4 rechecks; distance ±18 %``."""
    told = [r for r in found if r.order_kept is not None]
    changes = [r.change for r in found if math.isfinite(r.change)]
    order = (
        f"order kept in {sum(bool(r.order_kept) for r in told)} of {len(told)} rechecks"
        if told
        else "one finalist, no order"
    )
    return (
        f"{order}; distance ±{max(changes):.0%}".replace("%", " %") if changes else f"{order}; no distance to compare"
    )


def _order_kept(old: Sequence[Score], new: Sequence[Score]) -> bool:
    pairs = [(i, j) for i in range(len(old)) for j in range(len(old)) if old[i].value > old[j].value]
    return all(tied(old[i], old[j]) or tied(new[i], new[j]) or new[i].value > new[j].value for i, j in pairs)


def _change(before_m: float, after_m: float) -> float:
    return abs(after_m - before_m) / abs(before_m) if before_m and math.isfinite(before_m) else math.nan
