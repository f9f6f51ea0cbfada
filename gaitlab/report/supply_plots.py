"""Pictures of the air supply: the pump's curve with the ring's demand on it, and the stroke of a syringe."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from numpy.typing import NDArray

from gaitlab.report.style import BLUE, INK, MUTED, ORANGE, bare, new_figure, styled

FloatArray = NDArray[np.float64]
Curve = tuple[FloatArray, FloatArray]
KPA = 1e3
L_MIN = 60e3  # L/min per m³/s


@dataclass(frozen=True)
class PumpPicture:
    """Curves of gauge vacuum [Pa] and free-air flow [m³/s ANR]: the file's pump (None for a house line), the smallest pump that
    keeps the ring alive, the ring's own demand; the working point, and the smallest pump's free flow."""

    pump: Curve | None
    smallest: Curve
    ring: Curve
    working: tuple[float, float]
    smallest_free_m3_s: float


def pump_picture(picture: PumpPicture, *, title: str) -> Figure:
    """Where pump curve and demand meet is where the ring works; the dotted pump is the least that keeps it alive."""
    with styled():
        figure = new_figure(140.0, 95.0)
        axes = figure.subplots()
        if picture.pump is not None:
            _draw(axes, picture.pump, "pump of the robot file", color=BLUE, lw=2.0)
        name = f"smallest pump, {picture.smallest_free_m3_s * L_MIN:.2g} L/min free flow"
        _draw(axes, picture.smallest, name, color=MUTED, lw=1.4, ls=(0, (1, 1.5)))
        _draw(axes, picture.ring, "what the ring draws", color=ORANGE, lw=1.6, ls="--", marker="s", ms=4)
        vacuum, flow = picture.working
        name = f"working point: {flow * L_MIN:.2f} L/min at {vacuum / KPA:.1f} kPa"
        axes.plot(vacuum / KPA, flow * L_MIN, "o", ms=9, mfc="white", mec=INK, mew=1.8, label=name)
        axes.set_xlabel("gauge vacuum at the manifold, mean of a period (kPa)")
        axes.set_ylabel("free-air flow (L/min ANR)")
        axes.set_xlim(left=0.0)
        axes.set_ylim(bottom=0.0)
        axes.set_title(title)
        axes.legend(loc="upper right")
        bare(axes, grid="both")
    return figure


def _draw(axes: Axes, curve: Curve, label: str, **look: Any) -> None:
    axes.plot(curve[0] / KPA, curve[1] * L_MIN, label=label, **look)


def stroke_picture(cuts_s: Sequence[float], supply_Pa: Sequence[float], *, title: str) -> Figure:
    """A syringe's vacuum at each period's start, above the length of each period, to the last one."""
    with styled():
        figure = new_figure(140.0, 105.0)
        upper, lower = figure.subplots(2, 1, sharex=True)
        upper.plot(cuts_s, np.array(supply_Pa) / KPA, "o-", color=BLUE, ms=4)
        upper.annotate(
            f"last beat {cuts_s[-1]:.1f} s, {supply_Pa[-1] / KPA:.1f} kPa",
            (cuts_s[-1], supply_Pa[-1] / KPA),
            xytext=(-6, -14),
            textcoords="offset points",
            ha="right",
        )
        upper.set_ylabel("barrel vacuum (kPa)")
        upper.set_title(title)
        lower.plot(cuts_s[:-1], np.diff(cuts_s), "s--", color=ORANGE, ms=4)
        lower.set_ylabel("period (s)")
        lower.set_xlabel("time since the schedule began (s)")
        for axes in (upper, lower):
            axes.set_ylim(bottom=0.0)
            bare(axes, grid="both")
    return figure
