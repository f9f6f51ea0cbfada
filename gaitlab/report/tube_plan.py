"""The robot from above with its ring block and every tube: which port goes where."""

from __future__ import annotations

from collections.abc import Iterable
from typing import Any

import numpy as np
from matplotlib.axes import Axes
from matplotlib.patches import Rectangle

from gaitlab.report.style import BLUE, INK, MUTED, ORANGE, PAPER
from gaitlab.ring.tubing import block_places, inlet_places
from gaitlab.robot.records import Robot
from gaitlab.wiring.wiring import OPEN, Wiring

MM = 1e3
PORT_RADIUS = 0.085  # of the plan's longest side
CORNERS = 40
CROWDED = 8  # more inlets than this are named in small upright letters
LEVEL_LETTERS = 7  # and those with a longer name
NAME_LETTERS = 10  # of a name in the plan
LABEL_LETTERS = 16  # of all names at one place


def draw_tube_plan(ax: Axes, robot: Robot, wiring: Wiring) -> None:
    """Blocks as boxes, tubed inlets as named dots, the ring as a circle of numbered outputs, tubes as curves [mm]."""
    inlets = {name: MM * place[:2] for name, place in inlet_places(robot).items() if wiring.source(name) != OPEN}
    _draw_blocks(ax, robot)
    reach = _reach(robot, inlets)
    middle = np.mean(list(inlets.values()), axis=0) if inlets else np.zeros(2)
    ring = np.array((middle[0], max(place[1] for place in [*inlets.values(), middle]) + 0.42 * reach))
    ports = _ports(ring, PORT_RADIUS * reach, robot.ring.stages)
    for inlet, place in inlets.items():
        source = wiring.source(inlet)
        start = ports[source - 1] if isinstance(source, int) else ring + np.array((0.0, 1.8 * PORT_RADIUS * reach))
        _draw_tube(ax, start, place, ring)
    _draw_ring(ax, ring, PORT_RADIUS * reach, ports)
    _draw_inlets(ax, inlets, reach)
    ax.set_aspect("equal")
    ax.margins(0.06)
    low, high = ax.get_ylim()
    ax.set_ylim(low - (0.2 if _crowded(inlets) else 0.08) * reach, high)  # room for the names
    ax.set_xlabel("forward x (mm)", fontsize=7)
    ax.set_ylabel("left y (mm)", fontsize=7)
    ax.tick_params(labelsize=6.5, length=2)


def _draw_inlets(ax: Axes, inlets: dict[str, np.ndarray], reach: float) -> None:
    """Dots with names below; names that share a place share a line, and many or long ones stand upright."""
    crowded = _crowded(inlets)
    places: dict[tuple[float, float], list[str]] = {}
    for inlet, place in inlets.items():
        places.setdefault((round(float(place[0]), 1), round(float(place[1]), 1)), []).append(inlet)
    for (x, y), names in places.items():
        ax.plot(x, y, marker="o", ms=3.5 if crowded else 5.0, mfc=BLUE, mec=INK, mew=0.6)
        look: dict[str, Any] = {"fontsize": 5.5, "rotation": 90} if crowded else {"fontsize": 7.5}
        ax.text(x, y - 0.03 * reach, _listed(names), ha="center", va="top", fontweight="bold", color=INK, **look)


def _crowded(inlets: Iterable[str]) -> bool:
    names = list(inlets)
    return len(names) > CROWDED or any(len(name) > LEVEL_LETTERS for name in names)


def _listed(names: list[str]) -> str:
    """As many of the names as `LABEL_LETTERS` hold, at least one, and how many more there are."""
    shown = [_short(name) for name in names]
    for left_out in range(len(names)):
        text = ", ".join(shown[: len(names) - left_out] + ([f"+{left_out}"] if left_out else []))
        if len(text) <= LABEL_LETTERS:
            break
    return text


def _short(name: str) -> str:
    """The table has the whole name.

    >>> _short("front_left"), _short("front_left_bellows")
    ('front_left', 'fron…llows')
    """
    return name if len(name) <= NAME_LETTERS else f"{name[:4]}…{name[4 - NAME_LETTERS + 1 :]}"


def _draw_blocks(ax: Axes, robot: Robot) -> None:
    places = block_places(robot)
    for block in robot.body.blocks:
        low = MM * (places[block.name][:2] - 0.5 * np.array(block.size_m[:2]))
        width, height = MM * block.size_m[0], MM * block.size_m[1]
        ax.add_patch(Rectangle((low[0], low[1]), width, height, facecolor="#eef0f2", edgecolor=MUTED, lw=0.9))


def _reach(robot: Robot, inlets: dict[str, np.ndarray]) -> float:
    """The plan's longest side [mm], which sizes the ring and the letters' distance."""
    ends = [*inlets.values()]
    for block in robot.body.blocks:
        centre = MM * block_places(robot)[block.name][:2]
        half = 0.5 * MM * np.array(block.size_m[:2])
        ends += [centre - half, centre + half]
    cloud = np.array(ends)
    return float(np.ptp(cloud, axis=0).max())


def _ports(centre: np.ndarray, radius: float, stages: int) -> list[np.ndarray]:
    """Places of the ports, 1 at the top, clockwise."""
    turns = 2 * np.pi * np.arange(stages) / stages
    return [centre + radius * np.array([np.sin(turn), np.cos(turn)]) for turn in turns]


def _draw_tube(ax: Axes, start: np.ndarray, end: np.ndarray, ring: np.ndarray) -> None:
    """A tube that leaves the ring outward and bends to its inlet (quadratic Bézier curve)."""
    outward = start + 0.9 * (start - ring)
    t = np.linspace(0.0, 1.0, CORNERS)[:, None]
    curve = (1 - t) ** 2 * start + 2 * t * (1 - t) * outward + t**2 * end
    ax.plot(curve[:, 0], curve[:, 1], color=PAPER, lw=3.0, solid_capstyle="round")
    ax.plot(curve[:, 0], curve[:, 1], color=ORANGE, lw=1.3, solid_capstyle="round")


def _draw_ring(ax: Axes, centre: np.ndarray, radius: float, ports: list[np.ndarray]) -> None:
    turn = np.linspace(0, 2 * np.pi, 73)
    ax.plot(centre[0] + radius * np.sin(turn), centre[1] + radius * np.cos(turn), color=INK, lw=1.2)
    small = 7.0 if len(ports) <= 9 else 5.0
    for k, place in enumerate(ports):
        ax.plot(*place, marker="o", ms=1.35 * small, mfc=PAPER, mec=INK, mew=1.0)
        ax.text(
            float(place[0]),
            float(place[1]),
            str(k + 1),
            ha="center",
            va="center",
            fontsize=0.85 * small,
            fontweight="bold",
        )
    for k in range(len(ports)):
        turn_back = 2 * np.pi * (k + 0.5) / len(ports)
        at = centre + radius * np.array([np.sin(turn_back), np.cos(turn_back)])
        ax.plot(*at, marker=(3, 0, -90.0 - np.degrees(turn_back)), ms=0.75 * small, color=INK)
