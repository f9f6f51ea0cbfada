"""run.json: what a search was and what it found, the record that every report starts from (keys: `gaitlab.report.run_folder`)."""

from __future__ import annotations

import datetime
import importlib.metadata
import json
import platform
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from gaitlab import __version__
from gaitlab.record_json import record_to_json
from gaitlab.ring.waves import RingRun
from gaitlab.search.ranking import Ranked, Ranking
from gaitlab.search.run import SearchTask
from gaitlab.search.run_files import replaced_file

LAYOUT = 1
RUN_FILE = "run.json"
PLACES_KEPT = 1000  # places with their whole walks; ranking.csv and the ledger hold the rest; chosen by us
LIBRARIES = ("numpy", "scipy", "pybullet", "matplotlib")


@dataclass(frozen=True)
class RunFacts:
    """What is written beside the ranking: the file as read, the command, how the search went."""

    robot_path: str
    robot_text: str
    command: str
    finished: bool
    strategy: str
    seed: int
    wall_s: float


@dataclass(frozen=True)
class FinalRings:
    """The rings of the best wiring and of its reversed wave, where there is one."""

    best: RingRun | None
    backwards: RingRun | None


def write_run(
    folder: Path, task: SearchTask, facts: RunFacts, ranking: Ranking, rings: FinalRings, trust: dict[str, Any]
) -> None:
    """Writes `run.json` in one step; `trust` holds its keys `rechecks` and `spread`."""
    record = {
        "layout": LAYOUT,
        "gaitlab": __version__,
        "versions": versions(),
        "created": datetime.datetime.now(datetime.UTC).isoformat(timespec="seconds"),
        "command": facts.command,
        "finished": facts.finished,
        "robot": {"path": facts.robot_path, "text": facts.robot_text, "document": task.document},
        "search": _search(task, facts, ranking),
        "ranking": [_place(place) for place in ranking.first(PLACES_KEPT)],
        "rings": {"best": record_to_json(rings.best), "reversed": record_to_json(rings.backwards)},
        **trust,
    }
    with replaced_file(folder / RUN_FILE) as file:
        json.dump(record, file, allow_nan=False)


def versions() -> dict[str, str]:
    """Versions of Python and of the libraries a result stands on."""
    return {"python": platform.python_version(), **{name: importlib.metadata.version(name) for name in LIBRARIES}}


def _search(task: SearchTask, facts: RunFacts, ranking: Ranking) -> dict[str, Any]:
    return {
        "strategy": facts.strategy,
        "objective": task.objective,
        "raw": task.space.raw,
        "distinct": task.space.distinct,
        "evaluated": ranking.evaluated(),
        "failed": ranking.failed(),
        "simulated_s": ranking.simulated_s(),
        "wall_s": facts.wall_s,
        "seed": facts.seed,
    }


def _place(place: Ranked) -> dict[str, Any]:
    backwards = place.reversed_wiring
    return {
        "wiring": place.wiring.as_dict(),
        "rank": place.rank,
        "settled": place.settled,
        "smooth": place.smooth,
        "tied_with_best": place.tied_with_best,
        "walk": record_to_json(place.walk),
        "reversed_wiring": None if backwards is None else backwards.as_dict(),
        "reversed_rank": place.reversed_rank,
        "reversed_walk": record_to_json(place.reversed_walk),
    }
