"""Where the pump works: its curve, what the ring draws on average, and the vacuum that leaves."""

from __future__ import annotations

import math

import numpy as np
from matplotlib.figure import Figure
from numpy.typing import NDArray

from gaitlab.air.gas import DENSITY_ANR_KG_M3, gas_of
from gaitlab.air.supply import PumpLaw, PumpTableLaw, supply_law
from gaitlab.report.style import BLUE, INK, ORANGE, bare, new_figure, styled
from gaitlab.ring.waves import RingRun
from gaitlab.robot.records import Robot

FloatArray = NDArray[np.float64]
KPA = 1e3
L_MIN_ANR = 60e3 / DENSITY_ANR_KG_M3  # L/min of ISO 8778 reference air per kg/s
CURVE_POINTS = 121


def pump_curve(robot: Robot) -> tuple[FloatArray, FloatArray] | None:
    """The pump of a robot file: gauge vacuum [Pa] and mass flow [kg/s], down to the dead end; None for a supply without a curve."""
    law = supply_law(robot.supply, gas_of(robot.ambient))
    if not isinstance(law, PumpLaw | PumpTableLaw):
        return None
    vacuum_Pa = np.linspace(0.0, robot.ambient.pressure_Pa - law.rest_Pa, CURVE_POINTS)
    flow = [law.mass_flow(robot.ambient.pressure_Pa - float(vacuum))[0] for vacuum in vacuum_Pa]
    return vacuum_Pa, np.array(flow)


def pump_working_point(robot: Robot, ring: RingRun, *, title: str = "Pump at work") -> Figure | None:
    """The pump's curve, free-air flow [L/min ANR] against gauge vacuum [kPa], with the ring's mean draw on it.

    The bar reaches from the least vacuum of a period to the mean. None for a supply without a curve and a ring at rest.
    """
    curve = pump_curve(robot)
    if curve is None or not math.isfinite(ring.period_s):
        return None
    with styled():
        figure = new_figure(130, 85)
        ax = figure.subplots()
        ax.plot(curve[0] / KPA, curve[1] * L_MIN_ANR, color=BLUE, lw=2, label="pump")
        flow = L_MIN_ANR * ring.air_kg_per_period / ring.period_s
        mean, least = ring.supply_mean_Pa / KPA, ring.supply_min_Pa / KPA
        ax.plot([least, mean], [flow, flow], color=ORANGE, lw=4, alpha=0.5, label="from least to mean vacuum")
        ax.plot(mean, flow, ls="", marker="o", ms=8, mfc="white", mec=ORANGE, mew=2, label="ring, mean of a period")
        words = f"{flow:.2g} L/min at {mean:.1f} kPa"
        ax.annotate(words, (mean, flow), textcoords="offset points", xytext=(-12, -14), ha="right", color=INK)
        ax.set_xlim(left=0)
        ax.set_ylim(bottom=0)
        ax.set_xlabel("gauge vacuum at the manifold (kPa)")
        ax.set_ylabel("free-air flow (L/min ANR)")
        ax.set_title(title)
        ax.legend(loc="upper right")
        bare(ax, grid="both")
    return figure
