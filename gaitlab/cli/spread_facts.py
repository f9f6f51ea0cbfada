"""Spreads and rechecks as commands print them: the keys of --json, and tables for people."""

from __future__ import annotations

from typing import Any

import click

from gaitlab.cli.output import print_table, warn
from gaitlab.search.objective import SCALE, UNITS
from gaitlab.trust.finalists import Checked
from gaitlab.trust.recheck import verdict
from gaitlab.trust.sensitivity import Sensitivity
from gaitlab.trust.spread import Spread, WiringSpread
from gaitlab.trust.summary import Quantiles
from gaitlab.trust.tolerances import Listed, Tolerances

ROUGH_DRAWS = 32  # below it p05 and p95 lie within the outermost two; chosen by us
HEADERS = (
    "wiring", "travel p05", "p50", "p95 mm/period", "speed p05", "p50", "p95 mm/s",
    "forward %", "best %", "ring fails %", "walks %",
)  # fmt: skip


def spread_facts(found: Spread, tolerances: Tolerances) -> dict[str, Any]:
    """A spread as --json prints it."""
    return {
        "draws": found.draws,
        "lost_draws": found.lost,
        "seed": found.seed,
        "finished": found.finished,
        "simulated_s": found.simulated_s,
        "tolerances": [_tolerance_facts(item) for item in tolerances.listed],
        "wirings": [_wiring_facts(w) for w in found.wirings],
        "sensitivities": [_share_facts(s) for s in found.sensitivities()],
    }


def checked_facts(checked: Checked, objective: str) -> dict[str, Any]:
    """Rechecks and robust ranking as --json prints them."""
    facts: dict[str, Any] = {
        "rechecks": [
            {
                "name": r.name,
                "order_kept": r.order_kept,
                "travel_mm_per_period": r.travel_m * 1e3,
                "change": r.change,
                "note": r.note,
            }
            for r in checked.rechecks
        ],
        "recheck_verdict": verdict(checked.rechecks),
    }
    if checked.spread is not None and checked.tolerances is not None:
        facts["spread"] = spread_facts(checked.spread, checked.tolerances)
        facts["robust_ranking"] = [
            {
                "rank": r.rank,
                "wiring": r.spread.wiring.as_dict(),
                "quantile_score": r.quantile_score * SCALE[objective],
                "unit": UNITS[objective],
                "chance_best": r.spread.summary.best.share,
            }
            for r in checked.robust
        ]
    return facts


def _tolerance_facts(item: Listed) -> dict[str, Any]:
    t = item.tolerance
    size = {"plus_minus": t.plus_minus, "percent": t.percent}
    return {"key": t.key, "kind": t.kind, **size, "each": t.each, "nominal": item.nominal, "source": item.source}


def _wiring_facts(found: WiringSpread) -> dict[str, Any]:
    summary, speed = found.summary, found.speed
    chances = {
        "chance_forward": summary.forward,
        "chance_best": summary.best,
        "chance_ring_does_not_start": summary.ring_fails,
        "chance_walks": summary.walks,
    }
    return {
        "wiring": found.wiring.as_dict(),
        "travel": {**_in(summary.travel_m, 1e3), "unit": "mm/period"},
        "speed": {**_in(summary.speed_m_s, 1e3), "unit": "mm/s"},
        "speed_body_lengths_s": speed and _triple(speed.body_lengths_s),
        "travel_body_lengths": speed and _triple(speed.body_lengths_per_period),
        **{name: chance.share for name, chance in chances.items()},
        "intervals_90": {name: [chance.low, chance.high] for name, chance in chances.items()},
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
    """A spread in tables: what was drawn, what came out, what it hangs on."""
    _print_tolerances(tolerances)
    cut = "" if found.finished else " (interrupted: the draws that ended)"
    lost = f" ({found.lost} more lost their worker and are left out)" if found.lost else ""
    click.echo(f"\n{found.draws} draws, seed {found.seed}{cut}{lost}; quantiles are of the draws that walked")
    if found.draws < ROUGH_DRAWS:
        click.echo(
            f"p05 and p95 of fewer than {ROUGH_DRAWS} draws are rough: they hang on the one or two outermost builds"
        )
    print_table(HEADERS, [_row(w, alone=len(found.wirings) == 1) for w in found.best_first()])
    for w in found.best_first():
        _print_notes(w)
    _print_shares(found)


def print_checked(checked: Checked, objective: str) -> None:
    """Rechecks and robust ranking in tables."""
    if checked.rechecks:
        click.echo(f"\nFinalists again: {verdict(checked.rechecks)}")
        headers = ("recheck", "order kept", "best wiring mm/period", "largest change %", "note")
        print_table(
            headers,
            [(r.name, r.order_kept, r.travel_m * 1e3, round(100 * r.change, 1), r.note) for r in checked.rechecks],
        )
    if checked.spread is not None and checked.tolerances is not None:
        click.echo("\nFinalists over the build tolerances:")
        print_spread(checked.spread, checked.tolerances)
        click.echo("\nRobust ranking:")
        rows = [(r.rank, r.spread.wiring.text(), r.quantile_score * SCALE[objective]) for r in checked.robust]
        print_table(("rank", "wiring", f"quantile, {UNITS[objective]}"), rows)


def _print_tolerances(tolerances: Tolerances) -> None:
    rows = []
    for item in tolerances.listed:
        t = item.tolerance
        size = f"±{t.plus_minus:g}" if t.plus_minus is not None else f"±{t.percent:g} %"
        rows.append((t.key, item.nominal, size, t.kind, t.each, item.source))
    print_table(("tolerance on", "nominal", "size", "law", "each", "source"), rows)


def _row(w: WiringSpread, *, alone: bool) -> tuple[object, ...]:
    """One wiring; one that is `alone` is best of nothing."""
    s = w.summary
    travel = [q * 1e3 for q in (s.travel_m.p05, s.travel_m.p50, s.travel_m.p95)]
    speed = [q * 1e3 for q in (s.speed_m_s.p05, s.speed_m_s.p50, s.speed_m_s.p95)]
    forward, best, fails, walks = (round(100 * c.share, 1) for c in (s.forward, s.best, s.ring_fails, s.walks))
    return (w.wiring.text(), *travel, *speed, forward, None if alone else best, fails, walks)


def print_failures(w: WiringSpread) -> None:
    """How many draws of a wiring ended as what, where any failed."""
    failed = [f"{n} × {name}" for name, n in w.summary.outcomes if name != "walked"]
    if failed:
        click.echo(f"{w.wiring.text()}: {', '.join(failed)}")


def _print_notes(w: WiringSpread) -> None:
    print_failures(w)
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
        click.echo("\nToo few draws walked to say what the result hangs on (16 are needed).")
        return
    click.echo("\nWhat the best wiring's result hangs on: first-order share of its variance, 90 % interval")
    print_table(
        ("number", "share %", "from", "to"),
        [(s.name, *(round(100 * x, 1) for x in (s.share, s.low, s.high))) for s in shares],
    )
    if shares[0].share > 0:
        click.echo(f"Measure first at the bench: {shares[0].name}.")
