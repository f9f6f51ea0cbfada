"""A recorded walk as a file: plain numpy arrays and JSON text, nothing that could run code when it is read."""

from __future__ import annotations

import dataclasses
import io
import json
import zipfile
import zlib
from pathlib import Path
from typing import Any

import numpy as np

from gaitlab.errors import RunFolderError, must
from gaitlab.gait.records import Part, Trace

VERSION = 1
_ARRAYS = ("time_s", "position_m", "quaternion", "vacuum_Pa", "loaded", "foot_m")


def trace_bytes(trace: Trace) -> bytes:
    """The trace as the content of an .npz file (float32 for what is only drawn, so that a file stays small)."""
    about = {
        "version": VERSION,
        "parts": [dataclasses.asdict(part) for part in trace.parts],
        "inlets": list(trace.inlets),
        "feet": list(trace.feet),
        "period_s": trace.period_s,
    }
    arrays: dict[str, Any] = {name: _small(getattr(trace, name)) for name in _ARRAYS}
    buffer = io.BytesIO()
    np.savez_compressed(buffer, about=np.array(json.dumps(about)), **arrays)
    return buffer.getvalue()


def write_trace(path: Path, trace: Trace) -> None:
    """Write the trace to a file. Raises RunFolderError where it cannot be written."""
    try:
        Path(path).write_bytes(trace_bytes(trace))
    except OSError as error:
        raise RunFolderError(f"trace {Path(path).name} cannot be written: {error.strerror or error}") from error


def _small(array: np.ndarray) -> np.ndarray:
    return array.astype(np.float32) if array.dtype == np.float64 else array


def read_trace(path: Path) -> Trace:
    """Read a trace written by `write_trace`. Raises RunFolderError for a missing, damaged or unknown file."""
    try:
        with np.load(path, allow_pickle=False) as file:
            about = json.loads(str(file["about"]))
            arrays = {name: np.asarray(file[name]) for name in _ARRAYS}
    except FileNotFoundError as error:
        raise RunFolderError(
            must("trace", "an existing .npz file", Path(path).name, "run walk --save first")
        ) from error
    except (OSError, ValueError, KeyError, EOFError, RuntimeError, zipfile.BadZipFile, zlib.error) as error:
        raise RunFolderError(f"trace {Path(path).name} is damaged or no trace: {error}") from error
    return _trace(about, arrays, Path(path).name)


def _trace(about: dict[str, Any], arrays: dict[str, np.ndarray], name: str) -> Trace:
    if about.get("version") != VERSION:
        raise RunFolderError(must(f"version of trace {name}", f"{VERSION}", about.get("version"), "record it again"))
    try:
        parts = tuple(_part(part) for part in about["parts"])
        trace = Trace(
            parts=parts,
            inlets=tuple(about["inlets"]),
            feet=tuple(about["feet"]),
            period_s=float(about["period_s"]),
            **{key: _wide(value) for key, value in arrays.items()},
        )
    except (KeyError, TypeError, ValueError) as error:
        raise RunFolderError(f"trace {name} is damaged or no trace: {error}") from error
    _check_shapes(trace, name)
    return trace


def _wide(array: np.ndarray) -> np.ndarray:
    return array if array.dtype == np.bool_ else array.astype(np.float64)


def _part(saved: dict[str, Any]) -> Part:
    return Part(
        name=str(saved["name"]),
        kind=str(saved["kind"]),
        size_m=tuple(saved["size_m"]),
        offset_m=tuple(saved["offset_m"]),
        inlet=saved["inlet"],
        chain=saved["chain"],
    )


def _check_shapes(trace: Trace, name: str) -> None:
    t, p, i, f = len(trace.time_s), len(trace.parts), len(trace.inlets), len(trace.feet)
    expected = {
        "time_s": (t,),
        "position_m": (t, p, 3),
        "quaternion": (t, p, 4),
        "vacuum_Pa": (t, i),
        "loaded": (t, f),
        "foot_m": (t, f, 3),
    }
    for key, shape in expected.items():
        got = np.shape(getattr(trace, key))
        if got != shape:
            raise RunFolderError(must(f"{key} of trace {name}", f"of shape {shape}", got, "record it again"))
