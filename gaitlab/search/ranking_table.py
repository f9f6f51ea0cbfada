"""ranking.csv: every wiring with its place, its ties and its reversed wave, the same bytes for the same walks."""

from __future__ import annotations

import csv
import json
import math
from collections.abc import Iterator
from pathlib import Path
from typing import Any

from gaitlab.search.objective import SCALE
from gaitlab.search.ranking import Failure, Ranked, Ranking
from gaitlab.search.run_files import replaced_file

HEADER = (
    "rank", "wiring", "outcome", "settled", "score", "travel_mm_per_period", "scatter_mm", "speed_mm_s", "period_s",
    "drift_mm_per_period", "turn_deg_per_period", "slip", "air_mg_per_m", "wave", "smooth", "tied_with_best",
    "reversed_wiring", "reversed_rank", "reversed_travel_mm_per_period", "walk",
)  # fmt: skip
SMOOTH_WORDS = {1: "head to tail", -1: "tail to head", 0: ""}  # which way the evacuation runs along the rows


def write_ranking(path: Path, ranking: Ranking, objective: str) -> None:
    """Writes the ranking, failures last, in one step. No wall time is in it: a repeated search gives identical bytes."""
    with replaced_file(path) as file:
        writer = csv.writer(file, lineterminator="\n")
        writer.writerow(HEADER)
        writer.writerows(_lines(ranking, objective))


def _lines(ranking: Ranking, objective: str) -> Iterator[list[str]]:
    for place in ranking:
        yield _placed(place, objective)
    for failure in ranking.failures():
        yield _failed(failure)


def _placed(place: Ranked, objective: str) -> list[str]:
    """One line. The walk is read as plain JSON here, not as a record: a million lines should not take an hour."""
    walk = json.loads(place.walk_json)
    back = {} if place.reversed_walk_json is None else json.loads(place.reversed_walk_json)
    period_s = walk["period_s"]
    return [
        str(place.rank),
        place.wiring.text(),
        walk["outcome"],
        _yes(place.settled),
        fixed(place.score.value, SCALE[objective]),
        fixed(walk["travel_m"], 1e3),
        fixed(walk["travel_scatter_m"], 1e3),
        fixed(walk["travel_m"] / period_s if period_s else None, 1e3),
        fixed(period_s),
        fixed(walk["drift_m"], 1e3),
        fixed(walk["turn_rad"], math.degrees(1.0)),
        fixed(walk["slip"]),
        fixed(walk["air_kg_per_m"], 1e6),
        walk["wave"]["direction"],
        SMOOTH_WORDS[place.smooth],
        _yes(place.tied_with_best),
        "" if place.reversed_wiring is None else place.reversed_wiring.text(),
        "" if place.reversed_rank is None else str(place.reversed_rank),
        fixed(back.get("travel_m"), 1e3),
        place.level,
    ]


def _failed(failure: Failure) -> list[str]:
    cells = ["", failure.wiring.text(), failure.outcome]
    return cells + [""] * (len(HEADER) - len(cells) - 1) + [failure.level]


def fixed(value: float | None, scale: float = 1.0) -> str:
    """A number times `scale` with four decimals, empty where it is not known, without a negative zero.

    >>> fixed(-0.00001), fixed(None), fixed(0.25, 1e3)
    ('0.0000', '', '250.0000')
    """
    if value is None or not math.isfinite(value):
        return ""
    return f"{round(value * scale, 4) + 0.0:.4f}"


def _yes(value: Any) -> str:
    return "yes" if value else "no"
