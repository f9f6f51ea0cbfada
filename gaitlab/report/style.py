"""One look for every figure: colours that survive grey printing and colour blindness, a figure factory, a saver.

Hues are those of Okabe & Ito, "Color Universal Design" (2008), which the common forms of colour blindness tell apart; where
two things lie side by side they differ in lightness, hatch or marker too. The vacuum scale falls evenly in lightness
from paper (atmosphere) to deep blue (evacuated), so that a grey copy still reads: darker is more vacuum.
"""

from __future__ import annotations

import io
from functools import cache
from pathlib import Path
from typing import Any, Literal

import matplotlib
from matplotlib.axes import Axes
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.colors import LinearSegmentedColormap, to_rgb
from matplotlib.figure import Figure

from gaitlab.errors import InputError, RunFolderError, must

INK = "#1d2730"
MUTED = "#66727d"
RULE = "#d5dade"
PAPER = "#ffffff"
BLUE = "#0072b2"
ORANGE = "#d55e00"
AMBER = "#e69f00"
GREEN = "#009e73"
SKY = "#56b4e9"
PINK = "#cc79a7"
SERIES = (BLUE, AMBER, GREEN, SKY, ORANGE, PINK)  # neighbours differ in lightness too

# Lightness falls evenly: chosen by us on the CIE L* of the five stops (96, 80, 61, 40, 20).
VACUUM_STOPS = ("#f6f3ea", "#b5d0d2", "#6e9fb5", "#2f6690", "#12304f")
MM_PER_INCH = 25.4

RC: Any = {
    "font.family": "DejaVu Sans",
    "font.size": 9,
    "axes.edgecolor": MUTED,
    "axes.labelcolor": INK,
    "axes.titlesize": 10,
    "axes.titleweight": "bold",
    "axes.titlelocation": "left",
    "axes.titlecolor": INK,
    "axes.spines.top": False,
    "axes.spines.right": False,
    "axes.linewidth": 0.8,
    "xtick.color": MUTED,
    "ytick.color": MUTED,
    "xtick.labelcolor": INK,
    "ytick.labelcolor": INK,
    "text.color": INK,
    "grid.color": RULE,
    "grid.linewidth": 0.6,
    "legend.frameon": False,
    "legend.fontsize": 8,
    "hatch.linewidth": 0.8,
    "text.parse_math": False,  # a dollar sign in a robot's name is a dollar sign
    "text.hinting": "none",  # letters keep their drawn widths at every resolution, so that measured lines fit
    "svg.hashsalt": "gaitlab",
    "svg.fonttype": "none",
    "pdf.fonttype": 42,
    "figure.facecolor": PAPER,
}

# No clock in a file: the same figure gives the same bytes.
STILL_METADATA: dict[str, dict[str, Any]] = {
    ".svg": {"Date": None, "Creator": None},
    ".pdf": {"CreationDate": None, "ModDate": None, "Producer": None, "Creator": "gaitlab"},
    ".png": {"Software": None},
}


@cache
def vacuum_scale() -> LinearSegmentedColormap:
    """The colour scale of vacuum: 0 is atmosphere (paper), 1 is the most vacuum shown (deep blue)."""
    return LinearSegmentedColormap.from_list("vacuum", VACUUM_STOPS)


@cache
def rgb255(colour: str) -> tuple[int, int, int]:
    """A colour as the three bytes that Pillow takes."""
    red, green, blue = to_rgb(colour)
    return round(255 * red), round(255 * green), round(255 * blue)


def new_figure(width_mm: float, height_mm: float) -> Figure:
    """An empty figure of that size with its own Agg canvas: nothing global is touched."""
    figure = Figure(figsize=(width_mm / MM_PER_INCH, height_mm / MM_PER_INCH), layout="constrained")
    FigureCanvasAgg(figure)
    return figure


def styled() -> Any:
    """The context in which figures are made and saved."""
    return matplotlib.rc_context(RC)


def bare(axes: Axes, *, grid: Literal["x", "y", "both"] | None = None) -> Axes:
    """Quiet the frame of `axes`; `grid` is x, y or both for light rules behind the data."""
    axes.set_axisbelow(True)
    axes.tick_params(length=3, width=0.8)
    if grid:
        axes.grid(True, axis=grid)
    return axes


def save_figure(figure: Figure, path: str | Path, *, dpi: int = 160) -> Path:
    """Write `figure` as PNG, SVG or PDF by the file's ending, the same bytes every time.

    Raises InputError for another ending or a folder that is not there.
    """
    target = Path(path)
    content = figure_bytes(figure, target.suffix.lower(), dpi=dpi)
    try:
        target.write_bytes(content)
    except OSError as error:
        reason = (error.strerror or str(error)).lower()
        raise RunFolderError(must("picture file", "writable", str(target), reason)) from error
    return target


def figure_bytes(figure: Figure, ending: str, *, dpi: int = 160) -> bytes:
    """The figure as the bytes of a PNG, SVG or PDF file. Raises InputError for another ending."""
    if ending not in STILL_METADATA:
        raise InputError(must("ending of a picture file", ".png, .svg or .pdf", ending))
    buffer = io.BytesIO()
    with styled():
        figure.savefig(buffer, format=ending[1:], dpi=dpi, metadata=STILL_METADATA[ending])
    return buffer.getvalue()
