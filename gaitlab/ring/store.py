"""Solved rings as bytes, and a store of them over any mapping of bytes (a dict, a ledger's table)."""

from __future__ import annotations

import io
import json
from collections.abc import Iterator, MutableMapping
from dataclasses import fields
from typing import Any

import numpy as np

from gaitlab.errors import InputError, must
from gaitlab.ring.waves import RingRun, Waves

FORMAT = 1  # of the bytes; another number is refused, so that a changed record is solved anew and never half read
WORDS = "words"  # name of the JSON text among the arrays


def ring_run_to_bytes(run: RingRun) -> bytes:
    """A run as a compressed npz: its arrays as they are, everything else as one JSON text; no pickle. Equal runs, equal bytes."""
    arrays = {f.name: getattr(run, f.name) for f in fields(run) if isinstance(getattr(run, f.name), np.ndarray)}
    words = {f.name: getattr(run, f.name) for f in fields(run) if f.name not in arrays and f.name != "waves"}
    words["waves"] = {"period_s": run.waves.period_s, "inlets": run.waves.inlets}
    words["format"] = FORMAT
    arrays["waves_vacuum_Pa"] = run.waves.vacuum_Pa
    arrays[WORDS] = np.frombuffer(json.dumps(words, sort_keys=True).encode(), dtype=np.uint8)
    target = io.BytesIO()
    np.savez_compressed(target, allow_pickle=False, **arrays)
    return target.getvalue()


def ring_run_from_bytes(data: bytes) -> RingRun:
    """The run that `ring_run_to_bytes` wrote, bit for bit. Raises InputError for other and for damaged bytes."""
    try:
        return _run_from(*_unpacked(data))
    except InputError:
        raise
    except Exception as error:  # what a changed byte does to zip, npy, JSON or record is anybody's guess
        raise InputError(must("stored ring run", "whole", type(error).__name__, "solve it again")) from error


def _unpacked(data: bytes) -> tuple[dict[str, Any], dict[str, Any]]:
    """Words and arrays of the npz."""
    with np.load(io.BytesIO(data), allow_pickle=False) as file:
        arrays = {name: file[name] for name in file.files}
    return json.loads(arrays.pop(WORDS).tobytes()), arrays


def _run_from(words: dict[str, Any], arrays: dict[str, Any]) -> RingRun:
    if words.pop("format") != FORMAT:
        raise InputError(must("stored ring run", f"of format {FORMAT}", "another", "solve it again"))
    waves = words.pop("waves")
    vacuum = arrays.pop("waves_vacuum_Pa")
    words["details"] = tuple((name, value) for name, value in words["details"])
    return RingRun(waves=Waves(waves["period_s"], tuple(waves["inlets"]), vacuum), **words, **arrays)


class RunStore(MutableMapping[str, RingRun]):
    """Runs by the key of their load pattern, kept as bytes in `shelf`; what `ring_run` takes as `runs`."""

    def __init__(self, shelf: MutableMapping[str, bytes]) -> None:
        self.shelf = shelf

    def __getitem__(self, key: str) -> RingRun:
        return ring_run_from_bytes(self.shelf[key])

    def __setitem__(self, key: str, run: RingRun) -> None:
        self.shelf[key] = ring_run_to_bytes(run)

    def __delitem__(self, key: str) -> None:
        del self.shelf[key]

    def __iter__(self) -> Iterator[str]:
        return iter(self.shelf)

    def __len__(self) -> int:
        return len(self.shelf)
