"""Where the pump works: its curve, what the ring draws on average, and the vacuum that leaves."""

from __future__ import annotations

from collections.abc import Sequence

from matplotlib.figure import Figure

from gaitlab.report.style import BLUE, INK, ORANGE, bare, new_figure, styled

KPA = 1e3
L_MIN = 60e3  # L/min per m³/s


def pump_working_point(
    *,
    curve_vacuum_Pa: Sequence[float],
    curve_flow_m3_s: Sequence[float],
    mean_vacuum_Pa: float,
    least_vacuum_Pa: float,
    mean_flow_m3_s: float,
    title: str = "Pump at work",
) -> Figure:
    """The pump's curve, free-air flow [L/min ANR] against gauge vacuum [kPa], with the ring's mean draw on it.

    The bar reaches from the least vacuum of a period to the mean. Flows are free air (ISO 8778 reference atmosphere).
    """
    with styled():
        figure = new_figure(130, 85)
        ax = figure.subplots()
        ax.plot(
            [v / KPA for v in curve_vacuum_Pa], [q * L_MIN for q in curve_flow_m3_s], color=BLUE, lw=2, label="pump"
        )
        flow, mean, least = mean_flow_m3_s * L_MIN, mean_vacuum_Pa / KPA, least_vacuum_Pa / KPA
        ax.plot([least, mean], [flow, flow], color=ORANGE, lw=4, alpha=0.5, label="from least to mean vacuum")
        ax.plot(mean, flow, ls="", marker="o", ms=8, mfc="white", mec=ORANGE, mew=2, label="ring, mean of a period")
        ax.annotate(
            f"{flow:.2g} L/min at {mean:.1f} kPa",
            (mean, flow),
            textcoords="offset points",
            xytext=(-10, 12),
            ha="right",
            color=INK,
        )
        ax.set_xlim(left=0)
        ax.set_ylim(bottom=0)
        ax.set_xlabel("gauge vacuum at the manifold (kPa)")
        ax.set_ylabel("free-air flow (L/min ANR)")
        ax.set_title(title)
        ax.legend(loc="upper right")
        bare(ax, grid="both")
    return figure
