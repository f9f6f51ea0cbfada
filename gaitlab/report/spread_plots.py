"""What the tolerances do: intervals of travel for each finalist, and which numbers the travel hangs on."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from matplotlib.figure import Figure

from gaitlab.report.paper import broken_label
from gaitlab.report.run_folder import Spread
from gaitlab.report.style import BLUE, INK, MUTED, bare, new_figure, styled
from gaitlab.trust.sensitivity import Sensitivity

MM = 1e3
SENSITIVITIES_SHOWN = 12
LABEL_MM, LABEL_PT, LINE_MM = 52.0, 8.0, 3.6


def spread_plot(spread: Spread, *, title: str = "Spread over the tolerances") -> Figure:
    """p05 to p95 of travel [mm per period] with the median, one line per wiring, with its chances beside it."""
    with styled():
        labels = [broken_label(row.wiring.text(), width_mm=LABEL_MM, size_pt=LABEL_PT) for row in spread.wirings]
        figure = new_figure(170, 45 + sum(10 + LINE_MM * label.count("\n") for label in labels))
        ax = figure.subplots()
        for y, row in enumerate(spread.wirings):
            travel = row.summary.travel_m
            ax.plot([MM * travel.p05, MM * travel.p95], [y, y], color=BLUE, lw=5, alpha=0.45, solid_capstyle="butt")
            ax.plot(MM * travel.p50, y, marker="o", ms=7, mfc="white", mec=BLUE, mew=1.8)
            best = (
                f"best {100 * row.summary.best.share:.0f} %\n" if len(spread.wirings) > 1 else ""
            )  # alone: of nothing
            chances = f"{best}forward {100 * row.summary.forward.share:.0f} %"
            ax.text(1.01, y, chances, transform=ax.get_yaxis_transform(), va="center", fontsize=8, color=INK)
        ax.axvline(0.0, color=MUTED, lw=0.8)
        ax.set_yticks(range(len(spread.wirings)), labels, fontsize=LABEL_PT)
        ax.set_ylim(len(spread.wirings) - 0.4, -0.6)
        ax.set_xlabel(f"travel (mm per period): p05, p50, p95 of {spread.draws} draws")
        ax.set_ylabel("wiring (inlet=output)")
        ax.set_title(title)
        bare(ax, grid="x")
    return figure


def sensitivity_bars(sensitivities: Sequence[Sensitivity], *, title: str = "Measure these first") -> Figure:
    """Share of the variance of travel [%] that each number of the robot file explains, largest at the top."""
    rows = sorted(sensitivities, key=lambda item: -item.share)[:SENSITIVITIES_SHOWN]
    with styled():
        figure = new_figure(160, 34 + 7.5 * len(rows))
        ax = figure.subplots()
        errors = [[100 * (row.share - row.low) for row in rows], [100 * (row.high - row.share) for row in rows]]
        ax.barh(
            range(len(rows)),
            [100 * row.share for row in rows],
            xerr=np.maximum(errors, 0.0),
            height=0.6,
            color=BLUE,
            edgecolor=INK,
            lw=0.6,
            error_kw={"ecolor": INK, "capsize": 2.5, "lw": 1.0},
        )
        ax.set_yticks(range(len(rows)), [row.name for row in rows])
        ax.set_ylim(len(rows) - 0.4, -0.6)
        ax.set_xlim(left=0)
        ax.set_xlabel("share of the variance of travel (%),\nwhisker: 90 % interval")
        ax.set_ylabel("number in the robot file")
        ax.set_title(title)
        bare(ax, grid="x")
    return figure
