"""The layout of an animated walk: two cameras that hold the whole stretch in view, the tray, rulers, ring and legend."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from gaitlab.gait.records import Trace
from gaitlab.report.body_view import SWING_FOOT, Camera, vacuum_colour
from gaitlab.report.canvas import Canvas, Point, fitted
from gaitlab.report.ring_view import RingPlace
from gaitlab.report.solids import Solid, rotated
from gaitlab.report.style import INK, MUTED, ORANGE, PAPER, RULE

FloatArray = NDArray[np.float64]
WIDTH, HEIGHT = 840, 440
VIEW_LEFT, VIEW_RIGHT = 18.0, 580.0
COLUMN = (612.0, 822.0)
RING = RingPlace((717.0, 142.0), 58.0, (602.0, 834.0))
STEEL, STEEL_EDGE, TRAY = "#e3e7ea", "#9aa5ae", "#f2f4f5"
MARGIN_M = np.array([0.008, 0.008, 0.006])
VIEWS_PX = 276.0  # height that both views share
MM = 1e3
TICK_STEPS_MM = (1, 2, 5, 10, 20, 50, 100, 200, 500, 1000)


@dataclass(frozen=True)
class Stretch:
    """The box that holds everything seen over the shown frames: low and high corners [m] (x, y, z)."""

    low_m: FloatArray
    high_m: FloatArray

    @classmethod
    def of(cls, trace: Trace, solids: tuple[Solid, ...], frames: range) -> Stretch:
        """Corners over first, middle and last frames; parts between them stay well inside the margin."""
        chosen = sorted({frames[0], frames[len(frames) // 4], frames[len(frames) // 2], frames[-1]})
        clouds = [_extent(trace, solid, frame) for frame in chosen for solid in solids]
        low = np.min([cloud[0] for cloud in clouds], axis=0)
        high = np.max([cloud[1] for cloud in clouds], axis=0)
        return cls(np.minimum(low, [np.inf, np.inf, 0.0]) - MARGIN_M * (1, 1, 0), high + MARGIN_M)


def _extent(trace: Trace, solid: Solid, frame: int) -> tuple[FloatArray, FloatArray]:
    points = rotated(solid.points_m, trace.quaternion[frame, solid.part]) + trace.position_m[frame, solid.part]
    return points.min(axis=0) - solid.radius_m, points.max(axis=0) + solid.radius_m


@dataclass(frozen=True)
class StageSet:
    """Both cameras and the background that never changes."""

    side: Camera
    above: Camera
    stretch: Stretch
    backdrop: Canvas


def stage_set(stretch: Stretch, *, title: str, subtitle: str, full_Pa: float) -> StageSet:
    """Cameras of one scale for both views, as large as the space allows, and the painted backdrop."""
    size = stretch.high_m - stretch.low_m
    scale = min((VIEW_RIGHT - VIEW_LEFT) / size[0], VIEWS_PX / (size[1] + size[2]))
    left = VIEW_LEFT + 0.5 * (VIEW_RIGHT - VIEW_LEFT - scale * size[0])
    spare = max(VIEWS_PX - scale * (size[1] + size[2]), 0.0)
    floor = 66.0 + 0.4 * spare + scale * size[2]
    below = floor + 62.0 + 0.35 * spare
    side = Camera(2, scale, float(stretch.low_m[0]), 0.0, left, floor)
    above = Camera(1, scale, float(stretch.low_m[0]), float(stretch.high_m[1]), left, below)
    canvas = Canvas.blank(WIDTH, HEIGHT, PAPER)
    for words, y, points, bold in ((title, 20.0, 15.0, True), (subtitle, 39.0, 10.5, False)):
        shown, fitting = fitted(words, 0.86 * (VIEW_RIGHT - VIEW_LEFT), size=points, least=8.5)
        canvas.text((VIEW_LEFT, y), shown, size=fitting, bold=bold, colour=INK if bold else MUTED)
    _draw_floor(canvas, side, stretch)
    _draw_tray(canvas, above, stretch)
    _draw_column(canvas, full_Pa)
    return StageSet(side, above, stretch, canvas)


def _span_px(camera: Camera, stretch: Stretch) -> tuple[float, float]:
    ends = camera.pixels(np.array([stretch.low_m, stretch.high_m]))
    return max(float(ends[0, 0]), VIEW_LEFT), min(float(ends[1, 0]), VIEW_RIGHT)


def _draw_floor(canvas: Canvas, camera: Camera, stretch: Stretch) -> None:
    """The tray's floor cut open, with a ruler that is the scale bar as well."""
    left, right = _span_px(camera, stretch)
    floor = camera.level_px
    canvas.text((VIEW_LEFT, 62), "from the side", size=10.5, colour=MUTED)
    canvas.box((left, floor), (right, floor + 7), fill=STEEL)
    canvas.line([(left, floor), (right, floor)], colour=STEEL_EDGE, width=1.6)
    step = tick_step_mm(camera.px_per_m)
    first = int(np.ceil(MM * stretch.low_m[0] / step))
    last = int(np.floor(MM * stretch.high_m[0] / step))
    for k in range(first, last + 1):
        x = camera.left_px + (k * step / MM - camera.left_m) * camera.px_per_m
        named = k % 5 == 0
        canvas.line([(x, floor + 7), (x, floor + (13 if named else 10))], colour=MUTED, width=1.0)
        if named and left + 8 < x < right - 26:
            canvas.text((x, floor + 21), f"{k * step:g}", size=9.5, colour=MUTED, anchor="mm")
    canvas.text((right, floor + 21), "mm", size=9.5, colour=MUTED, anchor="rm")


