"""A small drawing surface on Pillow: everything is drawn at twice the size and brought down, which smooths all edges."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cache
from pathlib import Path
from typing import Any

import matplotlib
import numpy as np
from numpy.typing import NDArray
from PIL import Image, ImageDraw, ImageFont

from gaitlab.report.style import INK, PAPER, rgb255

FloatArray = NDArray[np.float64]
Point = tuple[float, float]
OVERSAMPLING = 2


@cache
def _font(size: float, bold: bool) -> ImageFont.FreeTypeFont:
    """DejaVu Sans as matplotlib ships it, so that pictures do not depend on what the system has."""
    name = "DejaVuSans-Bold.ttf" if bold else "DejaVuSans.ttf"
    return ImageFont.truetype(
        str(Path(matplotlib.get_data_path()) / "fonts" / "ttf" / name), round(size * OVERSAMPLING)
    )


@dataclass(frozen=True)
class Canvas:
    """One picture in the making; all lengths are in pixels of the finished picture, y downwards."""

    image: Image.Image
    pen: ImageDraw.ImageDraw

    @classmethod
    def blank(cls, width: int, height: int, colour: str) -> Canvas:
        """An empty canvas of the finished size."""
        image = Image.new("RGB", (width * OVERSAMPLING, height * OVERSAMPLING), rgb255(colour))
        return cls(image, ImageDraw.Draw(image))

    def copy(self) -> Canvas:
        """The same picture once more, to go on drawing on."""
        image = self.image.copy()
        return Canvas(image, ImageDraw.Draw(image))

    def finished(self) -> Image.Image:
        """The picture at its own size."""
        return self.image.reduce(OVERSAMPLING)

    def polygon(
        self, points: FloatArray | Sequence[Point], *, fill: str, line: str | None = None, width: float = 1.0
    ) -> None:
        """A filled polygon with an outline."""
        path = [_scaled(p) for p in points]
        self.pen.polygon(path, fill=rgb255(fill))
        if line is not None:
            self.pen.line([*path, path[0]], fill=rgb255(line), width=round(width * OVERSAMPLING), joint="curve")

    def line(self, points: FloatArray | Sequence[Point], *, colour: str, width: float = 1.0) -> None:
        """An open line with round joints."""
        self.pen.line(
            [_scaled(p) for p in points], fill=rgb255(colour), width=round(width * OVERSAMPLING), joint="curve"
        )

    def dashes(self, start: Point, end: Point, *, colour: str, width: float = 1.0, dash: float = 4.0) -> None:
        """A dashed straight line."""
        a, b = np.asarray(start, dtype=float), np.asarray(end, dtype=float)
        count = max(int(np.hypot(*(b - a)) / (2 * dash)), 1)
        for k in range(count):
            self.line(
                [tuple(a + (b - a) * k / count), tuple(a + (b - a) * (k + 0.5) / count)], colour=colour, width=width
            )

    def disc(self, centre: Point, radius: float, *, fill: str, line: str | None = None, width: float = 1.0) -> None:
        """A filled circle with an outline."""
        (x, y), r = _scaled(centre), radius * OVERSAMPLING
        outline = None if line is None else rgb255(line)
        self.pen.ellipse(
            (x - r, y - r, x + r, y + r), fill=rgb255(fill), outline=outline, width=round(width * OVERSAMPLING)
        )

    def box(
        self, low: Point, high: Point, *, fill: str, line: str | None = None, radius: float = 0.0, width: float = 1.0
    ) -> None:
        """An upright box with rounded corners."""
        outline = None if line is None else rgb255(line)
        corners = (*_scaled(low), *_scaled(high))
        self.pen.rounded_rectangle(
            corners, radius * OVERSAMPLING, fill=rgb255(fill), outline=outline, width=round(width * OVERSAMPLING)
        )

    def text(
        self,
        at: Point,
        words: str,
        *,
        size: float = 11.0,
        colour: str = INK,
        anchor: str = "lm",
        bold: bool = False,
        halo: bool = False,
    ) -> None:
        """Words at a point; `anchor` as Pillow has it (lm: left middle, mm: centred, rm: right middle …)."""
        rim: dict[str, Any] = {"stroke_width": 2 * OVERSAMPLING, "stroke_fill": rgb255(PAPER)} if halo else {}
        self.pen.text(_scaled(at), words, font=_font(size, bold), fill=rgb255(colour), anchor=anchor, **rim)


def text_width(words: str, size: float, *, bold: bool = False) -> float:
    """Width of words [px of the finished picture]."""
    return float(_font(size, bold).getlength(words)) / OVERSAMPLING


def fitted(words: str, width: float, *, size: float, least: float) -> tuple[str, float]:
    """The words and the size at which they are no wider than `width`: smaller first, down to `least`, then cut short."""
    room = size * width / max(text_width(words, size), 1.0)
    if room >= least:
        return words, min(size, room)
    while len(words) > 1 and text_width(words + "…", least) > width:
        words = words[:-1]
    return words.rstrip() + "…", least


def _scaled(point: FloatArray | Point) -> Point:
    return float(point[0]) * OVERSAMPLING, float(point[1]) * OVERSAMPLING


def hull(points: FloatArray) -> FloatArray:
    """Corners of the convex hull of points (n, 2), in turn (monotone chain, Andrew 1979)."""
    ordered = sorted({(float(x), float(y)) for x, y in points})
    if len(ordered) < 3:
        return np.array(ordered)
    lower, upper = _half_hull(ordered), _half_hull(ordered[::-1])
    return np.array(lower[:-1] + upper[:-1])


def _half_hull(points: list[Point]) -> list[Point]:
    kept: list[Point] = []
    for x, y in points:
        while len(kept) > 1:
            (ax, ay), (bx, by) = kept[-2], kept[-1]
            if (bx - ax) * (y - ay) - (by - ay) * (x - ax) > 0.0:
                break
            kept.pop()
        kept.append((x, y))
    return kept
