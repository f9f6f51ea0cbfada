"""Which number of a bellows comes from where: bench reading, stated stiffness, or drawing; each of them once."""

from __future__ import annotations

from collections.abc import Callable

from gaitlab.body import bellows_geometry as drawing
from gaitlab.errors import InputError, must
from gaitlab.robot.parts import Bellows, BellowsGeometry

Drawing = Callable[[BellowsGeometry], float]
# No solid limit given and no drawing to tell it: this many times the measured free deflection (chosen by us).
STOP_BEYOND_MEASURED = 1.5


def bend_stiffness(bellows: Bellows) -> float:
    """Bending stiffness [N m/rad] of the whole bellows.

    One of: itself, the tip stiffness of a cantilever (k L²/3), the blocked force at its tip (2 F L/(3 θ)), the drawing.
    Raises InputError where several are given or none.
    """
    routes = {"bend_stiffness_N_m_rad": bellows.bend_stiffness_N_m_rad}
    bend = bellows.measured_bend
    if bend is not None:
        by_force = 2.0 * bellows.length_m / (3.0 * bend.free_bend_rad)
        routes["measured_bend.bend_stiffness_N_m_rad"] = bend.bend_stiffness_N_m_rad
        routes["measured_bend.tip_stiffness_N_mm"] = _scaled(bend.tip_stiffness_N_m, bellows.length_m**2 / 3.0)
        routes["measured_bend.blocked_force_N"] = _scaled(bend.blocked_force_N, by_force)
    return _one_of(bellows, routes, drawing.bend_rate)


def axial_stiffness(bellows: Bellows) -> float:
    """Axial stiffness [N/m] of the whole bellows: itself, blocked force over free stroke, or the drawing.

    Raises InputError where several are given or none: it decides the sign of the travel and never has a default.
    """
    routes = {"axial_stiffness_N_m": bellows.axial_stiffness_N_m}
    stroke = bellows.measured_stroke
    if stroke is not None:
        routes["measured_stroke.blocked_force_N"] = _scaled(stroke.blocked_force_N, 1.0 / stroke.free_stroke_m)
    return _one_of(bellows, routes, drawing.axial_rate)


def _scaled(value: float | None, factor: float) -> float | None:
    return None if value is None else value * factor


def _one_of(bellows: Bellows, routes: dict[str, float | None], from_drawing: Drawing) -> float:
    given = {key: value for key, value in routes.items() if value is not None}
    if len(given) > 1:
        rule = "given one of " + ", ".join(routes)
        raise InputError(must(f"bellows.{bellows.name}", rule, " and ".join(given), "keep the one you trust most"))
    if given:
        return next(iter(given.values()))
    if bellows.geometry is None:
        rule = "given one of " + ", ".join(routes) + ", or a geometry"
        raise InputError(must(f"bellows.{bellows.name}", rule, "none", "measure it: it decides how the robot travels"))
    return float(from_drawing(bellows.geometry))


def solid_limit(bellows: Bellows, free: float | None) -> float:
    """Deflection [rad or m] where the convolutions touch: as given, else by the drawing, else beyond the measured `free`.

    A measured deflection beats a drawing that says it cannot be. Raises InputError for a stated limit below it.
    """
    stated = bellows.solid_bend_rad if bellows.action == "bend" else bellows.solid_stroke_m
    if stated is not None:
        return _checked_limit(bellows, stated, free)
    if bellows.geometry is not None:
        limit = drawing.solid_bend if bellows.action == "bend" else drawing.solid_stroke
        return max(limit(bellows.geometry, bellows.length_m), free or 0.0)
    assert free is not None, "a bellows without a drawing has a measured deflection"
    beyond = STOP_BEYOND_MEASURED * free
    return beyond if bellows.action == "bend" else min(beyond, 0.5 * (free + bellows.length_m))


def solid_is_guessed(bellows: Bellows) -> bool:
    """Whether neither the file nor a drawing says where the convolutions touch."""
    return bellows.solid_bend_rad is None and bellows.solid_stroke_m is None and bellows.geometry is None


def _checked_limit(bellows: Bellows, stated: float, free: float | None) -> float:
    key = "solid_bend" if bellows.action == "bend" else "solid_stroke"
    name = f"bellows.{bellows.name}.{key}"
    if free is not None and stated < free:
        rule = f"at least the measured free deflection ({free:.4g} in SI units)"
        raise InputError(must(name, rule, f"{stated:.4g}", "measure both on the same bellows"))
    if bellows.action == "contract" and stated >= bellows.length_m:
        raise InputError(must(name, f"below the length ({bellows.length_m * 1e3:g} mm)", f"{stated * 1e3:g} mm"))
    return stated
