"""The footfall chart: which foot stands when over the period, with duty factors."""

from __future__ import annotations

from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.patches import Patch

from gaitlab.gait.records import Walk
from gaitlab.report.phases import Interval, unrolled
from gaitlab.report.style import BLUE, INK, MUTED, RULE, bare, new_figure, styled

PERIODS_SHOWN = 2
ROW_MM = 8.0
FRAME_MM = 34.0


def footfall_chart(walk: Walk, reversed_walk: Walk | None = None, *, title: str = "Footfalls") -> Figure:
    """Stance of every foot against phase over two periods; the reversed wave below where it is given.

    Dark bars are stance (foot loaded), the light line is swing; at the right the duty factor, the loaded share of a period.
    """
    walks = [(title, walk)] + ([("The same wiring, wave reversed", reversed_walk)] if reversed_walk else [])
    height = sum(FRAME_MM + ROW_MM * max(len(w.stance), 1) for _, w in walks)
    with styled():
        figure = new_figure(150, height)
        axes = figure.subplots(len(walks), 1, squeeze=False)[:, 0]
        for ax, (name, one) in zip(axes, walks, strict=True):
            draw_footfalls(ax, one)
            ax.set_title(name, pad=16)
    return figure


def draw_footfalls(ax: Axes, walk: Walk, *, periods: int = PERIODS_SHOWN) -> None:
    """The chart itself on `ax`, first foot at the top."""
    duty = dict(walk.duty_factor)
    for row, (foot, stance) in enumerate(walk.stance):
        _draw_row(ax, row, list(stance), periods)
        share = duty.get(foot)
        ax.text(periods + 0.03, row, "–" if share is None else f"{share:.2f}", va="center", fontsize=8.5)
    names = [foot for foot, _ in walk.stance]
    ax.set_yticks(range(len(names)), names)
    ax.set_ylim(len(names) - 0.4, -0.6)
    ax.set_xlim(0, periods)
    ax.set_xlabel("phase (periods)")
    ax.set_ylabel("foot (inlet)")
    ax.text(periods + 0.03, -0.75, "duty factor (–)", va="bottom", ha="left", fontsize=8, color=MUTED, clip_on=False)
    ax.set_xticks([i / 4 for i in range(4 * periods + 1)], minor=True)
    ax.set_xticks(range(periods + 1))
    ax.legend(
        handles=[Patch(facecolor=BLUE, edgecolor=INK, label="stance"), Patch(facecolor=RULE, label="swing")],
        loc="lower right",
        bbox_to_anchor=(1.0, 1.0),
        ncols=2,
        borderaxespad=0.2,
    )
    bare(ax, grid="x")


def _draw_row(ax: Axes, row: int, stance: list[Interval], periods: int) -> None:
    ax.broken_barh([(0, periods)], (row - 0.06, 0.12), color=RULE)
    bars = [(low, high - low) for low, high in unrolled(stance, periods)]
    ax.broken_barh(bars, (row - 0.32, 0.64), facecolor=BLUE, edgecolor=INK, linewidth=0.6)
