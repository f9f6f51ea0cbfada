"""A run folder reads back as what was written, and says what is wrong with one that cannot be read."""

from __future__ import annotations

import json
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from gaitlab.errors import RunFolderError
from gaitlab.report.run_folder import read_run
from tests.report import synthetic


def _changed(folder: Path, change: Callable[[dict[str, Any]], object]) -> None:
    file = folder / "run.json"
    data = json.loads(file.read_text(encoding="utf-8"))
    change(data)
    file.write_text(json.dumps(data), encoding="utf-8")


def test_a_run_comes_back_as_written(run_folder: Path) -> None:
    run = read_run(run_folder)
    assert run.robot.name == "tray_row5"
    assert len(run.ranking) == 24
    assert run.best.wiring == synthetic.BEST
    assert run.best.walk == synthetic.walk(travel_m=0.0112)
    np.testing.assert_array_equal(run.ring.output_vacuum_Pa, synthetic.ring_run(synthetic.BEST).output_vacuum_Pa)
    assert run.trace is not None and run.reversed_trace is not None
    assert run.spread is not None and run.spread.wirings[0].summary.best.share == 0.71
    assert run.gaps == ()


def test_a_folder_without_a_run(tmp_path: Path) -> None:
    with pytest.raises(RunFolderError, match=r"holds no run \(no run.json\)"):
        read_run(tmp_path)


def test_a_folder_that_is_none(tmp_path: Path) -> None:
    with pytest.raises(RunFolderError, match="run folder must be a folder"):
        read_run(tmp_path / "nowhere")


def test_a_search_that_has_not_ended(tmp_path: Path) -> None:
    (tmp_path / "ledger.sqlite").write_bytes(b"")
    with pytest.raises(RunFolderError, match="the search has not ended"):
        read_run(tmp_path)


def test_a_file_that_was_cut_off(own_folder: Path) -> None:
    file = own_folder / "run.json"
    file.write_bytes(file.read_bytes()[:5000])
    with pytest.raises(RunFolderError, match=r"was cut off or is no JSON .*--resume"):
        read_run(own_folder)


@pytest.mark.parametrize("layout", [0, 2, "1"])
def test_a_run_of_another_version(own_folder: Path, layout: object) -> None:
    _changed(own_folder, lambda data: data.update(layout=layout, gaitlab="0.0.7"))
    with pytest.raises(RunFolderError, match=r"must be of layout 1, got layout .* written by gaitlab 0.0.7"):
        read_run(own_folder)


@pytest.mark.parametrize("text", ["[]", '{"a": 1}', "3"])
def test_json_that_is_no_run(own_folder: Path, text: str) -> None:
    (own_folder / "run.json").write_text(text, encoding="utf-8")
    with pytest.raises(RunFolderError, match="is not the record of a search"):
        read_run(own_folder)


@pytest.mark.parametrize("key", ["ranking", "rings", "robot", "search", "created"])
def test_a_missing_key_is_named(own_folder: Path, key: str) -> None:
    _changed(own_folder, lambda data: data.pop(key))
    with pytest.raises(RunFolderError, match=f"incomplete or damaged .*{key}"):
        read_run(own_folder)


def test_an_empty_ranking(own_folder: Path) -> None:
    _changed(own_folder, lambda data: data.update(ranking=[]))
    with pytest.raises(RunFolderError, match="no wiring has walked yet"):
        read_run(own_folder)


def test_a_ring_that_was_not_saved(own_folder: Path) -> None:
    _changed(own_folder, lambda data: data["rings"].update(best=None))
    with pytest.raises(RunFolderError, match=r"rings\.best must be a JSON object"):
        read_run(own_folder)


def test_what_is_not_needed_may_be_missing(own_folder: Path) -> None:
    _changed(own_folder, lambda data: (data.pop("spread"), data.pop("rechecks"), data["rings"].pop("reversed")))
    (own_folder / "traces" / "best.npz").unlink()
    (own_folder / "traces" / "reversed.npz").write_bytes(b"no archive")
    run = read_run(own_folder)
    assert run.spread is None and run.rechecks == () and run.reversed_ring is None
    assert run.trace is None and run.reversed_trace is None
    assert "traces/best.npz is not there" in run.gaps[0]
    assert "traces/reversed.npz cannot be read" in run.gaps[1]
