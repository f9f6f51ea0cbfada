"""Opens a ledger, or says why it must not be touched: another robot's, another code's, damaged, read-only."""

from __future__ import annotations

import os
import sqlite3
from pathlib import Path

from gaitlab.errors import RunFolderError
from gaitlab.search.identity import Identity
from gaitlab.search.ledger import Ledger
from gaitlab.search.schema import COLUMNS, SCHEMA, TABLES, checksum

LEDGER_FILE = "ledger.sqlite"
BUSY_S = 30.0  # how long to wait for another search's write; chosen by us
CHECKED_BYTES = 256 * 2**20  # larger files are not read through before use; chosen by us, about two seconds


def created(path: Path, identity: Identity) -> Ledger:
    """A new, empty ledger. Raises RunFolderError if there is one or the folder cannot be written."""
    if os.path.lexists(path):
        raise RunFolderError(
            f"{path} is there already; usual fix: go on with --resume, or choose another folder with --out"
        )
    try:
        path.parent.mkdir(parents=True, exist_ok=True)
        connection = _connected(path)
        connection.execute("BEGIN IMMEDIATE")
        for statement in filter(None, map(str.strip, TABLES.split(";"))):
            connection.execute(statement)
        connection.executemany("INSERT INTO meta VALUES (?, ?)", _meta(identity).items())
        connection.execute("COMMIT")
    except (OSError, sqlite3.DatabaseError) as error:
        raise RunFolderError(
            f"ledger {path} cannot be made ({error}); usual fix: choose another folder with --out"
        ) from error
    return Ledger(path, connection)


def reopened(path: Path, identity: Identity) -> Ledger:
    """The ledger that is there, ready for more rows.

    Raises RunFolderError, with nothing changed, when it belongs to another robot or to other code, is damaged or read-only.
    """
    if not os.path.isfile(path):
        raise RunFolderError(f"{path} is not there, so nothing can be resumed; usual fix: leave out --resume")
    if not (os.access(path, os.W_OK) and os.access(path.parent, os.W_OK)):
        raise RunFolderError(_read_only(path, "no right to write"))
    _refuse_damage(path)
    found = _found_meta(path)
    if found is None:
        raise RunFolderError(
            f"{path} is an SQLite file but no ledger of gaitlab; usual fix: choose another folder with --out"
        )
    _refuse_others(path, found, _meta(identity))
    _refuse_changed_rows(path)
    try:
        connection = _connected(path)
        connection.execute("BEGIN IMMEDIATE")
        connection.execute("ROLLBACK")
    except sqlite3.DatabaseError as error:
        raise RunFolderError(_read_only(path, str(error))) from error
    return Ledger(path, connection)


def _read_only(path: Path, why: str) -> str:
    return f"ledger {path} cannot be written ({why}); usual fix: give yourself the right to write there, or copy the folder"


def _connected(path: Path) -> sqlite3.Connection:
    """In WAL mode with commits at every statement; NORMAL keeps all commits through a killed process (not a power cut)."""
    connection = sqlite3.connect(path, timeout=BUSY_S, isolation_level=None)
    connection.execute("PRAGMA journal_mode = WAL")
    connection.execute("PRAGMA synchronous = NORMAL")
    return connection


def _meta(identity: Identity) -> dict[str, str]:
    return {
        "schema": str(SCHEMA),
        "robot": identity.robot_name,
        "robot_hash": identity.robot_hash,
        "code_version": identity.code_version,
    }


def _refuse_damage(path: Path) -> None:
    try:
        connection = sqlite3.connect(f"{path.absolute().as_uri()}?mode=ro", uri=True, timeout=BUSY_S)
        try:
            connection.execute("SELECT count(*) FROM sqlite_schema").fetchone()
            small = path.stat().st_size <= CHECKED_BYTES
            verdict = connection.execute("PRAGMA integrity_check(1)").fetchone()[0] if small else "ok"
        finally:
            connection.close()
    except sqlite3.DatabaseError as error:
        verdict = str(error)
    except (ValueError, TypeError) as error:  # text that is no UTF-8 any more
        verdict = f"unreadable text: {error}"
    if verdict != "ok":
        raise _damaged(path, verdict)


def _refuse_changed_rows(path: Path) -> None:
    """Compares every row with its checksum, in a ledger small enough to be read through."""
    if path.stat().st_size > CHECKED_BYTES:
        return
    connection = sqlite3.connect(f"{path.absolute().as_uri()}?mode=ro", uri=True, timeout=BUSY_S)
    try:
        for number, (*values, kept) in enumerate(
            connection.execute(f"SELECT {', '.join(COLUMNS)} FROM walks"), start=1
        ):
            if checksum(tuple(values)) != kept:
                raise _damaged(path, f"walk {number} differs from its checksum")
    except (sqlite3.DatabaseError, UnicodeError) as error:
        raise _damaged(path, str(error)) from error
    finally:
        connection.close()


def _damaged(path: Path, verdict: str) -> RunFolderError:
    return RunFolderError(
        f"ledger {path} is damaged or no ledger ({verdict}); nothing was changed; "
        "usual fix: keep the file aside and start anew with --out"
    )


def _found_meta(path: Path) -> dict[str, str] | None:
    connection = sqlite3.connect(f"{path.absolute().as_uri()}?mode=ro", uri=True, timeout=BUSY_S)
    try:
        return dict(connection.execute("SELECT name, value FROM meta"))
    except (sqlite3.DatabaseError, UnicodeError):
        return None
    finally:
        connection.close()


def _refuse_others(path: Path, found: dict[str, str], wanted: dict[str, str]) -> None:
    reasons = {
        "schema": "has tables of layout {found}, this version writes layout {wanted}",
        "robot_hash": "holds walks of another robot or of a changed robot file (hash {found}, now {wanted})",
        "code_version": "was walked with other code of the models (version {found}, now {wanted})",
    }
    for name, reason in reasons.items():
        if found.get(name) != wanted[name]:
            text = reason.format(found=found.get(name, "unknown"), wanted=wanted[name])
            raise RunFolderError(
                f"ledger {path} {text}; walks of both must not mix, nothing was changed; "
                "usual fix: choose another folder with --out"
            )
