"""The law of one bellows: how it moves, pulls and holds air as a function of the vacuum inside it.

A bending bellows has a stiff side, so vacuum makes it curl; a contracting one shortens. Both are linear springs pulled
by a moment (or force) that is proportional to the vacuum, until the convolutions touch: there a spring that starts
softly stops them. Every number is of the whole bellows; the body model splits it into segments.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from gaitlab.body import bellows_geometry as drawing
from gaitlab.errors import InputError, must
from gaitlab.robot.parts import Bellows, BellowsGeometry

FloatArray = NDArray[np.float64]
Drawing = Callable[[BellowsGeometry], float]

# Full vacuum takes a bellows at most this fraction of the solid deflection past its limit (chosen by us: convolutions
# touch one after the other, and a harder stop would need a shorter step).
STOP_WIDTH = 0.25
# No solid limit given and no drawing to tell it: this many times the measured free deflection (chosen by us).
STOP_BEYOND_MEASURED = 1.5
FULL_VACUUM_PA = 101_325.0


@dataclass(frozen=True)
class BellowsLaw:
    """One bellows against gauge vacuum [Pa].

    `gain` is the actuation per vacuum [N m/Pa for a bend, N/Pa for a contraction]; deflections are in rad or m; stiffness
    in N m/rad and N/m. `solid` is where the convolutions touch, `swept_at` the deflection that takes out `swept_m3`.
    """

    name: str
    action: str
    source: str
    length_m: float
    gain: float
    bend_stiffness: float
    axial_stiffness: float
    solid: float
    rest_m3: float
    swept_m3: float
    swept_at: float
    warnings: tuple[str, ...] = ()

    @property
    def stiffness(self) -> float:
        """Stiffness of the motion that the vacuum drives: bending [N m/rad] or axial [N/m]."""
        return self.bend_stiffness if self.action == "bend" else self.axial_stiffness

    @property
    def tip_stiffness(self) -> float:
        """Sideways stiffness [N/m] of the tip, base held: 3 EI/L³ with EI = k L, the cantilever of beam theory."""
        return float(3.0 * self.bend_stiffness / self.length_m**2)

    def actuation(self, vacuum_Pa: ArrayLike) -> FloatArray:
        """Moment [N m] or force [N] by which the vacuum pulls, whatever the deflection: gain · vacuum."""
        return np.asarray(self.gain * np.asarray(vacuum_Pa, dtype=float))

    def moment(self, vacuum_Pa: ArrayLike) -> FloatArray:
        """Bending moment [N m] of a bending bellows, constant along it; zeros for a contracting one."""
        return self.actuation(vacuum_Pa) if self.action == "bend" else np.zeros_like(np.asarray(vacuum_Pa, float))

    def force(self, vacuum_Pa: ArrayLike) -> FloatArray:
        """Pull [N] along the axis of a contracting bellows; zeros for a bending one."""
        return self.actuation(vacuum_Pa) if self.action == "contract" else np.zeros_like(np.asarray(vacuum_Pa, float))

    @property
    def stop_gain(self) -> float:
        """Stop force over the square of the way past the limit [N m/rad² or N/m²]: F_full/(STOP_WIDTH · solid)².

        F_full is the pull at full vacuum, or the spring's own at the limit where that is more.
        """
        full = max(self.gain * FULL_VACUUM_PA, self.stiffness * self.solid)
        return full / (STOP_WIDTH * self.solid) ** 2

    def stop(self, deflection: ArrayLike) -> FloatArray:
        """Moment or force of the solid limit, along the deflection: stop_gain · d² for d = |deflection| − solid > 0.

        Force and slope both start from zero, so that an integrator sees no jump.
        """
        deflection = np.asarray(deflection, dtype=float)
        past = np.maximum(np.abs(deflection) - self.solid, 0.0)
        return np.asarray(np.sign(deflection) * self.stop_gain * past**2)

    def free_deflection(self, vacuum_Pa: ArrayLike) -> FloatArray:
        """Deflection [rad or m] without load: gain · vacuum/k up to the solid limit, then held back by the stop."""
        return self._free(vacuum_Pa)[0]

    def _free(self, vacuum_Pa: ArrayLike) -> tuple[FloatArray, FloatArray]:
        """Free deflection and its derivative with vacuum: the root of k x + stop(x) = gain · vacuum, in closed form."""
        linear = self.actuation(vacuum_Pa) / self.stiffness
        excess = np.maximum(np.abs(linear) - self.solid, 0.0)
        root = np.sqrt(1.0 + 4.0 * self.stop_gain / self.stiffness * excess)
        held = self.solid + (root - 1.0) * self.stiffness / (2.0 * self.stop_gain)
        deflection = np.where(excess > 0.0, np.sign(linear) * held, linear)
        return deflection, self.gain / self.stiffness / root

    def volume(self, vacuum_Pa: ArrayLike) -> tuple[FloatArray, FloatArray]:
        """Gas volume [m³] of the unloaded bellows and its derivative with vacuum [m³/Pa].

        V = rest − swept · deflection/swept_at: the volume follows the shape, in the free quasi-static motion.
        """
        deflection, slope = self._free(vacuum_Pa)
        per_deflection = self.swept_m3 / self.swept_at
        return self.rest_m3 - per_deflection * deflection, -per_deflection * slope

    def volume_at(self, deflection: ArrayLike) -> FloatArray:
        """Gas volume [m³] at a given deflection [rad or m]."""
        return np.asarray(self.rest_m3 - self.swept_m3 / self.swept_at * np.asarray(deflection, dtype=float))

    def blocked_force(self, vacuum_Pa: ArrayLike) -> FloatArray:
        """Force [N] with the moving end held where it was: the full pull, or 3 M/(2 L) at the tip of a bending bellows.

        The tip of a cantilever under an even moment M goes M L²/(2 EI) aside, a tip force F takes it F L³/(3 EI) back.
        """
        if self.action == "contract":
            return self.force(vacuum_Pa)
        return 1.5 * self.moment(vacuum_Pa) / self.length_m


def bellows_law(bellows: Bellows) -> BellowsLaw:
    """The law of a bellows type, from its bench numbers where it has any, else from its drawing.

    A measured free deflection wins over the drawing; the drawing fills what was not measured. Raises InputError where
    neither says a number that the motion hangs on (the axial stiffness never has a default).
    """
    law = _measured(bellows) if _bench(bellows) is not None else _drawn(bellows)
    _check_volume(law, bellows)
    return law


def _bench(bellows: Bellows) -> object:
    return bellows.measured_bend if bellows.action == "bend" else bellows.measured_stroke


def _measured(bellows: Bellows) -> BellowsLaw:
    bend, stroke = bellows.measured_bend, bellows.measured_stroke
    if bellows.action == "bend" and bend is not None:
        free, vacuum = bend.free_bend_rad, bend.at_vacuum_Pa
        bending, axial = _measured_bend_stiffness(bellows), _axial(bellows)
        pull = bending * free
    elif stroke is not None:
        free, vacuum = stroke.free_stroke_m, stroke.at_vacuum_Pa
        bending, axial = _bending(bellows), _measured_axial(bellows)
        pull = axial * free
    solid = _solid(bellows, free)
    warnings = () if _solid_known(bellows) else (_no_solid_text(bellows),)
    return _law(bellows, "measured", pull / vacuum, (bending, axial), solid, free, warnings)


def _drawn(bellows: Bellows) -> BellowsLaw:
    key = "measured_bend" if bellows.action == "bend" else "measured_stroke"
    if bellows.geometry is None:
        raise InputError(must(f"bellows.{bellows.name}", f"given {key} or geometry", "neither"))
    shape, gain, warnings = bellows.geometry, drawing.effective_area(bellows.geometry), []
    if bellows.action == "bend":
        if shape.eccentricity_m <= 0:
            raise InputError(_no_lever_text(bellows))
        gain *= shape.eccentricity_m
        if bellows.axial_stiffness_N_m is None:
            warnings.append(_spine_text(bellows))
    solid = _solid(bellows, None)
    return _law(bellows, "geometry", gain, (_bending(bellows), _axial(bellows)), solid, solid, tuple(warnings))


def _law(
    bellows: Bellows,
    source: str,
    gain: float,
    stiffness: tuple[float, float],
    solid: float,
    swept_at: float,
    warnings: tuple[str, ...],
) -> BellowsLaw:
    return BellowsLaw(
        name=bellows.name,
        action=bellows.action,
        source=source,
        length_m=bellows.length_m,
        gain=gain,
        bend_stiffness=stiffness[0],
        axial_stiffness=stiffness[1],
        solid=solid,
        rest_m3=bellows.rest_volume_m3,
        swept_m3=bellows.swept_volume_m3,
        swept_at=swept_at,
        warnings=warnings,
    )


def _measured_bend_stiffness(bellows: Bellows) -> float:
    """Whole bending stiffness from one of: itself, tip stiffness (k L²/3), blocked tip force (2 F L/(3 θ)), drawing."""
    bend = bellows.measured_bend
    assert bend is not None
    routes = {
        "bend_stiffness_N_m_rad": bellows.bend_stiffness_N_m_rad,
        "measured_bend.bend_stiffness_N_m_rad": bend.bend_stiffness_N_m_rad,
        "measured_bend.tip_stiffness_N_mm": _scaled(bend.tip_stiffness_N_m, bellows.length_m**2 / 3.0),
        "measured_bend.blocked_force_N": _scaled(
            bend.blocked_force_N, 2.0 * bellows.length_m / (3.0 * bend.free_bend_rad)
        ),
    }
    return _one_of(bellows, routes, drawing.bend_rate)


def _measured_axial(bellows: Bellows) -> float:
    """Whole axial stiffness of a contracting bellows from one of: itself, blocked force over free stroke, drawing."""
    stroke = bellows.measured_stroke
    assert stroke is not None
    routes = {
        "axial_stiffness_N_m": bellows.axial_stiffness_N_m,
        "measured_stroke.blocked_force_N": _scaled(stroke.blocked_force_N, 1.0 / stroke.free_stroke_m),
    }
    return _one_of(bellows, routes, drawing.axial_rate)


def _bending(bellows: Bellows) -> float:
    return _one_of(bellows, {"bend_stiffness_N_m_rad": bellows.bend_stiffness_N_m_rad}, drawing.bend_rate)


def _axial(bellows: Bellows) -> float:
    return _one_of(bellows, {"axial_stiffness_N_m": bellows.axial_stiffness_N_m}, drawing.axial_rate)


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


def _solid_given(bellows: Bellows) -> float | None:
    return bellows.solid_bend_rad if bellows.action == "bend" else bellows.solid_stroke_m


def _solid_known(bellows: Bellows) -> bool:
    return _solid_given(bellows) is not None or bellows.geometry is not None


def _solid(bellows: Bellows, free: float | None) -> float:
    """Deflection where the convolutions touch: as given, from the drawing, or beyond the measured one."""
    given = _solid_given(bellows)
    if given is None and bellows.geometry is not None:
        limit = drawing.solid_bend if bellows.action == "bend" else drawing.solid_stroke
        given = limit(bellows.geometry, bellows.length_m)
    if given is None:
        assert free is not None
        given = STOP_BEYOND_MEASURED * free
    if free is not None and given < free:
        key = "solid_bend" if bellows.action == "bend" else "solid_stroke"
        rule = f"at least the measured free deflection ({free:.4g} in SI units)"
        raise InputError(
            must(f"bellows.{bellows.name}.{key}", rule, f"{given:.4g}", "measure both on the same bellows")
        )
    if bellows.action == "contract" and given >= bellows.length_m:
        rule = f"below the length ({bellows.length_m * 1e3:g} mm)"
        raise InputError(must(f"bellows.{bellows.name}.solid_stroke", rule, f"{given * 1e3:g} mm"))
    return given


def _check_volume(law: BellowsLaw, bellows: Bellows) -> None:
    least = float(law.volume(FULL_VACUUM_PA)[0])
    if least <= 0:
        rule = f"below the rest volume ({law.rest_m3 * 1e6:g} mL) at full vacuum"
        got = f"{(law.rest_m3 - least) * 1e6:.3g} mL swept"
        raise InputError(
            must(f"bellows.{bellows.name}.swept_mL", rule, got, "swept_mL belongs to the bench deflection")
        )


def _no_solid_text(bellows: Bellows) -> str:
    return (
        f"no_solid_limit: bellows {bellows.name} states none; {STOP_BEYOND_MEASURED:g} times the measured free "
        "deflection is used"
    )


def _no_lever_text(bellows: Bellows) -> str:
    fix = "give the distance from the stiff side to the axis"
    return must(f"bellows.{bellows.name}.geometry.eccentricity_mm", "above 0 mm for a bending bellows", 0.0, fix)


def _spine_text(bellows: Bellows) -> str:
    return (
        f"axial_from_drawing: the axial stiffness of bellows {bellows.name} is that of the convolutions alone; a stiff "
        "spine adds to it, and it decides the sign of the travel: measure it"
    )
