"""The ranking as bars: travel with its scatter, ties, and the reversed wave beside each wiring; the whole field below."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.patches import Patch
from matplotlib.ticker import MaxNLocator

from gaitlab.report.paper import broken_label
from gaitlab.report.run_folder import RankedWiring
from gaitlab.report.style import BLUE, INK, MUTED, ORANGE, RULE, SKY, bare, new_figure, styled

MM = 1e3
ROWS_SHOWN = 15
ROW_MM = 7.0
LABEL_MM, LABEL_PT, LINE_MM = 62.0, 8.0, 3.6


def ranking_bars(ranking: Sequence[RankedWiring], *, limit: int = ROWS_SHOWN, title: str = "Ranking") -> Figure:
    """Travel per period [mm] of the best `limit` wirings, with the standard deviation between periods.

    Hatched bars are tied with the best, hollow ones were only screened by a short or coarse walk; diamonds are the same wirings
    with the wave reversed. The strip below shows every wiring that walked, in order of rank.
    """
    shown = list(ranking[:limit])
    with styled():
        labels = [broken_label(row.wiring.text(), width_mm=LABEL_MM, size_pt=LABEL_PT) for row in shown]
        height = sum(ROW_MM + LINE_MM * label.count("\n") for label in labels)
        figure = new_figure(170, 78 + height)
        bars, field = figure.subplots(2, 1, height_ratios=[24 + height, 34])
        _draw_bars(bars, shown, labels)
        bars.set_title(f"{title}: best {len(shown)} of {len(ranking)}", pad=22)
        _draw_field(field, ranking)
    return figure


def _draw_bars(ax: Axes, rows: Sequence[RankedWiring], labels: Sequence[str]) -> None:
    shared = sum(row.tied_with_best for row in rows) > 1  # the best alone is tied with nobody
    for y, row in enumerate(rows):
        _draw_one(ax, y, row, tied=shared and row.tied_with_best)
    ax.axvline(0.0, color=INK, lw=0.8)
    ax.set_yticks(
        range(len(rows)),
        [f"{label}   {row.rank:>2}" for label, row in zip(labels, rows, strict=True)],
        fontsize=LABEL_PT,
    )
    ax.set_ylim(len(rows) - 0.4, -0.6)
    ax.set_xlabel("travel (mm per period), whisker: scatter between periods")
    ax.set_ylabel("wiring (inlet=output), rank")
    handles = _legend(screened=not all(row.settled for row in rows))
    ax.legend(handles=handles, loc="lower right", bbox_to_anchor=(1.0, 1.0), ncols=len(handles), borderaxespad=0.2)
    bare(ax, grid="x")


def _draw_one(ax: Axes, y: int, row: RankedWiring, *, tied: bool) -> None:
    travel, scatter = MM * row.walk.travel_m, MM * row.walk.travel_scatter_m
    face, edge = (SKY if tied else BLUE, INK) if row.settled else ("white", BLUE)
    ax.barh(y, travel, height=0.62, color=face, edgecolor=edge, lw=0.6, hatch="////" if tied else None)
    if np.isfinite(scatter):
        ax.errorbar(travel, y, xerr=scatter, color=INK, capsize=2.5, lw=1.0)
    if row.reversed_walk is not None and np.isfinite(row.reversed_walk.travel_m):
        ax.plot(MM * row.reversed_walk.travel_m, y, marker="D", ms=5, mfc="white", mec=ORANGE, mew=1.4, ls="")
    if row.smooth:
        end = MM * max(row.walk.travel_m, 0.0 if row.reversed_walk is None else row.reversed_walk.travel_m, 0.0)
        ax.annotate("smooth wave", (end, y), (8, 0), textcoords="offset points", va="center", fontsize=7, color=MUTED)


def _legend(*, screened: bool) -> list[object]:
    from matplotlib.lines import Line2D

    reversed_mark = Line2D([], [], marker="D", ls="", mfc="white", mec=ORANGE, mew=1.4, label="wave reversed")
    return [
        Patch(facecolor=BLUE, edgecolor=INK, label="travel"),
        Patch(facecolor=SKY, edgecolor=INK, hatch="////", label="tied with the best"),
        *([Patch(facecolor="white", edgecolor=BLUE, label="screened only")] if screened else []),
        reversed_mark,
    ]


def _draw_field(ax: Axes, ranking: Sequence[RankedWiring]) -> None:
    ranks = [row.rank for row in ranking]
    travel = [MM * row.walk.travel_m for row in ranking]
    ax.vlines(ranks, 0.0, travel, color=RULE, lw=1.0)
    faces = [BLUE if row.settled else "white" for row in ranking]
    ax.scatter(ranks, travel, s=7, c=faces, edgecolors=BLUE, linewidths=0.6, zorder=2)
    ax.axhline(0.0, color=INK, lw=0.8)
    ax.set_xlabel("rank (–), every wiring that walked")
    ax.set_ylabel("travel (mm\nper period)")
    ax.set_xlim(0.3, max(ranks) + 0.7)
    ax.xaxis.set_major_locator(MaxNLocator(integer=True))
    ax.tick_params(axis="x", colors=MUTED)
    bare(ax, grid="y")
