"""Pictures of the air side: flow through a channel over the pressure behind it, flow through a valve over its control."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from matplotlib.axes import Axes
from matplotlib.figure import Figure

from gaitlab.report.style import BLUE, INK, MUTED, ORANGE, RULE, bare, new_figure, styled

KPA = 1e3
MG = 1e6
ROOM_ABOVE = 1.35  # the parabola leaves the picture at this share of the choked flow; chosen by us


@dataclass(frozen=True)
class DuctCurve:
    """Mass flow [kg/s] against downstream pressure [Pa absolute], rising in pressure, at one upstream pressure.

    `laminar_kg_s` is the fully laminar formula at the same pressures. Below `choking_Pa` the flow no longer changes.
    """

    title: str
    up_Pa: float
    down_Pa: Sequence[float]
    flow_kg_s: Sequence[float]
    laminar_kg_s: Sequence[float]
    choking_Pa: float
    point_down_Pa: float
    point_flow_kg_s: float


def duct_plot(curve: DuctCurve) -> Figure:
    """The curve, the choked range shaded, the asked-for point labelled; pressures in kPa absolute, flow in mg/s."""
    with styled():
        figure = new_figure(140, 92)
        ax = figure.subplots()
        down = [p / KPA for p in curve.down_Pa]
        ax.plot(
            down, [m * MG for m in curve.laminar_kg_s], color=MUTED, lw=1.2, ls=(0, (4, 3)), label="laminar formula"
        )
        ax.plot(down, [m * MG for m in curve.flow_kg_s], color=BLUE, lw=2.2, label="flow with friction and choking")
        ax.set_xlim(0.0, curve.up_Pa / KPA)
        ax.set_ylim(0.0, ROOM_ABOVE * MG * max(curve.flow_kg_s))
        ax.axvspan(0.0, curve.choking_Pa / KPA, color=RULE, alpha=0.55, lw=0, label="choked")
        _point(ax, curve)
        ax.set_xlabel(f"pressure behind the channel (kPa absolute), {curve.up_Pa / KPA:.5g} kPa before it")
        ax.set_ylabel("mass flow (mg/s)")
        ax.set_title(curve.title)
        figure.legend(loc="outside lower center", ncols=3)
        bare(ax, grid="both")
    return figure


def _point(ax: Axes, curve: DuctCurve) -> None:
    """The asked-for point, its label below the falling curve, where nothing else is drawn."""
    at, flow = curve.point_down_Pa / KPA, curve.point_flow_kg_s * MG
    ax.plot(at, flow, ls="", marker="o", ms=7, mfc="white", mec=ORANGE, mew=2, clip_on=False)
    left = at > 0.4 * curve.up_Pa / KPA
    ax.annotate(
        f"{flow:.4g} mg/s at {at:.4g} kPa",
        (at, flow),
        textcoords="offset points",
        xytext=(-9 if left else 9, -13),
        ha="right" if left else "left",
        color=INK,
    )


@dataclass(frozen=True)
class ValveCurve:
    """Measured points and fitted curve: control vacuum [kPa], flow [L/min ANR]; `opening_kPa` from start to full opening."""

    control_kPa: Sequence[float]
    flow_L_min: Sequence[float]
    fitted_kPa: Sequence[float]
    fitted_L_min: Sequence[float]
    opening_kPa: tuple[float, float]


def valve_plot(curve: ValveCurve) -> Figure:
    """Flow through a valve against its control vacuum, measured and fitted, with the range in which it opens shaded."""
    with styled():
        figure = new_figure(140, 92)
        ax = figure.subplots()
        ax.axvspan(*curve.opening_kPa, color=RULE, alpha=0.55, lw=0, label="opening")
        ax.plot(curve.fitted_kPa, curve.fitted_L_min, color=BLUE, lw=2.2, label="fitted law")
        ax.plot(
            curve.control_kPa,
            curve.flow_L_min,
            ls="",
            marker="o",
            ms=6,
            mfc="white",
            mec=ORANGE,
            mew=1.8,
            label="measured",
            clip_on=False,
            zorder=3,
        )
        ax.set_xlim(0.0, curve.fitted_kPa[-1])
        ax.set_ylim(0.0, 1.15 * max(*curve.flow_L_min, *curve.fitted_L_min))
        ax.set_xlabel("control vacuum (kPa gauge)")
        ax.set_ylabel("flow (L/min ANR)")
        start, end = curve.opening_kPa
        ax.set_title(f"Membrane valve: opens from {start:.3g} to {end:.3g} kPa")
        figure.legend(loc="outside lower center", ncols=3)
        bare(ax, grid="both")
    return figure