def tick_step_mm(px_per_m: float) -> int:
    """The least round step [mm] whose ticks stand at least 9 px apart."""
    return next((step for step in TICK_STEPS_MM if step * px_per_m / MM >= 9.0), TICK_STEPS_MM[-1])


def _draw_tray(canvas: Canvas, camera: Camera, stretch: Stretch) -> None:
    """The tray from above with its turned-up edges, and a scale bar of one big division."""
    left, right = _span_px(camera, stretch)
    top = camera.level_px
    bottom = top + (stretch.high_m[1] - stretch.low_m[1]) * camera.px_per_m
    canvas.text((VIEW_LEFT, top - 13), "from above", size=10.5, colour=MUTED)
    canvas.box((left, top), (right, bottom), fill=TRAY)
    for y in (top, bottom):
        canvas.line([(left, y), (right, y)], colour=STEEL_EDGE, width=2.2)
    step = 5 * tick_step_mm(camera.px_per_m)
    length = step / MM * camera.px_per_m
    canvas.line([(left, bottom + 14), (left + length, bottom + 14)], colour=INK, width=2.2)
    for x in (left, left + length):
        canvas.line([(x, bottom + 10), (x, bottom + 18)], colour=INK, width=1.4)
    canvas.text((left + length + 8, bottom + 14), f"{step:g} mm", size=10.5)


def _draw_column(canvas: Canvas, full_Pa: float) -> None:
    left, right = COLUMN
    canvas.line([(596, 16), (596, HEIGHT - 16)], colour=RULE, width=1.0)
    canvas.text((left, 20), "ring and inlets", size=11, bold=True)
    canvas.text((left, 256), "vacuum, kPa", size=10.5, colour=MUTED)
    for k in range(60):
        x = left + (right - left) * k / 60
        canvas.box((x, 266), (x + (right - left) / 60, 278), fill=vacuum_colour(full_Pa * k / 59, full_Pa))
    canvas.box((left, 266), (right, 278), fill=PAPER, line=MUTED) if full_Pa <= 0 else None
    for share in (0.0, 0.5, 1.0):
        anchor = ("lm", "mm", "rm")[round(2 * share)]
        at = (left + share * (right - left), 289.0)
        canvas.text(at, f"{share * full_Pa / 1e3:.0f}", size=10, colour=MUTED, anchor=anchor)
    _draw_foot_key(canvas, (left + 6, 312), loaded=True)
    _draw_foot_key(canvas, (left + 110, 312), loaded=False)


def _draw_foot_key(canvas: Canvas, at: Point, *, loaded: bool) -> None:
    canvas.disc(at, 5.0, fill=ORANGE if loaded else SWING_FOOT, line=INK if loaded else MUTED)
    canvas.text((at[0] + 11, at[1]), "foot stands" if loaded else "foot swings", size=10.5)
