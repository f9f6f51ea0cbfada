"""How bellows move, pull and breathe against the vacuum inside them."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from matplotlib.axes import Axes
from matplotlib.figure import Figure

from gaitlab.report.style import INK, MUTED, SERIES, bare, new_figure, styled

STYLES = ("-", "--", "-.", ":")


@dataclass(frozen=True)
class BellowsCurve:
    """One type of bellows in the units of the picture: bend [°] or stroke [mm], blocked force [N], swept volume [mL].

    `solid` is the deflection where the convolutions touch.
    """

    name: str
    action: str
    vacuum_kPa: Sequence[float]
    deflection: Sequence[float]
    blocked_force_N: Sequence[float]
    swept_mL: Sequence[float]
    solid: float


def bellows_plot(curves: Sequence[BellowsCurve], title: str) -> Figure:
    """Three panels over gauge vacuum: free motion, force with the end held, volume taken out; one line for each type."""
    with styled():
        figure = new_figure(190, 75)
        motion, force, volume = figure.subplots(1, 3)
        for index, curve in enumerate(curves):
            look = {"color": SERIES[index % len(SERIES)], "ls": STYLES[index % len(STYLES)], "lw": 2}
            motion.plot(curve.vacuum_kPa, curve.deflection, label=curve.name, **look)
            force.plot(curve.vacuum_kPa, curve.blocked_force_N, **look)
            volume.plot(curve.vacuum_kPa, curve.swept_mL, **look)
            _mark_solid(motion, curve)
        _label(motion, _motion_label(curves), "free, no load")
        _label(force, "force of the blocked end (N)", "end held where it was")
        _label(volume, "volume taken out (mL)", "free, no load")
        motion.legend(loc="best")
        figure.suptitle(title, color=INK)
    return figure


def _mark_solid(axes: Axes, curve: BellowsCurve) -> None:
    """A rule where the convolutions touch, if the curve comes near it."""
    if max(curve.deflection) > 0.7 * curve.solid:
        axes.axhline(curve.solid, color=MUTED, lw=0.8, ls=":")
        axes.annotate("solid", (0.0, curve.solid), textcoords="offset points", xytext=(2, 2), color=MUTED)


def _motion_label(curves: Sequence[BellowsCurve]) -> str:
    words = {"bend": "bend (°)", "contract": "stroke (mm)"}
    return " or ".join(dict.fromkeys(words[curve.action] for curve in curves))


def _label(axes: Axes, label: str, title: str) -> None:
    axes.set_xlim(left=0)
    axes.set_ylim(bottom=0)
    axes.set_xlabel("gauge vacuum inside (kPa)")
    axes.set_ylabel(label)
    axes.set_title(title, fontsize=9)
    bare(axes, grid="both")
