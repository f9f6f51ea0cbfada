"""The ranking of a ledger: best first, ties marked, each wiring beside its reversed wave; rows are never all held at once."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from functools import cached_property
from itertools import islice
from typing import Any

from gaitlab.gait.records import Walk
from gaitlab.search.ledger import Ledger
from gaitlab.search.objective import Score, scatter_of, tied
from gaitlab.search.schema import walk_from, wiring_from_ledger
from gaitlab.search.settings import COARSE, SETTLED, WalkSettings
from gaitlab.wiring.smooth import SmoothWaves
from gaitlab.wiring.wiring import Wiring

# One line per wiring: its settled walk if there is one, else its longest short one, else its coarse one, placed in this order too.
PLACES = """
CREATE TEMP TABLE places AS
    SELECT CASE status WHEN 'scored' THEN row_number() OVER (
        ORDER BY status DESC, level <> 'settled', level = 'coarse', {score} DESC, wiring
    ) END
        AS rank, id, wiring, reversed
    FROM (
        SELECT rowid AS id, status, wiring, reversed, level, {score}, row_number() OVER (
            PARTITION BY wiring ORDER BY level <> 'settled', CAST(level AS INTEGER) DESC
        ) AS nth
        FROM walks WHERE settings = ?
    ) WHERE nth = 1
"""

PLACED = """
SELECT p.rank, w.level, w.wiring, w.walk, w.{score}, w.travel_m, w.scatter_m, w.period_s, p.reversed, r.rank, rw.walk, rw.level
FROM places p JOIN walks w ON w.rowid = p.id
LEFT JOIN places r ON r.wiring = p.reversed AND r.rank IS NOT NULL LEFT JOIN walks rw ON rw.rowid = r.id
WHERE p.rank IS NOT NULL {only} ORDER BY p.rank
"""

FAILED = """
SELECT w.wiring, w.level, w.outcome, w.remedy FROM places p JOIN walks w ON w.rowid = p.id
WHERE p.rank IS NULL ORDER BY p.wiring
"""


@dataclass(frozen=True)
class Ranked:
    """One place of the ranking. `level` is that of its walk: not ``settled`` for a wiring that was only screened.

    `smooth`: 1 or −1 for a smooth wave (see `SmoothWaves`), else 0. `reversed_wiring` is None where the limits forbid it,
    the reversed wave's other fields where it was not walked. Walks are kept as their JSON and read when asked for.
    """

    rank: int
    wiring: Wiring
    walk_json: str
    score: Score
    level: str
    tied_with_best: bool
    smooth: int
    reversed_wiring: Wiring | None
    reversed_rank: int | None
    reversed_walk_json: str | None
    reversed_level: str | None

    @property
    def settled(self) -> bool:
        """Whether its walk went on until the travel had settled."""
        return self.level == SETTLED

    @cached_property
    def walk(self) -> Walk:
        """How it walked."""
        return walk_from(self.walk_json)

    @cached_property
    def reversed_walk(self) -> Walk | None:
        """How its reversed wave walked."""
        return None if self.reversed_walk_json is None else walk_from(self.reversed_walk_json)


@dataclass(frozen=True)
class Failure:
    """A wiring without a place: by which name its walk ended, and what to do."""

    wiring: Wiring
    level: str
    outcome: str
    remedy: str


class Ranking:
    """The places of one ledger under one objective and one set of walk settings."""

    def __init__(self, ledger: Ledger, waves: SmoothWaves, objective: str, settings: WalkSettings) -> None:
        self._ledger, self._waves, self._objective, self._settings = ledger, waves, objective, settings
        with ledger.told_plainly() as connection:
            connection.execute("DROP TABLE IF EXISTS temp.places")
            connection.execute(PLACES.format(score=f"score_{objective}"), (settings.text,))
            connection.execute("CREATE INDEX temp.places_by_wiring ON places (wiring)")
            connection.execute("CREATE INDEX temp.places_by_rank ON places (rank)")

    def __iter__(self) -> Iterator[Ranked]:
        """Every place, best first."""
        return self._places()

    def _places(self, only: str = "", values: Sequence[str] = ()) -> Iterator[Ranked]:
        best: Score | None = None
        if only:
            best = next((place.score for place in self), None)
        query = PLACED.format(only=only, score=f"score_{self._objective}")
        for values_of_place in self._ledger.select(query, values):
            place = self._ranked(values_of_place, best)
            best = best or place.score
            yield place

    def first(self, number: int) -> list[Ranked]:
        """The first places."""
        return list(islice(self, number))

    def of(self, wirings: Sequence[Wiring]) -> list[Ranked]:
        """The places of these wirings as far as they have one, best first."""
        if not wirings:
            return []
        only = f"AND p.wiring IN ({', '.join('?' * len(wirings))})"
        return list(self._places(only, [wiring.text() for wiring in wirings]))

    def smooth(self) -> list[Ranked]:
        """The places of the smooth waves that were walked, best first."""
        return self.of(self._waves.wirings())

    def failures(self) -> Iterator[Failure]:
        """Every wiring that has no place because its walk failed."""
        for wiring, level, outcome, remedy in self._ledger.select(FAILED):
            yield Failure(wiring_from_ledger(wiring), level, outcome, remedy)

    def failed(self) -> dict[str, int]:
        """Number of failures by outcome."""
        counts: dict[str, int] = {}
        for failure in self.failures():
            counts[failure.outcome] = counts.get(failure.outcome, 0) + 1
        return counts

    def evaluated(self) -> int:
        """Number of distinct wirings that were walked, failed ones included."""
        query = "SELECT count(DISTINCT wiring) FROM walks WHERE settings = ?"
        return int(next(self._ledger.select(query, (self._settings.text,)))[0])

    def walks(self) -> int:
        """Number of walks of those wirings; one that was walked short and then until it settled counts twice."""
        query = "SELECT count(*) FROM walks WHERE settings = ?"
        return int(next(self._ledger.select(query, (self._settings.text,)))[0])

    def coarse(self) -> int:
        """Number of coarse ones among those walks."""
        query = f"SELECT count(*) FROM walks WHERE settings = ? AND level = '{COARSE}'"
        return int(next(self._ledger.select(query, (self._settings.text,)))[0])

    def simulated_s(self) -> float:
        """Simulated time of all walks."""
        query = "SELECT total(simulated_s) FROM walks WHERE settings = ?"
        return float(next(self._ledger.select(query, (self._settings.text,)))[0])

    def _ranked(self, values: tuple[Any, ...], best: Score | None) -> Ranked:
        rank, level, text, walk, value, travel_m, scatter_m, period_s, backwards, *reverse = values
        reversed_rank, reversed_walk, reversed_level = reverse
        score = self._score(value, travel_m, scatter_m, period_s)
        wiring = wiring_from_ledger(text)
        return Ranked(
            rank=rank,
            wiring=wiring,
            walk_json=walk,
            score=score,
            level=level,
            tied_with_best=level == SETTLED and (best is None or tied(score, best)),
            smooth=self._waves.direction(wiring),
            reversed_wiring=None if backwards is None else wiring_from_ledger(backwards),
            reversed_rank=reversed_rank,
            reversed_walk_json=reversed_walk,
            reversed_level=reversed_level,
        )

    def _score(self, *values: float | None) -> Score:
        """The score and its scatter from the row's numbers, null meaning nan."""
        value, travel_m, scatter_m, period_s = (math.nan if v is None else v for v in values)
        return Score(value, scatter_of(self._objective, value, travel_m, scatter_m, period_s))
