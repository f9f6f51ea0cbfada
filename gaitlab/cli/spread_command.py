"""gaitlab spread: what a wiring does over the build tolerances, and which number to measure first."""

from __future__ import annotations

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
from gaitlab.robot.reader import read_robot
from gaitlab.search.evaluate import evaluate
from gaitlab.search.objective import OBJECTIVES
from gaitlab.search.settings import WalkSettings
from gaitlab.search.workers import Workers, local_workers
from gaitlab.trust.cautions import ESTIMATES
from gaitlab.trust.sensitivity import Sensitivity
from gaitlab.trust.spread import Request, Spread, WiringSpread, spread
from gaitlab.trust.summary import Quantiles
from gaitlab.trust.tolerances import Tolerances, tolerances_of

NOTHING_WALKED = "nothing_walked"
REMEDY = "no draw walked: see the outcomes, then try `gaitlab ring` and `gaitlab walk` with the file's own numbers"


@click.command("spread")
@robot_argument
@wiring_option(required=True, multiple=True)
@click.option(
    "--draws",
    type=WholeNumber(1, 100_000),
    default=64,
    show_default=True,
    help="Builds to draw; powers of two spread best.",
)
@click.option(
    "--objective", type=click.Choice(OBJECTIVES), default="travel", show_default=True, help="What counts as best."
)
@seed_option
@engine_option
@workers_option
@json_option
def command(
    robot_path: Path,
    wiring_texts: tuple[str, ...],
    draws: int,
    objective: str,
    seed: int,
    engine: str,
    workers: int | None,
    as_json: bool,
) -> None:
    """What wirings do over the build tolerances: travel and speed with their interval, chances, and what decides them.

    Each draw is one build of the robot; its ring is solved and its body walked anew, with the same draws for every
    wiring. Tolerances are the file's [[tolerance]] list, else printed defaults. Travel in mm per period, speed in mm/s.
    Refused: a draw that leaves a key's bounds (unless its tolerance has truncate = true), a wiring given twice.

    \b
      gaitlab spread robots/tray_row5.toml --wiring "a=1 b=3 c=5 d=2 e=4"
      gaitlab spread robots/tray_row5.toml --wiring "a=1 b=3 c=5 d=2 e=4" --wiring "a=1 b=4 c=2 d=5 e=3" --draws 32
    """
    file = read_robot(robot_path)
    wirings = tuple(wiring_for(file.robot, text) for text in wiring_texts)
    tolerances = tolerances_of(file.document, file.robot.tolerances)
    request = Request(tolerances, wirings, draws, seed, WalkSettings(engine=engine), objective)
    pool = local_workers(evaluate, workers or os.cpu_count() or 1)
    found = drawn(request, pool)
    facts = spread_facts(found, tolerances)
    if all(w.summary.walks.share == 0 for w in found.wirings):
        print_failure(NOTHING_WALKED, REMEDY, as_json=as_json, **facts)
    if as_json:
        print_json(facts)
    else:
        print_spread(found, tolerances)


def drawn(request: Request, pool: Workers) -> Spread:
    """The spread, with a progress bar; the workers end with it."""
    try:
        with progress(request.draws * len(request.wirings), "spread") as bar:
            return spread(request, pool, tell=bar.advance)
    finally:
        pool.close()


def spread_facts(found: Spread, tolerances: Tolerances) -> dict[str, Any]:
    """A spread as --json prints it."""
    return {
        "draws": found.draws,
        "seed": found.seed,
        "finished": found.finished,
        "simulated_s": found.simulated_s,
        "tolerances": [tolerance_facts(tolerances, i) for i in range(len(tolerances.listed))],
        "wirings": [_wiring_facts(w) for w in found.wirings],
        "sensitivities": [_share_facts(s) for s in found.sensitivities()],
    }


def tolerance_facts(tolerances: Tolerances, place: int) -> dict[str, Any]:
    """One tolerance as --json prints it."""
    item = tolerances.listed[place]
    t = item.tolerance
    return {
        "key": t.key,
        "kind": t.kind,
        "plus_minus": t.plus_minus,
        "percent": t.percent,
        "each": t.each,
        "nominal": item.nominal,
        "source": item.source,
    }


