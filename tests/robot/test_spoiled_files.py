"""Thousands of spoiled robot files: each ends in one clean message or in a robot that can be summed up."""

from __future__ import annotations

import math
import random
import resource
import signal
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, note, seed, settings
from hypothesis import strategies as st

from gaitlab.cli.check_command import summary
from gaitlab.cli.output import json_text
from gaitlab.errors import GaitlabError
from gaitlab.robot.reader import canonical_document, read_robot, robot_from_document
from tests.robot.mutations import BYTE_WAYS, DOCUMENT_WAYS, TEXT_WAYS, spoiled_bytes

CHAINS = 4
FILES = 1500  # in each chain
HANG_S = 5  # a file that takes longer counts as a hang and ends the test
MEMORY_MAX = 500 * 2**20


class Hang(BaseException):
    """The reader was kept busy too long; no `except` of ours may take it for a fault of the file."""


@contextmanager
def no_hang() -> Iterator[None]:
    def stop(*_: object) -> None:
        raise Hang(f"a robot file kept the reader busy for {HANG_S} s")

    before = signal.signal(signal.SIGALRM, stop)
    signal.alarm(HANG_S)
    try:
        yield
    finally:
        signal.alarm(0)
        signal.signal(signal.SIGALRM, before)


def judged(path: Path) -> str:
    """'robot', or the message that refused the file; anything else is an error of ours and is raised."""
    try:
        file = read_robot(path)
        facts = summary(file)
    except GaitlabError as refusal:
        text = str(refusal)
        assert text.isprintable() and len(text) < 2_000
        assert "must" in text or "usual fix" in text
        return text
    assert facts["ok"] and 0 < facts["wirings"]["distinct"] <= facts["wirings"]["raw"]
    assert math.isfinite(facts["mass_g"])
    assert "null" not in json_text(facts)
    assert robot_from_document(file.document) == file.robot
    assert canonical_document(file.document)
    return "robot"


def peak_memory() -> int:
    """The most memory that this process ever held [bytes]."""
    return resource.getrusage(resource.RUSAGE_SELF).ru_maxrss * 1024


@pytest.mark.parametrize("chain", range(CHAINS))
def test_spoiled_files_end_in_a_clean_message_or_a_robot(tmp_path: Path, chain: int) -> None:
    verdicts: list[str] = []
    peak_before = peak_memory()

    @seed(chain)
    @settings(max_examples=FILES, deadline=None, database=None, suppress_health_check=list(HealthCheck))
    @given(chance=st.randoms(use_true_random=False))
    def tried(chance: random.Random) -> None:
        data = spoiled_bytes(lambda options: chance.choice(list(options)))
        note(repr(data[:20_000]))
        path = tmp_path / "spoiled.toml"
        path.write_bytes(data)
        with no_hang():
            verdicts.append(judged(path))

    tried()
    assert len(verdicts) >= FILES
    robots = verdicts.count("robot")
    assert robots >= FILES // 50, "some changes are harmless"
    assert len(verdicts) - robots >= FILES // 2, "most are not"
    rules = {text.split(" must ")[-1].split(", got")[0][:40] for text in verdicts}
    assert len(rules) >= 50, "and they break many rules"
    assert peak_memory() - peak_before < MEMORY_MAX


def test_every_way_of_spoiling_is_of_its_own() -> None:
    ways = {way.__name__ for way in (*DOCUMENT_WAYS, *TEXT_WAYS, *BYTE_WAYS)}
    assert len(ways) >= 25
