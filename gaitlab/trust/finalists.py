"""The best few of a search, looked at again: rechecks of the numerics, and on request their spread over the build tolerances."""

from __future__ import annotations

import json
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any

from gaitlab.gait.records import Walk
from gaitlab.record_json import record_to_json
from gaitlab.robot.records import Robot
from gaitlab.search.settings import WalkSettings
from gaitlab.search.workers import Workers
from gaitlab.trust.draws import checked_draws
from gaitlab.trust.places import Document
from gaitlab.trust.recheck import Recheck, recheck_settings, rechecks
from gaitlab.trust.robust import MEDIAN, RobustRank, check_quantile, robust_ranking
from gaitlab.trust.spread import Request, Spread, spread
from gaitlab.trust.tolerances import Tolerances, tolerances_of
from gaitlab.wiring.wiring import Wiring


@dataclass(frozen=True)
class FinalistPlan:
    """How many finalists are rechecked (0: none), and, with `draws` above 0, over how many builds they are ranked again."""

    count: int = 0
    draws: int = 0
    quantile: float = MEDIAN
    seed: int = 1


@dataclass(frozen=True)
class Task:
    """Whose finalists: the robot with its document, how the search walked, and what it scored on."""

    robot: Robot
    document: Document
    settings: WalkSettings
    objective: str


@dataclass(frozen=True)
class Checked:
    """What the second look found; `spread`, `tolerances` and `robust` are empty where no builds were drawn."""

    rechecks: tuple[Recheck, ...]
    spread: Spread | None
    tolerances: Tolerances | None
    robust: tuple[RobustRank, ...]


def check_plan(plan: FinalistPlan, robot: Robot, document: Document) -> None:
    """Refuse, before any walk, what a second look could not be made with.

    Raises InputError for a quantile outside 0…1, tolerances that name no number and a draw that gives no robot.
    """
    check_quantile(plan.quantile)
    if plan.draws:
        for _ in checked_draws(tolerances_of(document, robot.tolerances), plan.draws, seed=plan.seed):
            pass


def walks_needed(plan: FinalistPlan, robot: Robot, settings: WalkSettings, finalists: int) -> int:
    """How many walks the second look will take (for a progress bar)."""
    count = min(plan.count, finalists)
    return count * (len(recheck_settings(robot, settings)) + plan.draws)


def checked_finalists(
    task: Task,
    finalists: Sequence[tuple[Wiring, Walk]],
    plan: FinalistPlan,
    workers: Workers,
    *,
    tell: Callable[[int], None] = lambda done: None,
) -> Checked:
    """Rechecks the first `plan.count` finalists (best first, at least one) and draws builds of them.

    Raises InputError for what `check_plan` refuses.
    """
    check_plan(plan, task.robot, task.document)
    chosen = finalists[: plan.count]
    text = json.dumps(task.document)
    found = rechecks(
        task.robot, text, chosen, settings=task.settings, objective=task.objective, workers=workers, tell=tell
    )
    if not plan.draws:
        return Checked(found, None, None, ())
    tolerances = tolerances_of(task.document, task.robot.tolerances)
    wirings = tuple(wiring for wiring, _ in chosen)
    request = Request(tolerances, wirings, plan.draws, plan.seed, task.settings, task.objective)
    drawn = spread(request, workers, tell=tell)
    return Checked(found, drawn, tolerances, robust_ranking(drawn, quantile=plan.quantile))


def checked_record(checked: Checked | None) -> dict[str, Any]:
    """The keys `rechecks` and `spread` of run.json (see gaitlab.report.run_folder)."""
    if checked is None:
        return {"rechecks": [], "spread": None}
    return {
        "rechecks": [record_to_json(found) for found in checked.rechecks],
        "spread": None if checked.spread is None else spread_record(checked.spread),
    }


def spread_record(found: Spread) -> dict[str, Any]:
    """A spread as run.json keeps it."""
    return {
        "draws": found.draws,
        "seed": found.seed,
        "wirings": [{"wiring": w.wiring.as_dict(), "summary": record_to_json(w.summary)} for w in found.wirings],
        "sensitivities": [record_to_json(s) for s in found.sensitivities()],
    }
