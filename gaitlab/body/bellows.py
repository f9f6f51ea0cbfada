"""The law of one bellows: how it moves, pulls and holds air as a function of the vacuum inside it.

A bending bellows has a stiff side, so vacuum makes it curl; a contracting one shortens. Both are linear springs pulled
by a moment (or force) that is proportional to the vacuum, until the convolutions touch: there a spring that starts
softly stops them. Every number is of the whole bellows; the body model splits it into segments.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import ArrayLike, NDArray

from gaitlab.body import bellows_geometry as drawing
from gaitlab.body import bellows_numbers as numbers
from gaitlab.errors import InputError, must
from gaitlab.robot.parts import Bellows

FloatArray = NDArray[np.float64]

# Full vacuum takes a bellows at most this fraction of the solid deflection past its limit (chosen by us: convolutions
# touch one after the other, and a harder stop would need a shorter step).
STOP_WIDTH = 0.25
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
    bending, axial = numbers.bend_stiffness(bellows), numbers.axial_stiffness(bellows)
    bench = _bench(bellows)
    if bench is None:
        gain, free = _drawn_gain(bellows), None
    else:
        free, vacuum_Pa = bench
        gain = (bending if bellows.action == "bend" else axial) * free / vacuum_Pa
    solid = numbers.solid_limit(bellows, free)
    law = BellowsLaw(
        name=bellows.name,
        action=bellows.action,
        source="geometry" if bench is None else "measured",
        length_m=bellows.length_m,
        gain=gain,
        bend_stiffness=bending,
        axial_stiffness=axial,
        solid=solid,
        rest_m3=bellows.rest_volume_m3,
        swept_m3=bellows.swept_volume_m3,
        swept_at=solid if free is None else free,
    )
    _check_volume(law)
    return replace(law, warnings=tuple(_doubts(bellows, law)))


def _bench(bellows: Bellows) -> tuple[float, float] | None:
    """Measured free deflection and the vacuum [Pa] it was measured at; None without a bench."""
    if bellows.action == "bend":
        bend = bellows.measured_bend
        return None if bend is None else (bend.free_bend_rad, bend.at_vacuum_Pa)
    stroke = bellows.measured_stroke
    return None if stroke is None else (stroke.free_stroke_m, stroke.at_vacuum_Pa)


def _drawn_gain(bellows: Bellows) -> float:
    """Pull per vacuum of a drawn bellows: A_e [N/Pa], or A_e e [N m/Pa] about the stiff spine of a bending one."""
    if bellows.geometry is None:
        key = "measured_bend" if bellows.action == "bend" else "measured_stroke"
        raise InputError(must(f"bellows.{bellows.name}", f"given {key} or geometry", "neither"))
    area, lever = drawing.effective_area(bellows.geometry), bellows.geometry.eccentricity_m
    if bellows.action == "contract":
        return area
    if lever <= 0:
        fix = "give the distance from the stiff side to the axis"
        name = f"bellows.{bellows.name}.geometry.eccentricity_mm"
        raise InputError(must(name, "above 0 mm for a bending bellows", lever, fix))
    return area * lever


def _check_volume(law: BellowsLaw) -> None:
    least = float(law.volume(FULL_VACUUM_PA)[0])
    if least <= 0:
        rule = f"below the rest volume ({law.rest_m3 * 1e6:g} mL) at full vacuum"
        got = f"{(law.rest_m3 - least) * 1e6:.3g} mL swept"
        fix = "swept_mL belongs to the bench deflection"
        raise InputError(must(f"bellows.{law.name}.swept_mL", rule, got, fix))


def _doubts(bellows: Bellows, law: BellowsLaw) -> Iterator[str]:
    if numbers.solid_is_guessed(bellows):
        yield (
            f"no_solid_limit: bellows {law.name} states none; {numbers.STOP_BEYOND_MEASURED:g} times the measured free "
            "deflection is used"
        )
    if law.action == "bend" and bellows.axial_stiffness_N_m is None:
        yield (
            f"axial_from_drawing: the axial stiffness of bellows {law.name} is that of the convolutions alone; a stiff "
            "spine adds to it, and it decides the sign of the travel: measure it"
        )
    # Air does the work p dV, the bellows takes up pull · d(deflection): the swept volume is at least gain · deflection.
    least = law.gain * law.swept_at
    if law.swept_m3 < 0.99 * least:
        yield (
            f"swept_too_small: bellows {law.name} would do more work than the air it gives up; its stiffness and bend or "
            f"stroke ask for at least {least * 1e6:.3g} mL"
        )
