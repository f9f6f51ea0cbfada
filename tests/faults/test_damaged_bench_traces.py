"""Bench logs that were damaged, mixed up or never were any: one clean message, or a rhythm that is read."""

from __future__ import annotations

import math
import random
from pathlib import Path

import numpy as np
import pytest

from gaitlab.errors import GaitlabError
from gaitlab.trust.trace_csv import read_traces
from gaitlab.trust.trace_reading import read_rhythm
from tests.robot.mutations import BYTE_WAYS, TEXT_WAYS, utf8
from tests.robot.test_spoiled_files import no_hang

TRIALS = 600
INLETS = ("a", "b", "c", "d", "e")
CELLS = ["", "nan", "inf", "-inf", "x", "1e999", "-5", "1e30", "0", "101.4", "5,5", '"', "'", "\x00", "٣", "=1+1", "#"]


def log(periods: int = 5, stages: int = 5) -> str:
    """A made-up bench log: smooth waves a stage lag apart, 40 samples a period."""
    header = ",".join(["time_s", *(f"stage_{k}_kPa" for k in range(1, stages + 1)), "supply_kPa"])
    rows = []
    for i in range(40 * periods):
        phases = [i / 40 - k * 0.6 for k in range(stages)]
        rows.append(
            ",".join(f"{x:.4f}" for x in (i * 0.02, *(25 + 20 * math.sin(2 * math.pi * p) for p in phases), 50))
        )
    return "\n".join([header, *rows]) + "\n"


def spoiled_log(chance: random.Random) -> bytes:
    lines = log(chance.choice([1, 3, 5])).split("\n")
    for _ in range(chance.choice([0, 1, 1, 5])):
        at = chance.randrange(len(lines) - 1)
        cells = lines[at].split(",")
        cells[chance.randrange(len(cells))] = chance.choice(CELLS)
        lines[at] = ",".join(chance.choice([cells, cells, cells[:-1], [*cells, "7"]]))
    text = "\n".join(lines)

    def pick(options: object) -> object:
        return chance.choice(list(options))  # type: ignore[call-overload]

    for way in chance.choice([[], [], [pick(TEXT_WAYS)]]):
        text = way(text, pick)  # type: ignore[operator]
    return bytes(pick([*[utf8] * 6, *BYTE_WAYS])(text, pick))  # type: ignore[operator]


def judged(path: Path) -> str:
    try:
        reading = read_rhythm(read_traces(path, stages=5, inlets=INLETS))
    except GaitlabError as refusal:
        assert len(str(refusal)) < 2_000 and "\x1b" not in str(refusal)
        return "message"
    assert reading.outcome
    return "read"


def test_spoiled_logs(tmp_path: Path) -> None:
    chance = random.Random(4)
    met = []
    for _ in range(TRIALS):
        path = tmp_path / "log.csv"
        path.write_bytes(spoiled_log(chance))
        with no_hang():
            met.append(judged(path))
    assert min(met.count("message"), met.count("read")) > TRIALS // 10


def test_logs_of_noise_and_of_nothing(tmp_path: Path) -> None:
    chance = np.random.default_rng(1)
    for rows in (0, 1, 2, 5, 200):
        path = tmp_path / "log.csv"
        values = np.cumsum(np.abs(chance.normal(size=(rows, 2))), axis=0)
        lines = ["time_s,stage_1_kPa", *(f"{t},{min(v, 90)}" for t, v in values)]
        path.write_text("\n".join(lines), encoding="utf-8")
        assert judged(path) in ("message", "read")


@pytest.mark.parametrize("name", ["/dev/zero", ".", "none.csv", "a\0b"])
def test_what_is_no_log(name: str) -> None:
    with no_hang():
        assert judged(Path(name)) == "message"


def test_a_log_of_a_hundred_megabytes_is_refused_without_reading_it_all(tmp_path: Path) -> None:
    path = tmp_path / "huge.csv"
    with path.open("wb") as file:
        file.truncate(10**11)
    with no_hang():
        assert judged(path) == "message"
