"""Reads the folder that a search leaves behind; every picture, sheet and page starts from this record.

`run.json` (written by `gaitlab.search.run_record`) is one JSON object, SI units, records as `gaitlab.record_json` writes them::

    layout      1, raised when an older reader would misread the folder
    gaitlab     version that wrote it
    versions    {"python": …, "pybullet": …, "numpy": …, …}
    created     ISO 8601 time, UTC
    command     the command line as typed
    finished    false when the search was cut short (Ctrl-C, budget): the ranking is what was known
    robot       {"path": file name, "text": the file as read, "document": the parsed TOML}
    search      {"strategy", "objective", "raw", "distinct", "evaluated", "failed": {outcome: n}, "simulated_s", "wall_s", "seed"}
    ranking     best first: [{"wiring": {inlet: source}, "rank", "tied_with_best", "settled", "smooth", "walk": Walk,
                "reversed_wiring": {…} | null, "reversed_rank": n | null, "reversed_walk": Walk | null}]
    rings       {"best": RingRun, "reversed": RingRun | null}
    rechecks    [{"name", "order_kept": true | false | null, "travel_m": best wiring's travel, "note"}]       (may be absent)
    spread      {"draws", "seed", "wirings": [{"wiring": {…}, "summary": trust.summary.WiringSummary}],
                "sensitivities": [trust.sensitivity.Sensitivity]} | null                                         (may be absent)

Beside it `traces/best.npz` and `traces/reversed.npz` (`gaitlab.gait.trace_file`); a missing trace costs its pictures only.
"""

from __future__ import annotations

import json
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from gaitlab.errors import InputError, RunFolderError
from gaitlab.gait.records import Trace, Walk
from gaitlab.record_json import record_from_json
from gaitlab.ring.waves import RingRun
from gaitlab.robot.reader import robot_from_document
from gaitlab.robot.records import Robot
from gaitlab.trust.sensitivity import Sensitivity
from gaitlab.trust.summary import WiringSummary
from gaitlab.wiring.wiring import Wiring

LAYOUT = 1
RUN_FILE = "run.json"
AGAIN = "run `gaitlab search ROBOT --out FOLDER` to make one"


@dataclass(frozen=True)
class RankedWiring:
    """One line of the ranking: a wiring, how it walked, and the same with the wave reversed where that was run.

    `settled` is false for a wiring that was only screened by a short or coarse walk; `smooth` is 1 or −1 for an evenly spaced wave.
    """

    wiring: Wiring
    rank: int
    tied_with_best: bool
    walk: Walk
    reversed_wiring: Wiring | None
    reversed_rank: int | None
    reversed_walk: Walk | None
    settled: bool = True
    smooth: int = 0


@dataclass(frozen=True)
class SearchFacts:
    """What the search did: how many wirings there are, how many walked, what failed and what it cost."""

    strategy: str
    objective: str
    raw: int
    distinct: int
    evaluated: int
    failed: tuple[tuple[str, int], ...]
    simulated_s: float
    wall_s: float


@dataclass(frozen=True)
class Recheck:
    """One recheck of the finalists: whether their order held, and the best wiring's travel in it."""

    name: str
    order_kept: bool | None
    travel_m: float
    note: str


@dataclass(frozen=True)
class WiringSpread:
    """How one wiring does over the tolerances."""

    wiring: Wiring
    summary: WiringSummary


@dataclass(frozen=True)
class Spread:
    """Tolerance draws of the finalists and what they hang on most."""

    draws: int
    wirings: tuple[WiringSpread, ...]
    sensitivities: tuple[Sensitivity, ...]


@dataclass(frozen=True)
class SavedRun:
    """A run folder as read: the robot, the search, the ranking, the rings, and what is there of traces, rechecks and spread."""

    folder: Path
    version: str
    created: str
    command: str
    finished: bool
    robot_path: str
    robot_text: str
    robot: Robot
    search: SearchFacts
    ranking: tuple[RankedWiring, ...]
    ring: RingRun
    reversed_ring: RingRun | None
    trace: Trace | None
    reversed_trace: Trace | None
    rechecks: tuple[Recheck, ...]
    spread: Spread | None
    gaps: tuple[str, ...]

    @property
    def best(self) -> RankedWiring:
        """The first line of the ranking."""
        return self.ranking[0]


def read_run(folder: str | Path) -> SavedRun:
    """The run kept in `folder`. What is missing but not needed is told in `gaps`.

    Raises RunFolderError for a folder that holds no run, one of another layout, and one that was cut off half-way.
    """
    path = Path(folder)
    data = _run_json(path)
    try:
        return _saved_run(path, data)
    except (InputError, LookupError, TypeError, AttributeError, ValueError, ArithmeticError) as error:
        raise RunFolderError(
            f"{path / RUN_FILE} is incomplete or damaged ({error}); usual fix: finish it with `gaitlab search … --resume`"
        ) from error


