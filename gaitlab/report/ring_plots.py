"""Pictures of the ring: its waves in ring order above the same waves in time order, and one inverter's curve."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from numpy.typing import NDArray

from gaitlab.report.style import BLUE, INK, MUTED, ORANGE, RULE, bare, new_figure, styled

FloatArray = NDArray[np.float64]
KPA = 1e3
WIDTH_MM = 180.0
STRIP_MM = (11.0, 4.0)  # height of one output's strip: few stages, many stages
STRIPS_WIDE = 9  # up to so many stages get the high strip
PERIODS = 2


@dataclass(frozen=True)
class WavePicture:
    """What the wave picture shows: vacuum (N, K) of one period, phases (N,), period, supply (K,), and each output's switch
    levels: the vacuum at which the next valve takes hold and at which it lets go, both (N,) [Pa gauge]."""

    vacuum_Pa: FloatArray
    phase: FloatArray
    period_s: float
    supply_Pa: FloatArray
    hold_Pa: FloatArray
    release_Pa: FloatArray


def ring_waves(picture: WavePicture, *, title: str) -> Figure:
    """Two periods of every output, stacked: above in ring order 1…N, below in the order in which they evacuate.

    In ring order each wave lies half a period and a little against the one above it; every second one nearly in step. In
    time order the same waves step evenly. The grey band of each strip is between the two switch levels; dots mark
    evacuation edges.
    """
    stages = len(picture.phase)
    strip = STRIP_MM[0] if stages <= STRIPS_WIDE else STRIP_MM[1]
    with styled():
        figure = new_figure(WIDTH_MM, 2.0 * strip * stages + 42.0)
        upper, lower = figure.subplots(2, 1, sharex=True)
        order = list(range(stages))
        _stack(upper, picture, order)
        _stack(lower, picture, sorted(order, key=lambda k: (picture.phase[k], k)))
        upper.set_title("Ring order: each stage against the one before it")
        lower.set_title("Time order: the same waves as they follow one another")
        lower.set_xlabel("time (s)")
        for axes in (upper, lower):
            axes.set_ylabel("output")
        figure.suptitle(title, x=0.01, ha="left", fontsize=11, fontweight="bold")
        _scale(upper, picture)
        _scale(lower, picture)
        figure.supxlabel(_key(picture), x=0.01, ha="left", fontsize=7.5)
    return figure


def _stack(axes: Axes, picture: WavePicture, order: Sequence[int]) -> None:
    """One strip for each output, the first of `order` on top; a strip is one full supply vacuum high."""
    full = _full(picture)
    time = np.arange(PERIODS * picture.supply_Pa.size + 1) / picture.supply_Pa.size * picture.period_s
    marks = []
    for place, output in enumerate(order):
        base = len(order) - 1 - place
        wave = _repeated(picture.vacuum_Pa[output]) / full
        low, high = sorted((picture.release_Pa[output] / full, picture.hold_Pa[output] / full))
        axes.fill_between(time, base, base + wave, color=BLUE, alpha=0.16, lw=0)
        axes.fill_between(time[[0, -1]], base + low, base + high, color=MUTED, alpha=0.35, lw=0)
        axes.plot(time, base + _repeated(picture.supply_Pa) / full, color=MUTED, lw=0.7, ls=(0, (1, 2)))
        axes.plot(time, base + wave, color=BLUE, lw=1.4)
        axes.axhline(base, color=RULE, lw=0.8, zorder=0)
        marks.append((float(picture.phase[output]), base + 0.5 * (wave.min() + wave.max())))
    _mark_edges(axes, marks, picture.period_s)
    axes.set_yticks([len(order) - 0.55 - k for k in range(len(order))], [str(k + 1) for k in order])
    axes.tick_params(axis="y", length=0)
    axes.set_ylim(-0.05, len(order) + 0.02)
    axes.set_xlim(0.0, PERIODS * picture.period_s)
    bare(axes, grid="x")
    axes.spines["left"].set_visible(False)


def _mark_edges(axes: Axes, marks: Sequence[tuple[float, float]], period_s: float) -> None:
    """Dots on every evacuation edge, and a line from each stage's edge to that of the stage below it, in the first period."""
    for turn in range(PERIODS + 1):
        axes.plot([(phase + turn) * period_s for phase, _ in marks], [y for _, y in marks], "o", color=ORANGE, ms=3.5)
    axes.plot([phase * period_s for phase, _ in marks], [y for _, y in marks], color=ORANGE, lw=0.9, ls="--")


