"""How a search is told to a person: the first places, the smooth waves, what failed, and how far to trust it."""

from __future__ import annotations

import math

import click

from gaitlab.cli.output import print_facts, print_table
from gaitlab.cli.spread_facts import print_checked
from gaitlab.search.objective import MEANING, SCALE, UNITS
from gaitlab.search.ranking import Ranked
from gaitlab.search.ranking_table import SMOOTH_WORDS
from gaitlab.search.run import SearchTask
from gaitlab.search.settings import SETTLED
from gaitlab.search.summary import DONE, TIE_RULE, SearchSummary
from gaitlab.trust.cautions import DISTANCES

SHOWN = 10  # places in the table; ranking.csv has all


def print_search(summary: SearchSummary, task: SearchTask) -> None:
    """Prints a finished or interrupted search."""
    facts = summary.facts
    if summary.outcome != DONE:
        click.echo(f"outcome: {summary.outcome}\nremedy: {summary.remedy}")
    _print_places(summary, task)
    walks = "1 walk" if facts["walks"] == 1 else f"{facts['walks']} walks"
    walks += f", {facts['coarse_walks']} of them coarse" if facts["coarse_walks"] else ""
    failed = ", ".join(f"{count} {outcome}" for outcome, count in sorted(facts["failed"].items())) or "none"
    print_facts(
        [
            ("wirings", f"{facts['raw']} in all, {facts['distinct']} distinct, {facts['evaluated']} walked in {walks}"),
            ("failed", failed),
            *_smooth_lines(summary),
            ("score", f"{MEANING[task.objective]} [{UNITS[task.objective]}]; {TIE_RULE}"),
            *_screening_lines(summary),
            *((f"note {number}", note) for number, note in enumerate(facts["notes"], start=1)),
            *(("robot file says", note) for note in task.robot.notes),
            ("simulated", f"{facts['simulated_s']:.0f} s in {facts['wall_s']:.0f} s"),
            ("folder", facts["folder"]),
        ]
    )
    if summary.checked is not None:
        print_checked(summary.checked, task.objective)
    click.echo(DISTANCES)


def _print_places(summary: SearchSummary, task: SearchTask) -> None:
    headers = [
        "rank",
        "wiring",
        UNITS[task.objective],
        "±",
        "mm/s",
        "drift mm",
        "turn °",
        "tied",
        "wave",
        "smooth",
        "reversed",
    ]
    shown = list(summary.places[:SHOWN])
    shown += [place for place in summary.smooth if place.rank > SHOWN]
    print_table(headers, (_cells(place, task.objective) for place in shown))


def _cells(place: Ranked, objective: str) -> list[object]:
    scale, back = SCALE[objective], place.reversed_walk
    return [
        place.rank,
        place.wiring.text(),
        place.score.value * scale,
        place.score.scatter * scale,
        place.walk.speed_m_s * 1e3,
        round(place.walk.drift_m * 1e3, 2),
        round(math.degrees(place.walk.turn_rad), 2),
        place.tied_with_best,
        place.walk.wave.direction if place.settled else f"screened only: {place.level}",
        SMOOTH_WORDS[place.smooth] or None,
        None
        if back is None
        else f"rank {place.reversed_rank}: {back.travel_m * 1e3:.3g} mm{_screened(place.reversed_level)}",
    ]


def _screened(level: str | None) -> str:
    return "" if level == SETTLED else f" ({level})"


def _smooth_lines(summary: SearchSummary) -> list[tuple[str, object]]:
    lines: list[tuple[str, object]] = [
        (
            f"smooth wave, {SMOOTH_WORDS[place.smooth]}",
            f"rank {place.rank}, {place.walk.travel_m * 1e3:.4g} mm a period: {place.wiring.text()}",
        )
        for place in summary.smooth
    ]
    lead = summary.facts["best_over_smooth_percent"]
    if lead is not None:
        lines.append(("best against the better smooth wave", f"{lead:+.1f} %"))
    return lines


def _screening_lines(summary: SearchSummary) -> list[tuple[str, object]]:
    return [
        (
            f"rank correlation of walks ({screening.level}) with settled ones",
            f"{screening.rank_correlation:.3f} over the {screening.pairs} wirings walked both ways",
        )
        for screening in summary.screening
    ]
