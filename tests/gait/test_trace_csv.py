"""The CSV of a walk reads back with plain csv and holds what the trace holds."""

from __future__ import annotations

import csv
import io
from dataclasses import replace

import numpy as np

from gaitlab.gait.trace_csv import trace_csv
from tests.gait.test_trace_file import small_trace


def test_rows_and_columns() -> None:
    trace = small_trace()
    header, *rows = csv.reader(io.StringIO(trace_csv(trace)))
    assert header[:3] == ["time_s", "a vacuum_Pa", "body x_m"]
    assert header[-4:] == ["b x_m", "b y_m", "b z_m", "b load"]
    table = np.array(rows, dtype=float)
    assert table.shape == (4, 1 + 1 + 6 + 2 * 4)
    np.testing.assert_allclose(table[:, 0], trace.time_s, rtol=1e-8)
    np.testing.assert_allclose(table[:, 2:5], trace.position_m[:, 0], rtol=1e-8)
    np.testing.assert_array_equal(table[:, -1], trace.loaded[:, 1])


def test_names_that_look_like_formulas_are_not() -> None:
    text = trace_csv(replace(small_trace(), inlets=("=1+1",), feet=("-a", "b,c")))
    header = next(csv.reader(io.StringIO(text)))
    assert header[1] == "'=1+1 vacuum_Pa"
    assert "'-a x_m" in header and "b,c load" in header
