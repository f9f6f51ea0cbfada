"""Is this order of wirings the physics' or the numerics'? Finalists walked again with other numerics and in another engine."""

from __future__ import annotations

import importlib.util
import math
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, replace

from gaitlab.gait.records import Walk
from gaitlab.robot.records import Robot
from gaitlab.search.evaluate import REFUSED, WORKER_LOST, Job
from gaitlab.search.objective import Score, score_of, tied
from gaitlab.search.settings import WalkSettings
from gaitlab.search.workers import Workers
from gaitlab.wiring.wiring import Wiring

NUDGE_M = 1e-3  # more than a builder would be off by; shows a gait that hangs on where it started; chosen by us
INERTIA_LEAST = 1.0  # no segment is lighter than it is
ALL_TIED = "all tied"
NOT_MADE = (REFUSED, WORKER_LOST)  # outcomes of walks that were not walked: they tell nothing of an order
OTHER_ENGINE = {"pybullet": "mujoco", "mujoco": "pybullet"}


@dataclass(frozen=True)
class Recheck:
    """One recheck: whether the finalists' order held, the best one's travel in it, the largest relative change, what is to say.

    `order_kept` is None where there is no order to keep: fewer than two finalists, all of them tied before (the note says
    ALL_TIED), or a walk that could not be made.
    """

    name: str
    order_kept: bool | None
    travel_m: float
    change: float
    note: str


def recheck_settings(robot: Robot, settings: WalkSettings) -> tuple[tuple[str, WalkSettings], ...]:
    """The rechecks by name; half the inertia factor only where there is one, the second engine only where it is installed."""
    step_s = settings.step_s or robot.numerics.step_s
    inertia = settings.inertia_factor or robot.numerics.inertia_factor
    found = [("half step", replace(settings, step_s=step_s / 2))]
    if inertia > INERTIA_LEAST:
        found.append(("half inertia factor", replace(settings, inertia_factor=max(inertia / 2, INERTIA_LEAST))))
    found.append((f"start moved by {NUDGE_M * 1e3:g} mm", replace(settings, nudge_m=NUDGE_M)))
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
    failed = sorted(w.outcome for w, score in zip(after, new, strict=True) if not math.isfinite(score.value))
    clear = _clear_pairs(old)
    changes = [_change(a.travel_m, b.travel_m) for a, b in zip(before, after, strict=True)]
    notes = [f"{len(failed)} of {len(after)} did not walk ({', '.join(sorted(set(failed)))})"] if failed else []
    notes += [ALL_TIED] if len(before) > 1 and not clear else []
    asked = bool(clear) and not set(failed) & set(NOT_MADE)
    return Recheck(
        name=name,
        order_kept=not failed and _order_kept(clear, new) if asked else None,
        travel_m=after[0].travel_m,
        change=max((c for c in changes if math.isfinite(c)), default=math.nan),
        note="; ".join(notes),
    )


def verdict(found: Sequence[Recheck]) -> str:
    """The report's line, for example ``order kept in 4 of 4 rechecks; a finalist's travel moved by up to 18 %``."""
    told = [r for r in found if r.order_kept is not None]
    changes = [r.change for r in found if math.isfinite(r.change)]
    order = (
        f"order kept in {sum(bool(r.order_kept) for r in told)} of {len(told)} rechecks" if told else _no_order(found)
    )
    return f"{order}; {_moved(changes)}"


def _moved(changes: Sequence[float]) -> str:
    return f"a finalist's travel moved by up to {100 * max(changes):.0f} %" if changes else "no travel to compare"


def _no_order(found: Sequence[Recheck]) -> str:
    return "finalists all tied, no order to keep" if any(ALL_TIED in r.note for r in found) else "no order to keep"


def _clear_pairs(scores: Sequence[Score]) -> list[tuple[int, int]]:
    """Pairs of places (better, worse) that are further apart than their scatters."""
    pairs = [(i, j) for i in range(len(scores)) for j in range(len(scores)) if scores[i].value > scores[j].value]
    return [(i, j) for i, j in pairs if not tied(scores[i], scores[j])]


def _order_kept(clear: Sequence[tuple[int, int]], new: Sequence[Score]) -> bool:
    return all(tied(new[i], new[j]) or new[i].value > new[j].value for i, j in clear)


def _change(before_m: float, after_m: float) -> float:
    return abs(after_m - before_m) / abs(before_m) if before_m and math.isfinite(before_m) else math.nan
