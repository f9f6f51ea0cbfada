"""The pressure map: vacuum at every inlet against phase, dark where evacuated."""

from __future__ import annotations

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from gaitlab.report.style import AMBER, INK, bare, new_figure, styled, vacuum_scale
from gaitlab.ring.waves import Waves
from gaitlab.wiring.wiring import Wiring

KPA = 1e3


def pressure_map(waves: Waves, *, wiring: Wiring | None = None, title: str = "Vacuum at the bellows") -> Figure:
    """Inlets × phase over two periods, colour the gauge vacuum [kPa]; a mark where each bellows passes half swing upward.

    With a `wiring` every row also names its source (ring output, atmosphere or supply).
    """
    with styled():
        figure = new_figure(160, 42 + 8 * len(waves.inlets))
        ax = figure.subplots()
        _draw_map(ax, waves, _row_names(waves, wiring))
        ax.set_title(title)
        figure.colorbar(ax.collections[0], ax=ax, label="gauge vacuum (kPa)", aspect=14, pad=0.02)
    return figure


def _row_names(waves: Waves, wiring: Wiring | None) -> list[str]:
    if wiring is None:
        return list(waves.inlets)
    return [f"{inlet}  ←  {wiring.source(inlet)}" for inlet in waves.inlets]


def _draw_map(ax: Axes, waves: Waves, names: list[str]) -> None:
    vacuum_kPa = np.tile(waves.vacuum_Pa, 2) / KPA
    edges = np.linspace(0.0, 2.0, vacuum_kPa.shape[1] + 1)
    rows = np.arange(len(names) + 1) - 0.5
    top = max(float(vacuum_kPa.max()), 1.0)
    ax.pcolormesh(edges, rows, vacuum_kPa, cmap=vacuum_scale(), vmin=0.0, vmax=top, rasterized=True)
    for row, phase in enumerate(rising_phases(waves)):
        if np.isfinite(phase):
            ax.plot([phase, phase + 1.0], [row, row], ls="", marker="^", ms=6, mfc=AMBER, mec=INK, mew=0.7)
    ax.set_yticks(range(len(names)), names)
    ax.set_ylim(len(names) - 0.5, -0.5)
    ax.set_xlim(0, 2)
    ax.set_xlabel("phase (periods)      ▲ vacuum rises through half swing", fontsize=9)
    ax.set_ylabel("inlet" if "←" not in "".join(names) else "inlet ← ring output")
    bare(ax)
    ax.tick_params(axis="y", length=0)


def rising_phases(waves: Waves) -> np.ndarray:
    """Phase at which each inlet's vacuum rises through half of its own swing, shape (inlets,); nan for a constant row."""
    count = waves.vacuum_Pa.shape[1]
    found = np.full(len(waves.inlets), np.nan)
    for row, values in enumerate(waves.vacuum_Pa):
        middle, swing = 0.5 * (values.max() + values.min()), np.ptp(values)
        after = np.roll(values, -1)
        rising = np.flatnonzero((values < middle) & (after >= middle))
        if swing > 0.0 and rising.size:
            k = rising[0]
            found[row] = (k + (middle - values[k]) / (after[k] - values[k])) / count
    return found
