"""ranking.csv: every wiring with its place, its ties and its reversed wave, the same bytes for the same walks."""

from __future__ import annotations

import csv
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
    "reversed_wiring", "reversed_rank", "reversed_travel_mm_per_period",
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
    walk, back = place.walk, place.reversed_walk
    return [
        str(place.rank),
        place.wiring.text(),
        walk.outcome,
        _yes(place.settled),
        fixed(place.score.value * SCALE[objective]),
        fixed(walk.travel_m * 1e3),
        fixed(walk.travel_scatter_m * 1e3),
        fixed(walk.speed_m_s * 1e3),
        fixed(walk.period_s),
        fixed(walk.drift_m * 1e3),
        fixed(math.degrees(walk.turn_rad)),
        fixed(walk.slip),
        fixed(walk.air_kg_per_m * 1e6),
        walk.wave.direction,
        SMOOTH_WORDS[place.smooth],
        _yes(place.tied_with_best),
        "" if place.reversed_wiring is None else place.reversed_wiring.text(),
        "" if place.reversed_rank is None else str(place.reversed_rank),
        "" if back is None else fixed(back.travel_m * 1e3),
    ]


def _failed(failure: Failure) -> list[str]:
    cells = ["", failure.wiring.text(), failure.outcome]
    return cells + [""] * (len(HEADER) - len(cells))


def fixed(value: float) -> str:
    """A number with four decimals, empty where it is not known, without a negative zero.

    >>> fixed(-0.00001), fixed(float("nan"))
    ('0.0000', '')
    """
    if not math.isfinite(value):
        return ""
    return f"{round(value, 4) + 0.0:.4f}"


def _yes(value: Any) -> str:
    return "yes" if value else "no"
