"""gaitlab compare: wirings side by side, each with its reversed wave, and which direction to choose."""

from __future__ import annotations

import math
import os
from pathlib import Path
from typing import Any

import click

from gaitlab.cli.options import (
    WholeNumber,
    engine_option,
    json_option,
    robot_argument,
    seed_option,
    wiring_for,
    wiring_option,
    workers_option,
)
from gaitlab.cli.output import print_failure, print_json, print_table, progress, warn
from gaitlab.cli.walk_facts import walk_facts
from gaitlab.gait.records import Walk
from gaitlab.robot.checks import require_odd_ring
from gaitlab.robot.reader import read_robot
from gaitlab.search.evaluate import Guarded, evaluate
from gaitlab.search.settings import WalkSettings
from gaitlab.search.workers import local_workers
from gaitlab.trust.cautions import ESTIMATES
from gaitlab.trust.compare import Comparison, Pair, compare, distinct
from gaitlab.trust.direction import Advice
from gaitlab.trust.speed import SpeedEstimate, estimate_from_walk

NOTHING_WALKED = "nothing_walked"
REMEDY = (
    "no wiring walked in either direction: see each outcome, then try `gaitlab ring` and `gaitlab walk` on one of them"
)


@click.command("compare")
@robot_argument
@wiring_option(required=True, multiple=True)
@click.option(
    "--draws",
    type=WholeNumber(0, 10_000),
    default=8,
    show_default=True,
    help="Builds drawn within the tolerances to say how sure the choice is; 0 for one walk each only.",
)
@seed_option
@engine_option
@workers_option
@json_option
def command(
    robot_path: Path,
    wiring_texts: tuple[str, ...],
    draws: int,
    seed: int,
    engine: str,
    workers: int | None,
    as_json: bool,
) -> None:
    """Wirings side by side, each with its reversed wave, and in words which direction to build.

    Travel, drift in mm per period, turn in degrees per period, speed in mm/s, air in mg per m. How sure the choice of
    direction is comes from common draws of the build tolerances. Refused (exit 2): a wiring given twice or incomplete.

    \b
      gaitlab compare robots/tray_row5.toml --wiring "a=1 b=3 c=5 d=2 e=4"
      gaitlab compare robots/tray_row5.toml --wiring "a=1 b=3 c=5 d=2 e=4" --wiring "a=1 b=2 c=3 d=4 e=5" --draws 0
    """
    file = read_robot(robot_path)
    require_odd_ring(file.robot)
    wirings = [wiring_for(file.robot, text) for text in wiring_texts]
    pool = local_workers(Guarded(evaluate), workers or os.cpu_count() or 1)
    total = len(distinct(file.robot, wirings)) * (1 + draws)
    try:
        with progress(total, "compare") as bar:
            how = WalkSettings(engine=engine)
            found = compare(
                file.robot, file.document, wirings, pool, draws=draws, seed=seed, settings=how, tell=bar.advance
            )
    finally:
        pool.close()
    facts = {
        "compared": [_pair_facts(pair) for pair in found.pairs],
        "draws": draws,
        "seed": seed,
        "notes": found.notes,
    }
    if not any(_walked(walk) for p in found.pairs for walk in (p.walk, p.backward_walk)):
        if not as_json:
            _print_failures(found)
        print_failure(NOTHING_WALKED, REMEDY, as_json=as_json, **facts)
    if as_json:
        print_json(facts)
    else:
        _print(found)


def _walked(walk: Walk) -> bool:
    return math.isfinite(walk.travel_m)


def _pair_facts(pair: Pair) -> dict[str, Any]:
    return {
        "wiring": pair.wiring.as_dict(),
        **walk_facts(pair.walk),
        "remedy": pair.walk.remedy,
        "wall_s": pair.wall_s,
        "speed_estimate": _estimate_facts(pair.walk),
        "reversed": {
            "wiring": pair.backward.as_dict(),
            **walk_facts(pair.backward_walk),
            "remedy": pair.backward_walk.remedy,
            "wall_s": pair.backward_wall_s,
            "speed_estimate": _estimate_facts(pair.backward_walk),
        },
        "advice": _advice_facts(pair.advice),
    }


def _advice_facts(told: Advice) -> dict[str, Any]:
    won = told.chance_as_given
    return {
        "direction": told.choose,
        "sure": told.sure,
        "chance_as_given": won and won.share,
        "interval_90": won and [won.low, won.high],
        "words": told.words,
    }


def _estimate(walk: Walk) -> SpeedEstimate | None:
    return estimate_from_walk(walk.travel_m, walk.period_s, walk.body_length_m) if _walked(walk) else None


def _estimate_facts(walk: Walk) -> dict[str, Any] | None:
    estimate = _estimate(walk)
    if estimate is None:
        return None
    return {
        "speed_mm_s": [v * 1e3 for v in estimate.speed_m_s],
        "body_lengths_s": estimate.body_lengths_s,
        "body_lengths_per_period": estimate.body_lengths_per_period,
        "basis": estimate.basis,
        "warnings": estimate.warnings,
    }


def _print(found: Comparison) -> None:
    both = [(p.wiring.text(), p.walk) for p in found.pairs], [(p.backward.text(), p.backward_walk) for p in found.pairs]
    rows = [
        row
        for forward, backward in zip(*both, strict=True)
        for row in (_row(*forward), _row("  reversed: " + backward[0], backward[1]))
    ]
    headers = (
        "wiring",
        "travel mm",
        "± mm",
        "speed mm/s",
        "drift mm",
        "turn deg",
        "slip",
        "duty",
        "wave",
        "legs",
        "air mg/m",
        "outcome",
    )
    print_table(headers, rows)
    for pair in found.pairs:
        click.echo(f"\n{pair.wiring.text()}\n  {pair.advice.words}")
        estimate = _estimate(pair.walk)
        if estimate is not None:
            _print_estimate(estimate)
    click.echo("")
    for note in found.notes:
        click.echo(f"Note: {note}.")
    click.echo(ESTIMATES)


def _print_failures(found: Comparison) -> None:
    """What every walk came to, and what usually helps."""
    for pair in found.pairs:
        for wiring, walk in ((pair.wiring, pair.walk), (pair.backward, pair.backward_walk)):
            click.echo(f"{wiring.text()}: {walk.outcome}" + (f"; {walk.remedy}" if walk.remedy else ""))


def _print_estimate(estimate: SpeedEstimate) -> None:
    low, middle, high = (v * 1e3 for v in estimate.speed_m_s)
    lengths, per_period = estimate.body_lengths_s[1], estimate.body_lengths_per_period[1]
    click.echo(
        f"  As given: {middle:.2f} mm/s ({low:.2f} to {high:.2f}), {lengths:.3f} body lengths/s, "
        f"{per_period:.3f} per period ({estimate.basis})."
    )
    for text in estimate.warnings:
        warn(text)


def _row(text: str, walk: Walk) -> tuple[object, ...]:
    facts = walk_facts(walk)
    duties = [v for v in facts["duty_factor"].values() if v is not None and math.isfinite(v)]
    duty = f"{min(duties):.2f}–{max(duties):.2f}" if duties else "–"
    wave = facts["wave"]
    return (
        text,
        facts["travel_mm_per_period"],
        facts["travel_scatter_mm"],
        facts["speed_mm_s"],
        round(facts["drift_mm_per_period"], 2),
        round(facts["turn_deg_per_period"], 2),
        facts["slip"],
        duty,
        wave["direction"],
        wave["wavelength_legs"],
        facts["air_mg_per_m"],
        facts["outcome"],
    )
