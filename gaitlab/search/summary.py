"""What a search tells at its end: the ranking in the units of the bench, ties, the smooth waves, how far to trust a screening walk."""

from __future__ import annotations

import math
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from scipy.stats import spearmanr

from gaitlab.search.ledger import Ledger
from gaitlab.search.ranking import Ranked, Ranking
from gaitlab.search.ranking_table import SMOOTH_WORDS
from gaitlab.search.run import SearchTask
from gaitlab.search.run_record import PLACES_KEPT, RunFacts
from gaitlab.trust.finalists import Checked

DONE = "done"
INTERRUPTED = "interrupted"
NOTHING_WALKED = "nothing_walked"
REMEDIES = {
    DONE: "",
    INTERRUPTED: "the ranking is of what was known; go on with --resume",
    NOTHING_WALKED: "no wiring walked: see the failures, then try one with `gaitlab ring` and `gaitlab walk`",
}
TIE_RULE = "tied: scores differ by no more than their scatters together (root of the sum of squares)"

BOTH_LENGTHS = """
SELECT s.level, s.score_{0}, l.score_{0} FROM walks s JOIN walks l ON l.settings = s.settings AND l.wiring = s.wiring
WHERE s.settings = ? AND s.level <> 'settled' AND l.level = 'settled' AND s.status = 'scored' AND l.status = 'scored'
"""
# A best wiring is said to wander when it drifts by more than this share of its travel or turns by more; chosen by us.
WANDER_SHARE = 0.1
WANDER_rad = math.radians(1.0)
PAIRS_MIN = 3  # a rank correlation of fewer says nothing


@dataclass(frozen=True)
class Screening:
    """Rank correlation (Spearman) of short or coarse walks with the settled walks of the same wirings, over `pairs` of them."""

    level: str
    pairs: int
    rank_correlation: float


@dataclass(frozen=True)
class SearchSummary:
    """The end of a search: outcome, facts for --json, the places worth showing, the finalists' second look where there was one."""

    outcome: str
    remedy: str
    places: tuple[Ranked, ...]
    smooth: tuple[Ranked, ...]
    screening: tuple[Screening, ...]
    facts: dict[str, Any]
    checked: Checked | None = None

    @property
    def best(self) -> Ranked | None:
        """The first place."""
        return self.places[0] if self.places else None


def summary_of(task: SearchTask, facts: RunFacts, ranking: Ranking, ledger: Ledger, folder: Path) -> SearchSummary:
    """Reads the summary out of a ranking."""
    places, smooth = tuple(ranking.first(PLACES_KEPT)), tuple(ranking.smooth())
    outcome = (DONE if facts.finished else INTERRUPTED) if places else NOTHING_WALKED
    screening = screening_of(task, ledger)
    return SearchSummary(
        outcome=outcome,
        remedy=REMEDIES[outcome],
        places=places,
        smooth=smooth,
        screening=screening,
        facts={
            "outcome": outcome,
            "remedy": REMEDIES[outcome],
            "name": task.robot.name,
            "strategy": facts.strategy,
            "objective": task.objective,
            "raw": task.space.raw,
            "distinct": task.space.distinct,
            "evaluated": ranking.evaluated(),
            "walks": ranking.walks(),
            "coarse_walks": ranking.coarse(),
            "failed": ranking.failed(),
            "best": place_facts(places[0]) if places else None,
            "ranking": [place_facts(place) for place in places],
            "tie_rule": TIE_RULE,
            "smooth_waves": [_smooth_facts(place) for place in smooth],
            "best_over_smooth_percent": best_over_smooth_percent(places, smooth),
            "screening": [vars(one) for one in screening],
            "notes": notes_on(places, ranking),
            "simulated_s": ranking.simulated_s(),
            "wall_s": facts.wall_s,
            "folder": str(folder),
        },
    )


def place_facts(place: Ranked) -> dict[str, Any]:
    """One place as --json prints it."""
    walk, back = place.walk, place.reversed_walk
    return {
        "wiring": place.wiring.as_dict(),
        "rank": place.rank,
        "travel_mm_per_period": walk.travel_m * 1e3,
        "scatter_mm": walk.travel_scatter_m * 1e3,
        "speed_mm_s": walk.speed_m_s * 1e3,
        "drift_mm_per_period": walk.drift_m * 1e3,
        "turn_deg_per_period": math.degrees(walk.turn_rad),
        "outcome": walk.outcome,
        "settled": place.settled,
        "level": place.level,
        "tied_with_best": place.tied_with_best,
        "wave": walk.wave.direction,
        "smooth": SMOOTH_WORDS[place.smooth] or None,
        "reversed_rank": place.reversed_rank,
        "reversed_travel_mm_per_period": None if back is None else back.travel_m * 1e3,
    }


def notes_on(places: tuple[Ranked, ...], ranking: Ranking) -> list[str]:
    """What a reader of the ranking should know besides: the body's warnings, a best wiring that wanders, and why wirings failed."""
    notes = list(places[0].walk.warnings) if places else []
    if places and _wanders(places[0]):
        walk = places[0].walk
        notes.append(
            f"the best wiring drifts {walk.drift_m * 1e3:.2g} mm and turns {math.degrees(walk.turn_rad):.2g}° a period; it is "
            "scored on the forward travel of its own heading (--objective straight counts both against it)"
        )
    remedies = {failure.outcome: failure.remedy for failure in ranking.failures()}
    return notes + [f"{outcome}: {remedy}" for outcome, remedy in sorted(remedies.items()) if remedy]


def _wanders(place: Ranked) -> bool:
    walk = place.walk
    return abs(walk.drift_m) > WANDER_SHARE * abs(walk.travel_m) or abs(walk.turn_rad) > WANDER_rad


def _smooth_facts(place: Ranked) -> dict[str, Any]:
    facts = place_facts(place)
    return {key: facts[key] for key in ("wiring", "rank", "smooth", "travel_mm_per_period", "scatter_mm", "wave")}


def best_over_smooth_percent(places: tuple[Ranked, ...], smooth: tuple[Ranked, ...]) -> float | None:
    """By how much the best wiring's score beats the better smooth wave's; None without both or where that wave loses ground."""
    if not places or not smooth or not smooth[0].score.value > 0:
        return None
    return 100.0 * (places[0].score.value / smooth[0].score.value - 1.0)


def screening_of(task: SearchTask, ledger: Ledger) -> tuple[Screening, ...]:
    """How well walks of each kind ranked those wirings that were also walked until they settled, where there are enough."""
    both: dict[str, list[tuple[float, float]]] = {}
    for level, short, settled in ledger.select(BOTH_LENGTHS.format(task.objective), (task.settings.text,)):
        both.setdefault(level, []).append((short, settled))
    return tuple(
        Screening(level, len(pairs), float(spearmanr(*zip(*pairs, strict=True)).statistic))
        for level, pairs in sorted(both.items())
        if len(pairs) >= PAIRS_MIN
    )
