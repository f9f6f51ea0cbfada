"""What decides a result, as one hash: robot, engine and numerics, length of walk, the code that decides a row and its libraries."""

from __future__ import annotations

import hashlib
import importlib.metadata
from dataclasses import dataclass
from functools import cache
from pathlib import Path
from typing import Any

import gaitlab
from gaitlab.robot.reader import canonical_document
from gaitlab.search.settings import WalkSettings
from gaitlab.wiring.wiring import Wiring

# The code that decides what a row of the ledger says; a change in a report or in a strategy must not throw walks away.
DECIDING_PACKAGES = ("robot", "air", "ring", "body", "wiring", "gait")
DECIDING_MODULES = (
    "record_json.py",
    "search/coarse.py",
    "search/evaluate.py",
    "search/objective.py",
    "search/schema.py",
    "search/settings.py",
)
DECIDING_LIBRARIES = ("numpy", "scipy", "pybullet")
DECIDING_LIBRARY_OF_ENGINE = {"mujoco": "mujoco"}


@cache
def code_version() -> str:
    """Hash of the sources that decide a row and of the versions of the libraries they stand on."""
    digest = hashlib.sha256()
    root = Path(gaitlab.__file__).parent
    for source in deciding_sources(root):
        digest.update(source.relative_to(root).as_posix().encode() + b"\0" + source.read_bytes() + b"\0")
    for library in DECIDING_LIBRARIES:
        digest.update(f"{library} {importlib.metadata.version(library)}\0".encode())
    return digest.hexdigest()[:16]


def deciding_sources(root: Path) -> list[Path]:
    """The files below the package's folder `root` on which a row hangs, in a fixed order."""
    packages = [source for package in DECIDING_PACKAGES for source in sorted((root / package).rglob("*.py"))]
    return packages + [root / module for module in DECIDING_MODULES]


def robot_hash(document: dict[str, Any]) -> str:
    """Hash of what decides a result in a robot file; the name and notes do not."""
    return hashlib.sha256(canonical_document(document).encode()).hexdigest()[:16]


@dataclass(frozen=True)
class Identity:
    """Whose walks a ledger holds: the robot by name and hash, and the code they were walked with."""

    robot_name: str
    robot_hash: str
    code_version: str

    @classmethod
    def of(cls, document: dict[str, Any]) -> Identity:
        """The identity of this robot under the code that is running."""
        return cls(str(document["name"]), robot_hash(document), code_version())

    def key(self, wiring: Wiring, settings: WalkSettings) -> str:
        """Name of one walk: the same for the same numbers, on any machine with the same code."""
        digest = _digest(self, settings).copy()
        digest.update(wiring.text().encode())
        return digest.hexdigest()


@cache
def _digest(identity: Identity, settings: WalkSettings) -> hashlib._Hash:
    """The hash of all that the walks of one search have in common."""
    parts = (identity.robot_hash, identity.code_version, _libraries(settings.engine), settings.text, settings.level)
    return hashlib.sha256("".join(part + "\0" for part in parts).encode())


@cache
def _libraries(engine: str) -> str:
    library = DECIDING_LIBRARY_OF_ENGINE.get(engine)
    return "" if library is None else f"{library} {importlib.metadata.version(library)}"
