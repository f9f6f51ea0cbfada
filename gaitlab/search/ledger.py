"""The ledger: every walk of a search as one row of an SQLite file, written as soon as the walk ends.

Write-ahead logging lets several searches share one ledger and keeps every committed row through a killed process; a row that is
already there wins over a second one of the same key, so that no walk is ever counted twice.
"""

from __future__ import annotations

import sqlite3
from collections.abc import Iterable, Iterator, Sequence
from contextlib import contextmanager
from pathlib import Path
from typing import Any

from gaitlab.errors import RunFolderError
from gaitlab.search.evaluate import WORKER_LOST, Evaluation, Job
from gaitlab.search.schema import COLUMNS, ROW_COLUMNS, Row, ring_checksum, row_from, row_of
from gaitlab.wiring.wiring import Wiring

LOOKUP_SIZE = 500  # keys in one query; below SQLite's oldest limit of 999 variables
RINGS_MAX = 1000  # solved rings kept, some 40 kB each; most patterns of a large space come up once; chosen by us
AGAIN = (WORKER_LOST,)  # fates that say nothing about the wiring: walked again on --resume

# A row that is there already wins; anything else that a table refuses is an error.
INSERT = (
    f"INSERT INTO walks ({', '.join(COLUMNS)}) VALUES ({', '.join('?' * len(COLUMNS))}) ON CONFLICT (key) DO NOTHING"
)
INSERT_RING = """
INSERT INTO rings SELECT ?, ?, ? WHERE (SELECT count(*) FROM rings) < ? ON CONFLICT (pattern) DO NOTHING
"""
INSERT_EQUAL = "INSERT INTO equals VALUES (?, ?) ON CONFLICT (wiring) DO NOTHING"


class Ledger:
    """One open ledger file. Close it, or use it as a context manager."""

    def __init__(self, path: Path, connection: sqlite3.Connection) -> None:
        self.path = path
        self._connection = connection

    def __enter__(self) -> Ledger:
        return self

    def __exit__(self, *_: object) -> None:
        self.close()

    def close(self) -> None:
        """Closes the file; every row is already in it."""
        self._connection.close()

    @contextmanager
    def told_plainly(self) -> Iterator[sqlite3.Connection]:
        """The connection, with what SQLite complains about said as a RunFolderError."""
        try:
            yield self._connection
        except sqlite3.DatabaseError as error:
            raise RunFolderError(_trouble(self.path, error)) from error

    def add(self, job: Job, done: Evaluation, backwards: Wiring | None) -> bool:
        """Writes one finished walk; False if the ledger had it already. Raises RunFolderError when it cannot be written."""
        with self.told_plainly() as connection:
            return connection.execute(INSERT, row_of(job, done, backwards)).rowcount == 1

    @contextmanager
    def at_once(self) -> Iterator[None]:
        """What is written inside is written all together or, where the process dies, not at all."""
        with self.told_plainly() as connection:
            connection.execute("BEGIN IMMEDIATE")
            try:
                yield
            except BaseException:
                if connection.in_transaction:
                    connection.execute("ROLLBACK")
                raise
            connection.execute("COMMIT")

    def known(self, keys: Sequence[str]) -> dict[str, Row]:
        """The rows of those keys that are there."""
        found: dict[str, Row] = {}
        for begin in range(0, len(keys), LOOKUP_SIZE):
            some = keys[begin : begin + LOOKUP_SIZE]
            query = f"SELECT {ROW_COLUMNS} FROM walks WHERE key IN ({', '.join('?' * len(some))})"
            found.update((values[0], row_from(values)) for values in self.select(query, some))
        return found

    def there(self, keys: Sequence[str]) -> set[str]:
        """Which of those keys are there, without reading their rows."""
        found: set[str] = set()
        for begin in range(0, len(keys), LOOKUP_SIZE):
            some = keys[begin : begin + LOOKUP_SIZE]
            query = f"SELECT key FROM walks WHERE key IN ({', '.join('?' * len(some))})"
            found.update(key for (key,) in self.select(query, some))
        return found

    def select(self, query: str, values: Sequence[Any] = ()) -> Iterator[tuple[Any, ...]]:
        """Rows of a query, one after the other."""
        with self.told_plainly() as connection:
            yield from connection.execute(query, values)

    def ring(self, pattern: str) -> bytes | None:
        """The run of the ring under the load pattern of that key, where it has been kept whole; None where it is damaged."""
        found = next(self.select("SELECT run, checksum FROM rings WHERE pattern = ?", (pattern,)), None)
        if found is None or not isinstance(found[0], bytes) or ring_checksum(found[0]) != found[1]:
            return None
        return found[0]

    def keep_ring(self, pattern: str, run: bytes) -> None:
        """Keeps a solved ring for other wirings of the same load pattern, up to `RINGS_MAX` of them, in place of a damaged one."""
        with self.told_plainly() as connection:
            if self.ring(pattern) is None:
                connection.execute("DELETE FROM rings WHERE pattern = ?", (pattern,))
            connection.execute(INSERT_RING, (pattern, run, ring_checksum(run), RINGS_MAX))

    def note_equals(self, pairs: Iterable[tuple[Wiring, Wiring]]) -> None:
        """Notes wirings that are equal by symmetry to the one that was walked."""
        with self.at_once():
            self._connection.executemany(INSERT_EQUAL, ((a.text(), b.text()) for a, b in pairs))

    def forget_lost(self) -> int:
        """Drops walks whose worker died, so that they are walked again; gives back how many."""
        with self.told_plainly() as connection:
            query = f"DELETE FROM walks WHERE outcome IN ({', '.join('?' * len(AGAIN))})"
            return connection.execute(query, AGAIN).rowcount

    def number_of_walks(self) -> int:
        """How many rows of walks there are."""
        ((number,),) = self.select("SELECT count(*) FROM walks")
        return int(number)


def _trouble(path: Path, error: sqlite3.DatabaseError) -> str:
    return f"ledger {path} cannot be used ({error}); nothing that was written before is lost; usual fix: {_fix(str(error))}"


def _fix(said: str) -> str:
    fixes = {
        "full": "free some space and go on with --resume",
        "readonly": "give yourself the right to write there, or choose another folder with --out",
        "locked": "wait for the other search to end",
        "constraint": "the row is none that the tables allow: keep the file and run the wiring with `gaitlab walk --debug`",
        "malformed": "keep the file aside and start anew with --out",
        "not a database": "choose another folder with --out",
    }
    return next(
        (fix for word, fix in fixes.items() if word in said), "look at the disk, or choose another folder with --out"
    )