def _scale(axes: Axes, picture: WavePicture) -> None:
    """A scale in kPa on the right of the top strip; every strip has the same."""
    full, top = _full(picture), len(picture.phase) - 1
    peak = float(picture.vacuum_Pa.max())
    right = axes.secondary_yaxis("right")
    right.set_yticks([top, top + peak / full], ["0 kPa", f"{peak / KPA:.0f} kPa"])
    right.tick_params(length=3, labelsize=7.5)
    right.spines["right"].set_visible(False)


def _full(picture: WavePicture) -> float:
    """Vacuum [Pa] that fills the height of a strip."""
    return 1.12 * max(float(picture.supply_Pa.max()), float(picture.vacuum_Pa.max()))


def _key(picture: WavePicture) -> str:
    """What the picture's marks are, with the vacuums they stand for."""
    hold, release = picture.hold_Pa.mean() / KPA, picture.release_Pa.mean() / KPA
    return (
        f"blue: gauge vacuum at the output, peak {picture.vacuum_Pa.max() / KPA:.1f} kPa.  "
        f"dotted: supply, mean {picture.supply_Pa.mean() / KPA:.1f} kPa.  dots: evacuation edges.\n"
        f"grey band: below it ({release:.1f} kPa) the next valve lets go, above it ({hold:.1f} kPa) it takes hold.\n"
        "dashed: from each strip's edge to the next strip's, first period."
    )


def _repeated(wave: FloatArray) -> FloatArray:
    return np.append(np.tile(wave, PERIODS), wave[0])


@dataclass(frozen=True)
class CurvePicture:
    """What the inverter picture shows: control and the output as it rises and falls (K,), levels and switch points [Pa gauge]."""

    control_Pa: FloatArray
    rising_Pa: FloatArray
    falling_Pa: FloatArray
    low_Pa: float
    high_Pa: float
    switch_in_Pa: float
    switch_out_Pa: float


def inverter_picture(picture: CurvePicture, *, title: str) -> Figure:
    """One inverter's output against its control, with the margins between the levels it puts out and the switch points."""
    with styled():
        figure = new_figure(130.0, 100.0)
        axes = figure.subplots()
        control = picture.control_Pa / KPA
        axes.plot(control, picture.rising_Pa / KPA, color=BLUE, lw=2.0, label="control rising")
        axes.plot(control, picture.falling_Pa / KPA, color=ORANGE, lw=1.6, ls="--", label="control falling")
        _margin(axes, picture.low_Pa, picture.switch_out_Pa, height=0.30 * picture.high_Pa, text="low margin")
        _margin(axes, picture.switch_in_Pa, picture.high_Pa, height=0.70 * picture.high_Pa, text="high margin")
        for level, name in ((picture.low_Pa, "low"), (picture.high_Pa, "high")):
            axes.axvline(level / KPA, color=MUTED, lw=0.8, ls=":")
            axes.annotate(
                f"{name} level {level / KPA:.1f}",
                (level / KPA, 0.0),
                xytext=(3, 4),
                textcoords="offset points",
                rotation=90,
                fontsize=7.5,
                color=INK,
                va="bottom",
            )
        axes.set_xlabel("control vacuum, from the stage before (kPa)")
        axes.set_ylabel("output vacuum (kPa)")
        axes.set_xlim(0.0, 1.06 * control[-1])
        axes.set_ylim(0.0, 1.12 * picture.high_Pa / KPA)
        axes.set_title(title)
        axes.legend(loc="upper right")
        bare(axes, grid="both")
    return figure


def _margin(axes: Axes, start_Pa: float, end_Pa: float, *, height: float, text: str) -> None:
    """A double arrow from a level to a switch point, with its length."""
    start, end, y = start_Pa / KPA, end_Pa / KPA, height / KPA
    axes.annotate("", (end, y), (start, y), arrowprops={"arrowstyle": "<->", "color": INK, "lw": 1.0})
    axes.annotate(
        f"{text} {end - start:.1f} kPa",
        (0.5 * (start + end), y),
        xytext=(0, 4),
        textcoords="offset points",
        ha="center",
        fontsize=8,
        color=INK,
        bbox={"facecolor": "white", "edgecolor": "none", "pad": 0.8, "alpha": 0.85},
    )
