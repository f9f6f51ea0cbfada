"""Run folders that cannot be used: a clear message, exit code 2, and what was there stays as it was."""

from __future__ import annotations

import random
from pathlib import Path

import pytest

from tests.faults import trials
from tests.faults.harness import Search

pytestmark = pytest.mark.slow


def test_a_finished_search_is_not_overwritten_unasked(measure: Search, tmp_path: Path) -> None:
    search = trials.copied(measure, tmp_path)
    before = trials.contents(search.out)
    assert "--resume" in trials.refused(search, resume=False)
    assert trials.contents(search.out) == before


def test_a_finished_search_resumed_gives_the_same_bytes(measure: Search, tmp_path: Path) -> None:
    search = trials.copied(measure, tmp_path)
    code, _, err = search.finished()
    assert code == 0, err
    assert (search.rows(), search.ranking()) == (measure.rows(), measure.ranking())


def test_an_out_folder_that_is_a_file_or_lies_below_one(tmp_path: Path) -> None:
    search = Search(tmp_path)
    (tmp_path / "file").write_text("mine")
    for place in ("file", "file/run", "n" * 300, "file/\N{SNOWMAN}"):
        trials.refused(search, "--out", str(tmp_path / place))
    assert (tmp_path / "file").read_text() == "mine"


def test_a_ledger_of_another_version(measure: Search, tmp_path: Path) -> None:
    trials.of_another_version(trials.copied(measure, tmp_path))


@pytest.mark.parametrize("resume", [True, False])
def test_a_folder_and_a_ledger_that_may_only_be_read(measure: Search, tmp_path: Path, resume: bool) -> None:
    trials.may_only_read(trials.copied(measure, tmp_path), resume=resume)


@pytest.mark.parametrize("kilobytes", [2, 20, 60])
def test_a_disk_that_is_full(measure: Search, tmp_path: Path, kilobytes: int) -> None:
    trials.disk_full(Search(tmp_path), measure, kilobytes)


def test_a_damaged_ledger_is_refused_or_harmless_and_never_overwritten(measure: Search, tmp_path: Path) -> None:
    chance = random.Random(11)
    met = [trials.damaged(trials.copied(measure, tmp_path / str(i)), measure, chance) for i in range(15)]
    assert met.count("refused") >= 5