def _run_json(folder: Path) -> dict[str, Any]:
    file = folder / RUN_FILE
    if not folder.is_dir():
        raise RunFolderError(f"run folder must be a folder, got '{folder}'; usual fix: {AGAIN}")
    if not file.is_file():
        raise RunFolderError(_no_run_text(folder))
    try:
        data = json.loads(file.read_text(encoding="utf-8"))
    except (ValueError, RecursionError) as error:  # no UTF-8, no JSON, or nested without end
        raise RunFolderError(
            f"{file} was cut off or is no JSON ({error}); usual fix: finish it with `gaitlab search … --resume`"
        ) from error
    if not isinstance(data, dict) or "layout" not in data:
        raise RunFolderError(f"{file} is not the record of a search (no key 'layout'); usual fix: {AGAIN}")
    if data["layout"] != LAYOUT:
        raise RunFolderError(_layout_text(file, data))
    return data


def _no_run_text(folder: Path) -> str:
    if (folder / "ledger.sqlite").is_file():
        return (
            f"{folder} holds a ledger but no {RUN_FILE}: the search has not ended; "
            "usual fix: wait for it or finish it with `gaitlab search … --resume`"
        )
    return f"{folder} holds no run (no {RUN_FILE}); usual fix: {AGAIN}"


def _layout_text(file: Path, data: Mapping[str, Any]) -> str:
    return (
        f"{file} must be of layout {LAYOUT}, got layout {data['layout']!r} written by gaitlab {data.get('gaitlab', '?')}; "
        "usual fix: run the search again with this version (`--resume` reuses its ledger where nothing has changed)"
    )


def _saved_run(folder: Path, data: Mapping[str, Any]) -> SavedRun:
    ranking = tuple(_ranked(row, f"ranking[{i}]") for i, row in enumerate(data["ranking"]))
    if not ranking:
        raise InputError("the ranking is empty: no wiring has walked yet")
    rings = data["rings"]
    trace, reversed_trace, gaps = _traces(folder)
    robot = data["robot"]
    return SavedRun(
        folder=folder,
        version=str(data["gaitlab"]),
        created=str(data["created"]),
        command=str(data["command"]),
        finished=bool(data["finished"]),
        robot_path=str(robot["path"]),
        robot_text=str(robot["text"]),
        robot=robot_from_document(robot["document"], source=str(robot["path"])),
        search=_search_facts(data["search"]),
        ranking=ranking,
        ring=record_from_json(RingRun, rings["best"], name="rings.best"),
        reversed_ring=_optional(RingRun, rings.get("reversed"), "rings.reversed"),
        trace=trace,
        reversed_trace=reversed_trace,
        rechecks=tuple(record_from_json(Recheck, item, name="rechecks") for item in data.get("rechecks") or ()),
        spread=_spread(data.get("spread")),
        gaps=gaps,
    )


def _optional(kind: type[Any], data: Any, name: str) -> Any:
    return None if data is None else record_from_json(kind, data, name=name)


def _wiring(data: Mapping[str, Any] | None) -> Wiring | None:
    return None if data is None else Wiring.of(data)


def _ranked(row: Mapping[str, Any], name: str) -> RankedWiring:
    return RankedWiring(
        wiring=Wiring.of(row["wiring"]),
        rank=int(row["rank"]),
        tied_with_best=bool(row["tied_with_best"]),
        walk=record_from_json(Walk, row["walk"], name=f"{name}.walk"),
        reversed_wiring=_wiring(row.get("reversed_wiring")),
        reversed_rank=row.get("reversed_rank"),
        reversed_walk=_optional(Walk, row.get("reversed_walk"), f"{name}.reversed_walk"),
        settled=bool(row.get("settled", True)),
        smooth=int(row.get("smooth", 0)),
    )


def _search_facts(data: Mapping[str, Any]) -> SearchFacts:
    failed = tuple(sorted((str(k), int(v)) for k, v in data["failed"].items()))
    return record_from_json(SearchFacts, {**data, "failed": failed}, name="search")


def _spread(data: Mapping[str, Any] | None) -> Spread | None:
    if not data:
        return None
    rows = tuple(
        WiringSpread(
            wiring=Wiring.of(row["wiring"]),
            summary=record_from_json(WiringSummary, row["summary"], name="spread.summary"),
        )
        for row in data["wirings"]
    )
    shares = tuple(record_from_json(Sensitivity, item, name="sensitivities") for item in data["sensitivities"])
    return Spread(int(data["draws"]), rows, shares)


def _traces(folder: Path) -> tuple[Trace | None, Trace | None, tuple[str, ...]]:
    best, best_gap = _trace(folder / "traces" / "best.npz")
    backward, backward_gap = _trace(folder / "traces" / "reversed.npz")
    return best, backward, tuple(gap for gap in (best_gap, backward_gap) if gap)


def _trace(file: Path) -> tuple[Trace | None, str]:
    from gaitlab.gait.trace_file import read_trace

    if not file.is_file():
        return None, f"traces/{file.name} is not there: its moving pictures are left out"
    try:
        return read_trace(file), ""
    except (InputError, RunFolderError, OSError, KeyError, ValueError) as error:
        return None, f"traces/{file.name} cannot be read ({error}): its moving pictures are left out"
