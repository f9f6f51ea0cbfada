"""Reads a robot file: TOML in, one checked `Robot` in SI units out, every fault with its place and usual fix."""

from __future__ import annotations

import json
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

from gaitlab.robot.build import record_of
from gaitlab.robot.checks import check_robot
from gaitlab.robot.faults import FaultError
from gaitlab.robot.lines import line_of
from gaitlab.robot.paths import check_tolerances
from gaitlab.robot.records import Robot
from gaitlab.robot.shorthand import as_written, expanded
from gaitlab.robot.source import document_from_file
from gaitlab.robot.suspicions import suspicions

# Tables that say how a robot is reported or searched, not what it does.
UNDECIDING = ("name", "notes", "tolerance", "search")


@dataclass(frozen=True)
class RobotFile:
    """A robot file as read: its text and document as they stand, the checked robot, and named warnings."""

    path: Path
    text: str
    document: dict[str, Any]
    robot: Robot
    warnings: tuple[str, ...]


def read_robot(path: str | Path) -> RobotFile:
    """The robot that the file at `path` describes.

    Raises RobotFileError with file, line, table, key, rule, value and usual fix.
    """
    path = Path(path)
    text, document = document_from_file(path)
    try:
        robot = robot_from_document(document, source=str(path))
    except FaultError as error:
        raise FaultError(error.fault, str(path), line_of(text, error.fault.place)) from None
    return RobotFile(path, text, document, robot, suspicions(robot))


def robot_from_document(document: dict[str, Any], *, source: str = "robot") -> Robot:
    """The robot of a TOML document (or of one with changed numbers); `source` names it in messages.

    Raises RobotFileError for the first rule that is broken.
    """
    try:
        robot: Robot = record_of(Robot, expanded(document), ())
        check_robot(robot)
        check_tolerances(robot, document)
    except FaultError as error:
        written = replace(error.fault, place=as_written(document, error.fault.place))
        raise FaultError(written, source) from None
    return robot


def canonical_document(document: dict[str, Any]) -> str:
    """JSON of what decides a result, the same text for the same robot: keys sorted, name and notes left out.

    >>> canonical_document({"name": "x", "ring": {"stages": 5.0}})
    '{"ring":{"stages":5}}'
    """
    deciding = {key: value for key, value in document.items() if key not in UNDECIDING}
    return json.dumps(_plain(deciding), sort_keys=True, separators=(",", ":"), allow_nan=False)


def _plain(value: Any) -> Any:
    if isinstance(value, dict):
        return {key: _plain(item) for key, item in value.items()}
    if isinstance(value, list | tuple):
        return [_plain(item) for item in value]
    if isinstance(value, float) and value.is_integer():
        return int(value)
    return value