def _wiring_facts(found: WiringSpread) -> dict[str, Any]:
    summary, speed = found.summary, found.speed
    return {
        "wiring": found.wiring.as_dict(),
        "travel": {**_in(summary.travel_m, 1e3), "unit": "mm/period"},
        "speed": {**_in(summary.speed_m_s, 1e3), "unit": "mm/s"},
        "speed_body_lengths_s": speed and _triple(speed.body_lengths_s),
        "travel_body_lengths": speed and _triple(speed.body_lengths_per_period),
        "chance_forward": summary.forward.share,
        "chance_best": summary.best.share,
        "chance_ring_does_not_start": summary.ring_fails.share,
        "chance_walks": summary.walks.share,
        "intervals_90": {
            "chance_forward": [summary.forward.low, summary.forward.high],
            "chance_best": [summary.best.low, summary.best.high],
            "chance_ring_does_not_start": [summary.ring_fails.low, summary.ring_fails.high],
        },
        "outcomes": dict(summary.outcomes),
        "sensitivities": [_share_facts(s) for s in found.sensitivities],
        "warnings": list(speed.warnings) if speed else [],
    }


def _in(q: Quantiles, factor: float) -> dict[str, float]:
    return {"p05": q.p05 * factor, "p50": q.p50 * factor, "p95": q.p95 * factor}


def _triple(values: tuple[float, float, float]) -> dict[str, float]:
    return dict(zip(("p05", "p50", "p95"), values, strict=True))


def _share_facts(s: Sensitivity) -> dict[str, Any]:
    return {"name": s.name, "share": s.share, "low": s.low, "high": s.high}


def print_spread(found: Spread, tolerances: Tolerances) -> None:
    """A spread in tables."""
    print_tolerances(tolerances)
    click.echo(
        f"\n{found.draws} draws, seed {found.seed}" + ("" if found.finished else " (interrupted: the draws that ended)")
    )
    headers = (
        "wiring",
        "travel p05",
        "p50",
        "p95 mm/period",
        "speed p05",
        "p50",
        "p95 mm/s",
        "forward %",
        "best %",
        "ring fails %",
        "walks %",
    )
    print_table(headers, [_row(w) for w in found.best_first()])
    for w in found.best_first():
        _print_notes(w)
    _print_shares(found)
    click.echo("\n" + ESTIMATES)


def print_tolerances(tolerances: Tolerances) -> None:
    """The tolerances that are drawn, with their sources."""
    rows = []
    for item in tolerances.listed:
        t = item.tolerance
        size = f"±{t.plus_minus:g}" if t.plus_minus is not None else f"±{t.percent:g} %"
        rows.append((t.key, item.nominal, size, t.kind, t.each, item.source))
    print_table(("tolerance on", "nominal", "size", "law", "each", "source"), rows)


def _row(w: WiringSpread) -> tuple[object, ...]:
    s = w.summary
    travel = [q * 1e3 for q in (s.travel_m.p05, s.travel_m.p50, s.travel_m.p95)]
    speed = [q * 1e3 for q in (s.speed_m_s.p05, s.speed_m_s.p50, s.speed_m_s.p95)]
    chances = [100 * c.share for c in (s.forward, s.best, s.ring_fails, s.walks)]
    return (w.wiring.text(), *travel, *speed, *chances)


def _print_notes(w: WiringSpread) -> None:
    failed = [f"{n} × {name}" for name, n in w.summary.outcomes if name != "walked"]
    if failed:
        click.echo(f"{w.wiring.text()}: {', '.join(failed)}")
    if w.speed is not None:
        low, middle, high = w.speed.body_lengths_s
        per_period = w.speed.body_lengths_per_period[1]
        click.echo(
            f"{w.wiring.text()}: {middle:.3f} body lengths/s ({low:.3f} to {high:.3f}), {per_period:.3f} per period"
        )
        for text in w.speed.warnings:
            warn(f"{w.wiring.text()}: {text}")


def _print_shares(found: Spread) -> None:
    shares = found.sensitivities()
    if not shares:
        click.echo("\nToo few draws walked to say what the travel hangs on (16 are needed).")
        return
    click.echo("\nWhat the best wiring's result hangs on: share of its variance, 90 % interval")
    print_table(
        ("number", "share %", "from", "to"), [(s.name, *(100 * x for x in (s.share, s.low, s.high))) for s in shares]
    )
    if shares[0].share > 0:
        click.echo(f"Measure first at the bench: {shares[0].name}.")
