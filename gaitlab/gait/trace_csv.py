"""A recorded walk as CSV: one row for each instant, plain SI numbers, for spreadsheets and other programs."""

from __future__ import annotations

import csv
import io

import numpy as np

from gaitlab.gait.motion import FloatArray, attitude
from gaitlab.gait.records import Trace

AXES = ("x", "y", "z")


def trace_csv(trace: Trace) -> str:
    """Time [s], vacuum of each inlet [Pa], place [m] and attitude [rad] of the root block, place and load of each foot.

    The header names the unit; `load` is 1 while a foot carries weight. Fields are quoted where they must be, and a name that
    a spreadsheet would take for a formula gets a quote before it.
    """
    table = io.StringIO()
    writer = csv.writer(table, lineterminator="\n")
    writer.writerow([_safe(name) for name in _header(trace)])
    writer.writerows([f"{value:.9g}" for value in row] for row in _rows(trace))
    return table.getvalue()


def _header(trace: Trace) -> list[str]:
    vacuum = [f"{inlet} vacuum_Pa" for inlet in trace.inlets]
    body = [f"body {axis}_m" for axis in AXES] + ["body yaw_rad", "body pitch_rad", "body roll_rad"]
    feet = [f"{foot} {what}" for foot in trace.feet for what in (*(f"{axis}_m" for axis in AXES), "load")]
    return ["time_s", *vacuum, *body, *feet]


def _rows(trace: Trace) -> FloatArray:
    yaw, pitch, roll = attitude(trace.quaternion[:, 0])
    body = np.column_stack([trace.position_m[:, 0], np.unwrap(yaw), pitch, roll])
    feet = np.concatenate([trace.foot_m, trace.loaded[..., None].astype(np.float64)], axis=2)
    return np.column_stack([trace.time_s, trace.vacuum_Pa, body, feet.reshape(len(trace.time_s), -1)])


def _safe(name: str) -> str:
    return "'" + name if name[:1] in "=+-@" else name
