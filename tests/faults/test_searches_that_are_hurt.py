"""Faults during a search, with real processes: nothing lost, nothing doubled, no orphan process, the same ranking in the end."""

from __future__ import annotations

import random
from pathlib import Path

import pytest

from tests.faults import trials
from tests.faults.harness import Search

pytestmark = pytest.mark.slow


@pytest.mark.parametrize("chain", range(4))
def test_killed_at_random_moments(tmp_path: Path, measure: Search, chain: int) -> None:
    """Twenty kills, five in each ledger."""
    trials.killed_in_a_row(Search(tmp_path), measure, random.Random(chain), times=5)


def test_ctrl_c_at_random_moments(tmp_path: Path, measure: Search) -> None:
    trials.interrupted_in_a_row(Search(tmp_path), measure, random.Random(5), times=5)


def test_ended_by_the_system(tmp_path: Path, measure: Search) -> None:
    trials.ended_by_the_system(Search(tmp_path), measure, random.Random(6))


def test_workers_are_killed_one_after_the_other(tmp_path: Path, measure: Search) -> None:
    assert trials.workers_killed(Search(tmp_path), measure, random.Random(7)) >= 2


def test_workers_that_run_out_of_memory(tmp_path: Path, measure: Search) -> None:
    trials.starved(Search(tmp_path, settings={"GAITLAB_TEST_KIND": "starved"}), measure)


def test_two_searches_share_one_ledger(tmp_path: Path, measure: Search) -> None:
    trials.two_at_once(Search(tmp_path), measure, random.Random(8))


def test_a_wall_clock_that_jumps(tmp_path: Path, measure: Search) -> None:
    trials.clock_jumps(Search(tmp_path, settings={"GAITLAB_TEST_CLOCK": "jumps"}), measure)


def test_a_walk_that_blew_up_never_reaches_the_ranking(tmp_path: Path) -> None:
    assert trials.blown_up(Search(tmp_path, settings={"GAITLAB_TEST_KIND": "blown_up"})) > 20
