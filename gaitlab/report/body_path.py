"""The path of the body from above, and the feet over time: a foot that carries weight and still moves is slipping."""

from __future__ import annotations

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from gaitlab.gait.records import Trace
from gaitlab.report.style import BLUE, INK, MUTED, ORANGE, bare, new_figure, styled

MM = 1e3


def body_path(trace: Trace, *, title: str = "Path from above") -> Figure:
    """Above: path of the first block's centre [mm] and the feet's tracks, thick orange where a loaded foot slid.

    Below: how far forward each foot is against time; a standing foot without slip is a level line.
    """
    with styled():
        figure = new_figure(170, 150)
        above, along = figure.subplots(2, 1, height_ratios=[1.0, 1.35])
        _draw_feet_above(above, trace)
        _draw_trunk(above, trace)
        above.set_title(title, pad=20)
        _draw_feet_along(along, trace)
        along.set_title("Feet over time")
    return figure


def _draw_trunk(ax: Axes, trace: Trace) -> None:
    x, y = MM * trace.position_m[:, 0, 0], MM * trace.position_m[:, 0, 1]
    ax.plot(x, y, color=BLUE, lw=1.8, label="body")
    stops = np.arange(trace.time_s[0], trace.time_s[-1] + 1e-9, trace.period_s)
    at_x, at_y = np.interp(stops, trace.time_s, x), np.interp(stops, trace.time_s, y)
    ax.plot(at_x, at_y, ls="", marker="o", ms=4.5, mfc="white", mec=BLUE, label="body, every period")
    ax.annotate("", xy=(x[-1], y[-1]), xytext=(x[-2], y[-2]), arrowprops={"arrowstyle": "-|>", "color": INK})
    ax.set_xlabel("forward x (mm)")
    ax.set_ylabel("left y (mm)")
    ax.set_aspect("equal", adjustable="datalim")
    ax.legend(loc="lower right", bbox_to_anchor=(1.0, 1.0), ncols=3, borderaxespad=0.2)
    bare(ax, grid="both")


def _draw_feet_above(ax: Axes, trace: Trace) -> None:
    for column, foot in enumerate(trace.feet):
        track = MM * trace.foot_m[:, column, :2]
        sliding = np.where(trace.loaded[:, column, None], track, np.nan)
        label = "foot under load" if column == 0 else None
        ax.plot(track[:, 0], track[:, 1], color=MUTED, lw=0.5, alpha=0.6, zorder=1)
        ax.plot(sliding[:, 0], sliding[:, 1], color=ORANGE, lw=2.2, solid_capstyle="round", label=label)
        ax.annotate(foot, track[0], textcoords="offset points", xytext=(0, 8), ha="center", fontsize=8, color=MUTED)


def _draw_feet_along(ax: Axes, trace: Trace) -> None:
    for column, foot in enumerate(trace.feet):
        x = MM * trace.foot_m[:, column, 0]
        ax.plot(trace.time_s, x, color=MUTED, lw=0.7)
        ax.plot(trace.time_s, np.where(trace.loaded[:, column], x, np.nan), color=ORANGE, lw=2.6)
        ax.text(trace.time_s[-1], x[-1], f"  {foot}", va="center", fontsize=8, color=INK)
    for stop in np.arange(trace.time_s[0], trace.time_s[-1] + 1e-9, trace.period_s):
        ax.axvline(stop, color=MUTED, lw=0.6, ls=":")
    ax.set_xlabel("time since the gait began (s), dotted: whole periods")
    ax.set_ylabel("forward x of foot (mm)")
    bare(ax, grid="y")
