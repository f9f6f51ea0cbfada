"""The ranking of a ledger: best first, ties marked, each wiring beside its reversed wave; rows are never all held at once."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from itertools import islice

from gaitlab.gait.records import Walk
from gaitlab.search.ledger import Ledger
from gaitlab.search.objective import Score, score_of, tied
from gaitlab.search.schema import walk_from, wiring_from_ledger
from gaitlab.search.settings import SETTLED, WalkSettings
from gaitlab.wiring.smooth import SmoothWaves
from gaitlab.wiring.wiring import Wiring

# One line per wiring: its settled walk if there is one, else its longest short one, which is placed after all settled ones.
PLACES = """
CREATE TEMP TABLE places AS
    SELECT CASE status WHEN 'scored' THEN row_number() OVER (ORDER BY status DESC, level <> 'settled', {score} DESC, wiring) END
        AS rank, id, wiring, reversed
    FROM (
        SELECT rowid AS id, status, wiring, reversed, level, {score}, row_number() OVER (
            PARTITION BY wiring ORDER BY level <> 'settled', CAST(level AS INTEGER) DESC
        ) AS nth
        FROM walks WHERE settings = ?
    ) WHERE nth = 1
"""

PLACED = """
SELECT p.rank, w.level, w.wiring, w.walk, r.rank, rw.walk
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
    """One place of the ranking. `settled` is false for a wiring that was only screened by a short walk.

    `smooth`: 1 or −1 for a smooth wave (see `SmoothWaves`), else 0. The reversed wave's fields are None where it was not walked.
    """

    rank: int
    wiring: Wiring
    walk: Walk
    score: Score
    settled: bool
    tied_with_best: bool
    smooth: int
    reversed_wiring: Wiring | None
    reversed_rank: int | None
    reversed_walk: Walk | None


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

    def __iter__(self) -> Iterator[Ranked]:
        """Every place, best first."""
        return self._places()

    def _places(self, only: str = "", values: Sequence[str] = ()) -> Iterator[Ranked]:
        best: Score | None = None
        if only:
            best = next((place.score for place in self), None)
        for rank, level, wiring, walk, reversed_rank, reversed_walk in self._ledger.select(
            PLACED.format(only=only), values
        ):
            place = self._ranked(rank, level, wiring, walk, best)
            best = best or place.score
            backwards = self._waves.space.reversed(place.wiring)
            yield _with_reverse(place, backwards, reversed_rank, reversed_walk)

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

    def simulated_s(self) -> float:
        """Simulated time of all walks."""
        query = "SELECT total(simulated_s) FROM walks WHERE settings = ?"
        return float(next(self._ledger.select(query, (self._settings.text,)))[0])

    def _ranked(self, rank: int, level: str, wiring_text: str, walk_text: str, best: Score | None) -> Ranked:
        wiring, walk = wiring_from_ledger(wiring_text), walk_from(walk_text)
        score = score_of(walk, self._objective)
        settled = level == SETTLED
        return Ranked(
            rank=rank,
            wiring=wiring,
            walk=walk,
            score=score,
            settled=settled,
            tied_with_best=settled and (best is None or tied(score, best)),
            smooth=self._waves.direction(wiring),
            reversed_wiring=None,
            reversed_rank=None,
            reversed_walk=None,
        )


def _with_reverse(place: Ranked, backwards: Wiring | None, rank: int | None, walk_text: str | None) -> Ranked:
    walk = None if walk_text is None else walk_from(walk_text)
    return replace(place, reversed_wiring=backwards, reversed_rank=rank, reversed_walk=walk)
