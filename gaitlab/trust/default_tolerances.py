"""Tolerances that hold when a robot file gives none of its own, each with where it comes from.

The table is printed with every spread, so that a builder can see what was assumed and put measured figures into the file.
"""

from __future__ import annotations

from dataclasses import dataclass

from gaitlab.robot.paths import places_of
from gaitlab.robot.records import Tolerance
from gaitlab.trust.places import Document, default_at, with_value

CHANNEL = "cast or printed channel walls within 0.05 mm: common practice, no source"
GAUGE = "gauge noise of a bench reading: chosen by us"
SILICONE = "batch and wall thickness of cast silicone: chosen by us"
CHOSEN = "chosen by us"


@dataclass(frozen=True)
class DefaultTolerance:
    """One assumed tolerance: a key pattern (``*`` for every type), its size, who shares the draw, and its source."""

    pattern: str
    source: str
    plus_minus: float | None = None
    percent: float | None = None
    each: str = "shared"
    kind: str = "uniform"

    def tolerance(self, key: str) -> Tolerance:
        """The tolerance of one concrete key."""
        return Tolerance(key, self.kind, self.plus_minus, self.percent, self.each)


DEFAULTS = (
    DefaultTolerance("ring.resistor.square_mm", CHANNEL, plus_minus=0.05, each="stage"),
    DefaultTolerance("ring.resistor.width_mm", CHANNEL, plus_minus=0.05, each="stage"),
    DefaultTolerance("ring.resistor.height_mm", CHANNEL, plus_minus=0.05, each="stage"),
    DefaultTolerance("ring.resistor.bore_mm", "tube bore: chosen by us", percent=5, each="stage"),
    DefaultTolerance("ring.resistor.sonic_conductance_dm3_s_bar", CHOSEN, percent=10, each="stage"),
    DefaultTolerance("ring.resistor.reading_kPa", GAUGE, plus_minus=1.0, each="stage"),
    DefaultTolerance("ring.valve.threshold_kPa", "membrane and seat: chosen by us", percent=10, each="stage"),
    DefaultTolerance("ring.valve.membrane_mm", "rolled or spun membrane: chosen by us", percent=5, each="stage"),
    DefaultTolerance("ring.valve.youngs_MPa", SILICONE, percent=15),
    DefaultTolerance("ring.valve.shore_A", "hardness scatter of one grade: chosen by us", plus_minus=3.0),
    DefaultTolerance("supply.free_flow_L_min", "pump to pump, mains and wear: chosen by us", percent=10),
    DefaultTolerance("supply.table_flow_L_min", "pump to pump, mains and wear: chosen by us", percent=10),
    DefaultTolerance("supply.dead_end_vacuum_kPa", "pump to pump: chosen by us", percent=5),
    DefaultTolerance("supply.fixed_vacuum_kPa", "vacuum line through the day: chosen by us", percent=5),
    DefaultTolerance(
        "ground.friction_factor", "wet, dusty or dry floor; friction is a guess: chosen by us", percent=25
    ),
    DefaultTolerance("bellows.*.bend_stiffness_N_m_rad", SILICONE, percent=15, each="leg"),
    DefaultTolerance("bellows.*.measured_bend.bend_stiffness_N_m_rad", SILICONE, percent=15, each="leg"),
    DefaultTolerance("bellows.*.measured_bend.tip_stiffness_N_mm", SILICONE, percent=15, each="leg"),
    DefaultTolerance("bellows.*.measured_bend.blocked_force_N", SILICONE, percent=15, each="leg"),
    DefaultTolerance("bellows.*.measured_stroke.blocked_force_N", SILICONE, percent=15, each="leg"),
    DefaultTolerance("bellows.*.axial_stiffness_N_m", SILICONE, percent=15, each="leg"),
    DefaultTolerance("bellows.*.geometry.youngs_MPa", SILICONE, percent=15, each="leg"),
    DefaultTolerance("bellows.*.geometry.spring_rate_N_mm", SILICONE, percent=15, each="leg"),
    DefaultTolerance("bellows.*.geometry.shore_A", "hardness scatter of one grade: chosen by us", plus_minus=3.0),
    DefaultTolerance("bellows.*.bend_damping_ms", "damping is seldom measured: chosen by us", percent=30),
    DefaultTolerance("bellows.*.axial_damping_ms", "damping is seldom measured: chosen by us", percent=30),
)


# Numbers that matter even where the file leaves them at their defaults: the default is then stated before it is drawn.
ASSUMED = ("friction_factor", "bend_damping_ms", "axial_damping_ms")


def default_tolerances(document: Document) -> tuple[Document, list[tuple[Tolerance, str]]]:
    """The defaults that fit this document, each with its source, and the document with the numbers they need stated.

    A pattern whose number the file does not give is left out, but for the floor's friction factor and the dampings.
    """
    chosen: list[tuple[Tolerance, str]] = []
    for default in DEFAULTS:
        for key in _keys(document, default.pattern):
            document = _stated(document, key)
            if places_of(document, ".".join(key)):
                chosen.append((default.tolerance(".".join(key)), "default: " + default.source))
    return document, chosen


def _keys(document: Document, pattern: str) -> list[tuple[str, ...]]:
    parts = tuple(pattern.split("."))
    if "*" not in parts:
        return [parts]
    return [tuple(name if part == "*" else part for part in parts) for name in document.get(parts[0], {})]


def _stated(document: Document, key: tuple[str, ...]) -> Document:
    if key[-1] not in ASSUMED or places_of(document, ".".join(key)):
        return document
    return with_value(document, key, default_at(key))
