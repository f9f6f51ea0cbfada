"""The ring as a picture: stages on a circle in ring order, filled by their vacuum, the running edge, and the inlets they feed."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from gaitlab.report.body_view import vacuum_colour
from gaitlab.report.canvas import Canvas, Point, text_width
from gaitlab.report.signal import signal_path
from gaitlab.report.style import AMBER, INK, MUTED, ORANGE, PAPER
from gaitlab.ring.waves import RingRun
from gaitlab.wiring.wiring import Wiring

DARK_TEXT_LIMIT = 0.55  # share of full vacuum above which white figures read better, chosen by us


@dataclass(frozen=True)
class RingPlace:
    """Where the ring sits in the picture [px]."""

    centre: Point
    radius: float
    reach: Point  # names stay between these, left and right

    def point(self, position: float, stages: int, *, radius: float | None = None) -> Point:
        """The place of a position counted in stages from 0: stage 1 at the top, numbers rising clockwise."""
        turn = 2 * math.pi * position / stages
        reach = self.radius if radius is None else radius
        return self.centre[0] + reach * math.sin(turn), self.centre[1] - reach * math.cos(turn)


def draw_ring(canvas: Canvas, ring: RingRun, wiring: Wiring, *, phase: float, place: RingPlace, full_Pa: float) -> None:
    """Paint the ring at `phase` (periods)."""
    stages = len(ring.phase)
    node = min(15.0, 0.8 * math.pi * place.radius / stages)
    _draw_loop(canvas, stages, place)
    _draw_signal(canvas, ring, phase, place, node)
    for stage in range(stages):
        vacuum = _vacuum(ring, stage, phase)
        _draw_stage(canvas, stage, place.point(stage, stages), node, vacuum, full_Pa)
        _draw_inlets(canvas, wiring.inlets_on(stage + 1), stage, stages, place, node)


def _draw_signal(canvas: Canvas, ring: RingRun, phase: float, place: RingPlace, node: float) -> None:
    """The running edge as a dot, which swells to a halo while it is at a stage: filled evacuates, hollow vents."""
    path = signal_path(ring)
    if path is None:
        return
    stages = len(ring.phase)
    position, evacuates = path.at(phase)
    near = abs(position - round(position)) * 2 * math.pi * place.radius / stages
    if near < node:
        canvas.disc(place.point(round(position), stages), node + 4.5 * (1.0 - near / node) + 1.0, fill=AMBER)
    canvas.disc(place.point(position, stages), 6.0, fill=AMBER if evacuates else PAPER, line=ORANGE, width=2.0)


def _vacuum(ring: RingRun, stage: int, phase: float) -> float:
    row = ring.output_vacuum_Pa[stage]
    at = (phase % 1.0) * len(row)
    return float(np.interp(at, np.arange(len(row) + 1), np.append(row, row[0])))


def _draw_loop(canvas: Canvas, stages: int, place: RingPlace) -> None:
    turns = np.linspace(0, stages, 97)
    canvas.line([place.point(turn, stages) for turn in turns], colour=MUTED, width=1.6)
    for stage in range(stages):
        _draw_arrow(canvas, stage + 0.5, stages, place)


def _draw_arrow(canvas: Canvas, position: float, stages: int, place: RingPlace) -> None:
    """A small head that points on to the next stage."""
    reach = 5.0 / place.radius * stages / (2 * math.pi)
    tip = place.point(position + reach, stages)
    sides = [place.point(position - reach, stages, radius=place.radius + off) for off in (-4.0, 4.0)]
    canvas.polygon([tip, *sides], fill=MUTED)


def _draw_stage(canvas: Canvas, stage: int, at: Point, node: float, vacuum_Pa: float, full_Pa: float) -> None:
    canvas.disc(at, node, fill=vacuum_colour(vacuum_Pa, full_Pa), line=INK, width=1.2)
    colour = PAPER if vacuum_Pa / full_Pa > DARK_TEXT_LIMIT else INK
    canvas.text(at, str(stage + 1), size=min(12.0, 0.85 * node), colour=colour, anchor="mm", bold=True)


def _draw_inlets(
    canvas: Canvas, inlets: tuple[str, ...], stage: int, stages: int, place: RingPlace, node: float
) -> None:
    """The names of the inlets an output feeds, outside the ring at the end of a short tube."""
    if not inlets:
        return
    start, end = (place.point(stage, stages, radius=place.radius + reach) for reach in (node, node + 9.0))
    canvas.line([start, end], colour=INK, width=2.0)
    x, y = place.point(stage, stages, radius=place.radius + node + 13.0)
    words = _short(inlets)
    half, lean = 0.5 * text_width(words, 11.0, bold=True), (x - place.centre[0]) / place.radius
    x += half * min(max(2.0 * lean, -1.0), 1.0)
    x = min(max(x, place.reach[0] + half), place.reach[1] - half)
    sideways = 5.0 * (1.0 - min(abs(lean), 1.0))
    canvas.text((x, y + (sideways if y > place.centre[1] else -sideways)), words, size=11.0, anchor="mm", bold=True)


def _short(inlets: tuple[str, ...]) -> str:
    text = ", ".join(inlets)
    return text if len(text) <= 12 else f"{inlets[0][:8]} +{len(inlets) - 1}"
