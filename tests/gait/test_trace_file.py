"""A trace comes back as it was written; a damaged file is refused by name."""

from __future__ import annotations

import json
from pathlib import Path

import numpy as np
import pytest

from gaitlab.errors import RunFolderError
from gaitlab.gait.records import Part, Trace
from gaitlab.gait.trace_file import read_trace, write_trace


def small_trace() -> Trace:
    rng = np.random.default_rng(5)
    return Trace(
        parts=(
            Part("trunk", "box", (0.16, 0.03, 0.012), (0.0, 0.0, 0.0), None, None),
            Part("ä<b>", "capsule", (0.006, 0.008, 0.0), (0.0, 0.0, -0.004), "a", "a"),
        ),
        inlets=("a",),
        feet=("a", "b"),
        period_s=0.71,
        time_s=np.linspace(0.0, 1.0, 4),
        position_m=rng.normal(size=(4, 2, 3)),
        quaternion=rng.normal(size=(4, 2, 4)),
        vacuum_Pa=1e4 * rng.random(size=(4, 1)),
        loaded=np.array([[True, False]] * 4),
        foot_m=rng.normal(size=(4, 2, 3)),
    )


def test_round_trip(tmp_path: Path) -> None:
    trace = small_trace()
    write_trace(tmp_path / "t.npz", trace)
    back = read_trace(tmp_path / "t.npz")
    assert (back.parts, back.inlets, back.feet, back.period_s) == (trace.parts, trace.inlets, trace.feet, 0.71)
    for name in ("time_s", "position_m", "quaternion", "vacuum_Pa", "loaded", "foot_m"):
        np.testing.assert_allclose(getattr(back, name), getattr(trace, name), rtol=1e-6)
    assert back.loaded.dtype == np.bool_


def test_nothing_in_the_file_needs_unpickling(tmp_path: Path) -> None:
    write_trace(tmp_path / "t.npz", small_trace())
    with np.load(tmp_path / "t.npz", allow_pickle=False) as file:
        assert all(file[name].dtype != object for name in file.files)


def test_missing_truncated_and_foreign_files_are_refused(tmp_path: Path) -> None:
    with pytest.raises(RunFolderError, match=r"existing \.npz file"):
        read_trace(tmp_path / "none.npz")
    write_trace(tmp_path / "t.npz", small_trace())
    data = (tmp_path / "t.npz").read_bytes()
    (tmp_path / "cut.npz").write_bytes(data[: len(data) // 2])
    with pytest.raises(RunFolderError, match=r"cut.npz is damaged"):
        read_trace(tmp_path / "cut.npz")
    np.savez(tmp_path / "other.npz", x=np.zeros(3))
    with pytest.raises(RunFolderError, match=r"other.npz is damaged or no trace"):
        read_trace(tmp_path / "other.npz")


def rewritten(path: Path, target: Path, **changes: np.ndarray) -> None:
    with np.load(path, allow_pickle=False) as file:
        np.savez(target, **({name: file[name] for name in file.files} | changes))


def test_another_version_and_wrong_shapes_are_named(tmp_path: Path) -> None:
    write_trace(tmp_path / "t.npz", small_trace())
    rewritten(tmp_path / "t.npz", tmp_path / "old.npz", about=np.array(json.dumps({"version": 0})))
    with pytest.raises(RunFolderError, match=r"version of trace old.npz must be 1, got 0"):
        read_trace(tmp_path / "old.npz")
    rewritten(tmp_path / "t.npz", tmp_path / "bent.npz", foot_m=np.zeros((4, 1, 3)))
    with pytest.raises(RunFolderError, match=r"foot_m of trace bent.npz must be of shape \(4, 2, 3\)"):
        read_trace(tmp_path / "bent.npz")


def test_an_unwritable_place_is_named(tmp_path: Path) -> None:
    with pytest.raises(RunFolderError, match="cannot be written"):
        write_trace(tmp_path / "no" / "t.npz", small_trace())
