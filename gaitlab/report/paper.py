"""A sheet of paper to set text and tables on: millimetres from the top left corner, lines broken by measured widths."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from functools import cache
from pathlib import Path
from typing import Any

import matplotlib
from matplotlib.axes import Axes
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure
from matplotlib.patches import FancyBboxPatch, Rectangle
from PIL import ImageFont

from gaitlab.report.style import INK, MM_PER_INCH, MUTED, RULE

MM_PER_POINT = MM_PER_INCH / 72.0
LINE_SPACING = 1.32
LEAST_PT = 4.0  # of type that is set smaller to fit; chosen by us
ROUNDING = 1e-9
CELL_EDGES_MM = 1.8  # of a table's cell, left and right of its text together
_GAUGE_SIZE = 200  # size at which the font is measured, large so that rounding does not matter


@cache
def _gauge(bold: bool) -> ImageFont.FreeTypeFont:
    name = "DejaVuSans-Bold.ttf" if bold else "DejaVuSans.ttf"
    return ImageFont.truetype(str(Path(matplotlib.get_data_path()) / "fonts" / "ttf" / name), _GAUGE_SIZE)


def text_width_mm(words: str, size_pt: float, *, bold: bool = False) -> float:
    """Width of a line of text on paper."""
    return float(_gauge(bold).getlength(words)) / _GAUGE_SIZE * size_pt * MM_PER_POINT


def broken(words: str, width_mm: float, size_pt: float, *, bold: bool = False) -> list[str]:
    """The text in lines no wider than `width_mm`; a word that is wider by itself is cut."""
    lines: list[str] = []
    for word in words.split():
        trial = f"{lines[-1]} {word}" if lines else word
        if lines and text_width_mm(trial, size_pt, bold=bold) <= width_mm:
            lines[-1] = trial
        else:
            lines += _cut(word, width_mm, size_pt, bold)
    return lines or [""]


def shortened(words: str, width_mm: float, size_pt: float, *, bold: bool = False) -> str:
    """The text with as much of its middle left out as makes it no wider than `width_mm`: names differ at their ends."""
    for left in range(len(words), 0, -1):
        text = words if left == len(words) else f"{words[: (left + 1) // 2]}…{words[len(words) - left // 2 :]}"
        if text_width_mm(text, size_pt, bold=bold) <= width_mm * (1.0 + ROUNDING):
            return text
    return "…"


def broken_label(words: str, *, width_mm: float, size_pt: float) -> str:
    """A long label in several lines, for an axis."""
    return "\n".join(broken(words, width_mm, size_pt))


def _cut(word: str, width_mm: float, size_pt: float, bold: bool) -> list[str]:
    pieces = [""]
    for letter in word:
        if pieces[-1] and text_width_mm(pieces[-1] + letter, size_pt, bold=bold) > width_mm:
            pieces.append("")
        pieces[-1] += letter
    return pieces


@dataclass(frozen=True)
class Paper:
    """One page; every place is (mm from left, mm from top), every type size is multiplied by `type_scale`."""

    figure: Figure
    ground: Axes
    width_mm: float
    height_mm: float
    type_scale: float

    @classmethod
    def blank(cls, width_mm: float, height_mm: float, *, type_scale: float = 1.0) -> Paper:
        """An empty page of that size."""
        figure = Figure(figsize=(width_mm / MM_PER_INCH, height_mm / MM_PER_INCH))
        FigureCanvasAgg(figure)
        ground = figure.add_axes((0.0, 0.0, 1.0, 1.0))
        ground.set_xlim(0, width_mm)
        ground.set_ylim(height_mm, 0)
        ground.set_axis_off()
        return cls(figure, ground, width_mm, height_mm, type_scale)

    def line(
        self,
        x: float,
        y: float,
        words: str,
        *,
        size: float = 8.0,
        bold: bool = False,
        colour: str = INK,
        align: str = "left",
        width: float = math.inf,
    ) -> None:
        """One line of text whose baseline is at `y`; what would be wider than `width` is set smaller, then shortened."""
        weight = "bold" if bold else "normal"
        if (wide := text_width_mm(words, self.type_scale * size, bold=bold)) > width:
            size = max(size * width / wide, min(size, LEAST_PT / self.type_scale))
            words = shortened(words, width, self.type_scale * size, bold=bold)
        self.ground.text(
            x, y, words, fontsize=self.type_scale * size, fontweight=weight, color=colour, ha=align, va="baseline"
        )

    def paragraph(
        self, x: float, y: float, words: str, *, width: float, size: float = 8.0, bold: bool = False, colour: str = INK
    ) -> float:
        """Text broken to `width`, first baseline one line below `y`; gives back the y below it."""
        step = self.type_scale * size * MM_PER_POINT * LINE_SPACING
        for words_of_line in broken(words, width, self.type_scale * size, bold=bold):
            y += step
            self.line(x, y, words_of_line, size=size, bold=bold, colour=colour)
        return y

    def heading(self, x: float, y: float, words: str, *, width: float) -> float:
        """A section's heading with a rule under it; gives back the y below it."""
        self.line(x, y + 4.0, words, size=9.5, bold=True)
        self.rule(x, y + 5.6, width, colour=INK)
        return y + 6.4

    def rule(self, x: float, y: float, width: float, *, colour: str = RULE) -> None:
        """A thin level line."""
        self.ground.plot([x, x + width], [y, y], color=colour, lw=0.6, solid_capstyle="butt")

    def box(
        self, x: float, y: float, width: float, height: float, *, fill: str, edge: str = MUTED, radius: float = 0.0
    ) -> None:
        """A filled box behind the text, with rounded corners if asked."""
        look: dict[str, Any] = {"facecolor": fill, "edgecolor": edge, "lw": 0.8, "zorder": 0}
        if radius:
            round_box = f"round,pad=0,rounding_size={radius}"
            self.ground.add_patch(FancyBboxPatch((x, y), width, height, boxstyle=round_box, **look))
        else:
            self.ground.add_patch(Rectangle((x, y), width, height, **look))

    def inset(self, x: float, y: float, width: float, height: float) -> Axes:
        """Axes that fill a place on the page."""
        place = (x / self.width_mm, 1.0 - (y + height) / self.height_mm, width / self.width_mm, height / self.height_mm)
        return self.figure.add_axes(place)

    def table(
        self,
        x: float,
        y: float,
        widths: Sequence[float],
        rows: Sequence[Sequence[str]],
        *,
        heads: Sequence[str],
        row_mm: float,
        size: float,
    ) -> float:
        """A ruled table, first column bold, heads small and muted above; gives back the y below it."""
        stops = [x + sum(widths[:k]) for k in range(len(widths))]
        for stop, head, width in zip(stops, heads, widths, strict=True):
            self.line(stop + 1.0, y + 3.2, head, size=6.8, colour=MUTED, width=width - CELL_EDGES_MM)
        y += 4.6
        self.rule(x, y, sum(widths), colour=MUTED)
        for row in rows:
            for column, (stop, cell, width) in enumerate(zip(stops, row, widths, strict=True)):
                base = y + 0.68 * row_mm
                self.line(stop + 1.0, base, cell, size=size, bold=column < 2, width=width - CELL_EDGES_MM)
            y += row_mm
            self.rule(x, y, sum(widths))
        return y
