"""One view of the moving body (from the side or from above) painted on a canvas from a recorded trace."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

import numpy as np
from matplotlib.colors import to_hex, to_rgb
from numpy.typing import NDArray

from gaitlab.gait.records import Trace
from gaitlab.report.canvas import Canvas, hull
from gaitlab.report.solids import Solid, rotated
from gaitlab.report.style import INK, MUTED, ORANGE, PAPER, vacuum_scale

FloatArray = NDArray[np.float64]
TRUNK = "#c9cfd4"
TRUNK_TOP = "#e6e9eb"
SWING_FOOT = "#ffffff"
PALE_LIMIT = 0.45  # Rec. 601 luma below which an ink outline would drown, chosen by us
SHADES = 255
FAR_FADE = 0.45  # how much the farthest part pales towards the paper, chosen by us


@dataclass(frozen=True)
class Camera:
    """Maps world [m] to the picture [px]: forward x to the right; `axis` 2 looks from the right side, 1 from above."""

    axis: int
    px_per_m: float
    left_m: float
    level_m: float
    left_px: float
    level_px: float

    def pixels(self, points_m: FloatArray) -> FloatArray:
        """Points (n, 3) as pixels (n, 2)."""
        u = self.left_px + (points_m[:, 0] - self.left_m) * self.px_per_m
        v = self.level_px - (points_m[:, self.axis] - self.level_m) * self.px_per_m
        return np.stack([u, v], axis=1)

    def distance(self, points_m: FloatArray) -> float:
        """How far away the points are, in the sense of painting order: larger is farther."""
        middle = points_m.mean(axis=0)
        return float(middle[1]) if self.axis == 2 else float(-middle[2])


def draw_body(
    canvas: Canvas, trace: Trace, solids: tuple[Solid, ...], *, frame: int, camera: Camera, full_Pa: float
) -> None:
    """Paint every solid at `frame`, far ones first; bellows take the colour of their inlet's vacuum, `full_Pa` the darkest."""
    placed = [(solid, _world_points(solid, trace, frame)) for solid in solids]
    ordered = sorted(placed, key=lambda item: _painting_order(item[0], camera.distance(item[1]), camera))
    depths = [camera.distance(points) for _, points in placed]
    near, far = min(depths), max(depths)
    deep = camera.axis == 2 and float(np.ptp(trace.foot_m[frame, :, 1])) > 0.5 * (far - near)
    for solid, points in ordered:
        fade = round(FAR_FADE * (camera.distance(points) - near) / (far - near), 2) if deep else 0.0
        _draw_solid(canvas, solid, points, camera, _fill(solid, trace, frame, full_Pa), fade)


def _painting_order(solid: Solid, distance_m: float, camera: Camera) -> tuple[bool, float]:
    """Far things first; from above the blocks before all else, as if of glass, for they would hide the bellows."""
    return (camera.axis == 2 or solid.kind != "box", -distance_m)


def _world_points(solid: Solid, trace: Trace, frame: int) -> FloatArray:
    turned = rotated(solid.points_m, trace.quaternion[frame, solid.part])
    return np.asarray(turned + trace.position_m[frame, solid.part])


def _fill(solid: Solid, trace: Trace, frame: int, full_Pa: float) -> str:
    if solid.inlet is None or solid.inlet not in trace.inlets:
        return TRUNK_TOP if solid.kind == "box" else TRUNK
    vacuum = trace.vacuum_Pa[frame, trace.inlets.index(solid.inlet)]
    return vacuum_colour(float(vacuum), full_Pa)


def vacuum_colour(vacuum_Pa: float, full_Pa: float) -> str:
    """The colour of a vacuum on the scale from atmosphere to `full_Pa`."""
    return _shade(round(SHADES * min(max(vacuum_Pa / full_Pa, 0.0), 1.0)))


@cache
def _shade(step: int) -> str:
    return to_hex(vacuum_scale()(step / SHADES))


def _draw_solid(canvas: Canvas, solid: Solid, points_m: FloatArray, camera: Camera, fill: str, fade: float) -> None:
    line = faded(_outline(fill), fade)
    pixels = camera.pixels(points_m)
    if solid.kind == "ball":
        canvas.disc(tuple(pixels[0]), solid.radius_m * camera.px_per_m, fill=faded(fill, fade), line=line, width=0.8)
    else:
        width = 1.2 if solid.kind == "box" else 0.7
        canvas.polygon(hull(pixels), fill=faded(fill, fade), line=line, width=width)


@cache
def _outline(fill: str) -> str:
    """Ink round light things; round dark ones a paler shade of their own, so that ribs stay apart."""
    light = float(np.dot(to_rgb(fill), (0.299, 0.587, 0.114)))
    return INK if light > PALE_LIMIT else faded(fill, 0.5)


@cache
def faded(colour: str, share: float) -> str:
    """The colour moved towards the paper by a share of the way; a negative share moves it towards black."""
    a, b = np.array(to_rgb(colour)), np.array(to_rgb(PAPER if share >= 0.0 else "#000000"))
    return to_hex(a + abs(share) * (b - a))


def draw_feet(canvas: Canvas, trace: Trace, *, frame: int, camera: Camera, radius_px: float) -> None:
    """Mark every foot: a filled orange disc under load, a hollow one while it swings; from above with its name."""
    order = sorted(range(len(trace.feet)), key=lambda f: -camera.distance(trace.foot_m[frame, f : f + 1]))
    for foot in order:
        at = camera.pixels(trace.foot_m[frame, foot : foot + 1])[0]
        loaded = bool(trace.loaded[frame, foot])
        canvas.disc(
            tuple(at), radius_px, fill=ORANGE if loaded else SWING_FOOT, line=INK if loaded else MUTED, width=1.0
        )
        if camera.axis == 1:
            canvas.text(
                (at[0], at[1] - radius_px - 8.0), trace.feet[foot], size=10.5, anchor="mm", bold=True, halo=True
            )
