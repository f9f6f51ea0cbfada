"""The ledger's tables, and how a walk becomes a row of them."""

from __future__ import annotations

import json
import math
import zlib
from dataclasses import dataclass
from typing import Any

from gaitlab.gait.outcomes import NEVER_SETTLED, WALKED
from gaitlab.gait.records import Walk
from gaitlab.record_json import record_from_json, record_to_json
from gaitlab.search.evaluate import Evaluation, Job
from gaitlab.search.objective import OBJECTIVES, score_of
from gaitlab.wiring.wiring import HELD, OPEN, Wiring

SCHEMA = 4  # raised when an older reader would misread the tables

SCORED = "scored"
FAILED = "failed"
MEASURED = (WALKED, NEVER_SETTLED)  # outcomes that leave a travel to rank

TABLES = """
CREATE TABLE meta (name TEXT PRIMARY KEY, value TEXT NOT NULL) WITHOUT ROWID;
CREATE TABLE walks (
    key TEXT NOT NULL UNIQUE,
    settings TEXT NOT NULL,
    level TEXT NOT NULL,
    wiring TEXT NOT NULL,
    reversed TEXT,
    status TEXT NOT NULL CHECK (status IN ('scored', 'failed')),
    outcome TEXT NOT NULL,
    remedy TEXT NOT NULL,
    travel_m REAL, scatter_m REAL, period_s REAL,
    score_travel REAL, score_speed REAL, score_straight REAL, score_air REAL,
    simulated_s REAL NOT NULL,
    wall_s REAL NOT NULL,
    walk TEXT NOT NULL,
    checksum INTEGER NOT NULL
);
CREATE INDEX walks_by_wiring ON walks (settings, level, wiring);
CREATE TABLE equals (wiring TEXT PRIMARY KEY, equal_to TEXT NOT NULL) WITHOUT ROWID;
CREATE TABLE rings (pattern TEXT NOT NULL UNIQUE, run BLOB NOT NULL, checksum INTEGER NOT NULL);
CREATE VIEW fates AS
    SELECT wiring, level, status AS fate, CASE status WHEN 'failed' THEN outcome ELSE '' END AS detail FROM walks
    UNION ALL SELECT wiring, '', 'equal by symmetry', equal_to FROM equals;
"""

COLUMNS = (
    "key", "settings", "level", "wiring", "reversed", "status", "outcome", "remedy", "travel_m", "scatter_m", "period_s",
    *(f"score_{objective}" for objective in OBJECTIVES), "simulated_s", "wall_s", "walk", "checksum",
)  # fmt: skip


def row_of(job: Job, done: Evaluation, backwards: Wiring | None) -> tuple[Any, ...]:
    """The values of `COLUMNS` for one finished walk; a measure that is not finite becomes null. The last one is their checksum.

    Raises ValueError for a time that is not finite: every walk takes some.
    """
    walk = done.walk
    measured = walk.outcome in MEASURED and math.isfinite(walk.travel_m)
    scores = [score_of(walk, objective).value if measured else None for objective in OBJECTIVES]
    values = (
        job.key,
        job.settings.text,
        job.settings.level,
        job.wiring.text(),
        None if backwards is None else backwards.text(),
        SCORED if measured else FAILED,
        walk.outcome,
        walk.remedy,
        *(_finite(v) for v in (walk.travel_m, walk.travel_scatter_m, walk.period_s)),
        *(_finite(v) for v in scores),
        _time_s(walk.simulated_s),
        _time_s(done.wall_s),
        json.dumps(record_to_json(walk), separators=(",", ":")),
    )
    return (*values, checksum(values))


def checksum(values: tuple[Any, ...]) -> int:
    """CRC-32 of a row: SQLite notices broken pages but not a digit that changed inside a row."""
    return zlib.crc32("\x1f".join(map(repr, values)).encode())


def _finite(value: float | None) -> float | None:
    """As SQLite gives it back, which knows no negative zero."""
    return value + 0.0 if value is not None and math.isfinite(value) else None


def _time_s(value: float) -> float:
    if not math.isfinite(value):
        raise ValueError(f"a walk's time must be finite, got {value}")
    return value + 0.0


def ring_checksum(run: bytes) -> int:
    """CRC-32 of a kept ring, so that a changed byte is noticed before it is read."""
    return zlib.crc32(run)


@dataclass(frozen=True)
class Row:
    """One walk as the ledger holds it."""

    key: str
    level: str
    wiring: str
    status: str
    outcome: str
    remedy: str
    walk: Walk


ROW_COLUMNS = "key, level, wiring, status, outcome, remedy, walk"


def row_from(values: tuple[Any, ...]) -> Row:
    """The row that a SELECT of `ROW_COLUMNS` gave. Raises InputError for a walk that cannot be read."""
    key, level, wiring, status, outcome, remedy, walk = values
    return Row(key, level, wiring, status, outcome, remedy, walk_from(walk))


def walk_from(text: str) -> Walk:
    """The walk that a row keeps as JSON."""
    return record_from_json(Walk, json.loads(text), name="walk")


def wiring_from_ledger(text: str) -> Wiring:
    """The wiring whose text a row keeps (written by us, so not checked again)."""
    pairs = (word.split("=") for word in text.split())
    return Wiring(tuple((inlet, source if source in (OPEN, HELD) else int(source)) for inlet, source in pairs))
