"""The page's tables and lines of text, each cell with the value it sorts by."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from gaitlab.report.run_folder import RankedWiring, SavedRun
from gaitlab.report.words import KPA, MM, number, source_text
from gaitlab.ring.tubing import tube_lengths
from gaitlab.robot.totals import mass_kg


@dataclass(frozen=True)
class Cell:
    """What a cell shows, what it sorts by, and the share of a bar behind it (−1…1, 0 for none)."""

    text: str
    sort: str
    bar: float = 0.0


@dataclass(frozen=True)
class Table:
    """A table whose columns can be sorted: heads with their units, and rows of cells."""

    heads: tuple[str, ...]
    rows: tuple[tuple[Cell, ...], ...]


RANKING_HEADS = (
    "rank",
    "wiring",
    "travel, mm/period",
    "scatter, mm",
    "speed, mm/s",
    "reversed, mm/period",
    "reversed rank",
    "slip, –",
    "drift, mm/period",
    "turn, °/period",
    "wave",
    "notes",
)


def ranking_table(run: SavedRun) -> Table:
    """The whole saved ranking, bars scaled to the largest travel either way."""
    travels = [abs(row.walk.travel_m) for row in run.ranking if math.isfinite(row.walk.travel_m)]
    top = max(travels, default=1.0) or 1.0
    return Table(RANKING_HEADS, tuple(_ranking_row(row, top) for row in run.ranking))


def _ranking_row(row: RankedWiring, top_m: float) -> tuple[Cell, ...]:
    walk, backwards = row.walk, row.reversed_walk
    travel = Cell(number(MM * walk.travel_m, 2), _key(walk.travel_m), _share(walk.travel_m, top_m))
    reversed_m = math.nan if backwards is None else backwards.travel_m
    rank = math.nan if row.reversed_rank is None else float(row.reversed_rank)
    return (
        Cell(str(row.rank), _key(row.rank)),
        Cell(row.wiring.text(), row.wiring.text()),
        travel,
        _cell(MM * walk.travel_scatter_m, 2),
        _cell(MM * walk.speed_m_s, 2),
        Cell(number(MM * reversed_m, 2), _key(reversed_m), _share(reversed_m, top_m)),
        _cell(rank, 0),
        _cell(walk.slip, 2),
        _cell(MM * walk.drift_m, 2),
        _cell(math.degrees(walk.turn_rad), 2),
        Cell(walk.wave.direction, walk.wave.direction),
        Cell(_notes(row), _notes(row)),
    )


def _notes(row: RankedWiring) -> str:
    notes = []
    if row.tied_with_best and row.rank > 1:
        notes.append("tied")
    if row.smooth:
        notes.append("smooth wave")
    if not row.settled:
        notes.append("screened only")
    return ", ".join(notes)


def _cell(value: float, digits: int) -> Cell:
    return Cell(number(value, digits), _key(value))


def _key(value: float) -> str:
    """What a number sorts by; an unknown one has no key and stays last either way."""
    return f"{value:.9g}" if math.isfinite(value) else ""


def _share(value_m: float, top_m: float) -> float:
    return round(value_m / top_m, 4) if math.isfinite(value_m) else 0.0


def ring_table(run: SavedRun) -> Table:
    """The outputs in ring order: when they evacuate, what they swing between, whom they feed."""
    ring, wiring = run.ring, run.best.wiring
    heads = ("output", "feeds", "phase, periods", "duty, –", "least, kPa", "peak, kPa", "rise, s", "fall, s")
    rows = []
    for k in range(len(ring.phase)):
        fed = ", ".join(wiring.inlets_on(k + 1)) or "nothing"
        figures = (ring.phase[k], ring.duty[k], ring.least_vacuum_Pa[k] / KPA, ring.peak_vacuum_Pa[k] / KPA)
        times = (ring.rise_s[k], ring.fall_s[k])
        cells = [_cell(float(v), 2 if i < 2 else 1) for i, v in enumerate(figures)] + [
            _cell(float(t), 3) for t in times
        ]
        rows.append((_cell(k + 1, 0), Cell(fed, fed), *cells))
    return Table(heads, tuple(rows))


def robot_facts(run: SavedRun) -> tuple[tuple[str, str], ...]:
    """The robot in a few lines."""
    robot = run.robot
    lengths = tube_lengths(robot).values()
    legs, spines, blocks = len(robot.body.legs), len(robot.body.spines), len(robot.body.blocks)
    pairs = [
        ("Body", f"{_count(blocks, 'block')}, {_count(legs, 'leg')}, {_count(spines, 'spine')}"),
        ("Mass", f"{number(1e3 * mass_kg(robot), 0)} g without tubes and fittings"),
        ("Inlets", ", ".join(f"{inlet} ← {source_text(source)}" for inlet, source in run.best.wiring.pairs)),
        ("Bellows", ", ".join(f"{b.name} ({b.action}s, {number(MM * b.length_m, 0)} mm)" for b in robot.bellows)),
        (
            "Feet",
            ", ".join(f"{f.name} (radius {number(MM * f.radius_m)} mm, friction {f.friction:g})" for f in robot.feet),
        ),
        (
            "Tubes",
            f"bore {number(MM * robot.tubes.bore_m)} mm, {number(MM * min(lengths), 0)} to {number(MM * max(lengths), 0)} mm",
        ),
        (
            "Ground",
            f"slope {number(np.degrees(robot.ground.slope_rad))}°, friction factor {robot.ground.friction_factor:g}",
        ),
    ]
    return tuple(pairs)


def _count(n: int, what: str) -> str:
    return f"{n} {what}" if n == 1 else f"{n} {what}s"


def search_facts(run: SavedRun) -> tuple[tuple[str, str], ...]:
    """The search in a few lines."""
    search = run.search
    failed = ", ".join(f"{count} {name.replace('_', ' ')}" for name, count in search.failed) or "none"
    return (
        ("Wirings", f"{search.raw} in all, {search.distinct} distinct, {search.evaluated} walked"),
        ("Failed", failed),
        ("Strategy", f"{search.strategy}, ranked by {search.objective}"),
        ("Cost", f"{number(search.simulated_s, 0)} s simulated in {number(search.wall_s, 0)} s"),
        ("Command", run.command),
    )


def spread_table(run: SavedRun) -> Table | None:
    """Travel over the tolerance draws, one row per wiring that was spread."""
    if run.spread is None:
        return None
    heads = (
        "wiring",
        "p05, mm/period",
        "p50",
        "p95",
        "chance to be the best, %",
        "chance to go forward, %",
        "ring fails, %",
    )
    rows = []
    for item in run.spread.wirings:
        text, s = item.wiring.text(), item.summary
        shares = (s.best.share, s.forward.share, s.ring_fails.share)
        travel = [_cell(MM * v, 2) for v in (s.travel_m.p05, s.travel_m.p50, s.travel_m.p95)]
        rows.append((Cell(text, text), *travel, *(_cell(100 * share, 0) for share in shares)))
    return Table(heads, tuple(rows))


def sensitivity_table(run: SavedRun) -> Table | None:
    """Which numbers of the robot file the travel hangs on, with a bar for the share."""
    if run.spread is None or not run.spread.sensitivities:
        return None
    rows = [
        (
            Cell(s.name, s.name),
            Cell(number(100 * s.share, 0), _key(s.share), round(s.share, 4)),
            Cell(f"{number(100 * s.low, 0)} to {number(100 * s.high, 0)}", _key(s.low)),
        )
        for s in run.spread.sensitivities
    ]
    return Table(("number in the robot file", "share of the variance, %", "90 % interval, %"), tuple(rows))


def recheck_table(run: SavedRun) -> Table | None:
    """The rechecks of the finalists."""
    if not run.rechecks:
        return None
    rows = []
    for check in run.rechecks:
        kept = {True: "kept", False: "changed", None: "none to keep"}[check.order_kept]
        rows.append(
            (
                Cell(check.name, check.name),
                Cell(kept, kept),
                _cell(MM * check.travel_m, 2),
                Cell(check.note, check.note),
            )
        )
    return Table(("recheck", "order", "travel of the best, mm/period", "note"), tuple(rows))
