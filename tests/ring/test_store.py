"""Runs as bytes and back, and a store of them over any mapping."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import fields

import numpy as np
import pytest

from gaitlab.errors import InputError
from gaitlab.ring import store
from gaitlab.ring.sequence import ideal_run
from gaitlab.ring.solve import ring_run
from gaitlab.ring.waves import RingRun
from tests.ring.robots import in_order, tray


def ideal() -> RingRun:
    return ideal_run(tray(), in_order(tray()), "natural", 1.0, 50e3)


def assert_equal(one: RingRun, other: RingRun) -> None:
    for field in fields(one):
        a, b = getattr(one, field.name), getattr(other, field.name)
        if isinstance(a, np.ndarray):
            assert a.dtype == b.dtype and a.tobytes() == b.tobytes()
        elif field.name == "waves":
            assert (a.period_s, a.inlets) == (b.period_s, b.inlets)
            assert a.vacuum_Pa.tobytes() == b.vacuum_Pa.tobytes()
        else:
            assert a == b or (np.isnan(a) and np.isnan(b))


def test_bytes_and_back() -> None:
    """Bit for bit, nan and all; equal runs make equal bytes."""
    run = ideal()
    assert_equal(store.ring_run_from_bytes(store.ring_run_to_bytes(run)), run)
    assert store.ring_run_to_bytes(run) == store.ring_run_to_bytes(ideal())


def test_bytes_of_another_format_are_refused(monkeypatch: pytest.MonkeyPatch) -> None:
    """An older layout is solved again, never half read."""
    monkeypatch.setattr(store, "FORMAT", 0)
    old = store.ring_run_to_bytes(ideal())
    monkeypatch.undo()
    with pytest.raises(InputError, match="format"):
        store.ring_run_from_bytes(old)


@pytest.mark.parametrize(
    "damage", [lambda data: b"junk", lambda data: data[:-40], lambda data: data[:300] + b"?" * 9 + data[309:]]
)
def test_damaged_bytes_are_refused_without_a_word_of_other_formats(damage: Callable[[bytes], bytes]) -> None:
    with pytest.raises(InputError, match="stored ring run must be whole") as told:
        store.ring_run_from_bytes(damage(store.ring_run_to_bytes(ideal())))
    assert "pickle" not in str(told.value)


def test_a_store_keeps_what_was_solved() -> None:
    """Solved once, found again in the shelf's bytes, and the run that comes back is the same."""
    shelf: dict[str, bytes] = {}
    runs = store.RunStore(shelf)
    first = ring_run(tray(), in_order(tray()), runs=runs)
    assert len(runs) == 1 and list(runs) == list(shelf)
    again = ring_run(tray(), in_order(tray()).turned(0, 5), runs=store.RunStore(shelf))
    assert_equal(again, first)
    del runs[next(iter(runs))]
    assert not shelf
