"""What the drawing of a bellows says about it: elastic modulus, effective area, spring rates and where it goes solid.

These are estimates for first looks; a measured bend and stiffness beat them every time.
"""

from __future__ import annotations

import math

from gaitlab.errors import InputError, must
from gaitlab.robot.parts import BellowsGeometry
from gaitlab.robot.rubber import youngs_from_shore_Pa

POISSON_RUBBER = 0.49  # nearly incompressible silicone: common practice, no source


def mean_diameter(geometry: BellowsGeometry) -> float:
    """Mean of outer and inner diameter [m]."""
    if geometry.inner_m >= geometry.outer_m:
        got = f"{geometry.inner_m * 1e3:g} mm"
        raise InputError(must("inner_mm", f"below outer_mm ({geometry.outer_m * 1e3:g} mm)", got))
    return 0.5 * (geometry.outer_m + geometry.inner_m)


def effective_area(geometry: BellowsGeometry) -> float:
    """Area [m²] on which the pressure difference pulls: A_e = π D_m²/4, expansion-joint practice (EJMA, from memory)."""
    return math.pi * mean_diameter(geometry) ** 2 / 4.0


def youngs_modulus(geometry: BellowsGeometry) -> float:
    """Young's modulus [Pa] as given, or by Gent's relation from Shore A; raises InputError where neither is given."""
    if geometry.youngs_Pa is not None:
        return geometry.youngs_Pa
    if geometry.shore_A is not None:
        return youngs_from_shore_Pa(geometry.shore_A)
    raise InputError(must("geometry", "given one of youngs_MPa, shore_A and spring_rate_N_mm", "none of them"))


def axial_rate(geometry: BellowsGeometry) -> float:
    """Axial spring rate [N/m] of all convolutions in series, as given or k = π E D_m t³/(2 (1 − ν²) w³ n).

    Each convolution is two flat rings, guided at both rims, bending as strips of length w (the convolution's height)
    and breadth π D_m. With ν = 0.3 the factor is 1.73, the 1.7 of EJMA's convoluted bellows formula (from memory).
    """
    given = [x for x in (geometry.youngs_Pa, geometry.shore_A, geometry.spring_rate_N_m) if x is not None]
    if len(given) != 1:
        rule = "given exactly one of youngs_MPa, shore_A and spring_rate_N_mm"
        raise InputError(must("geometry", rule, f"{len(given)} of them"))
    if geometry.spring_rate_N_m is not None:
        return geometry.spring_rate_N_m
    height = 0.5 * (geometry.outer_m - geometry.inner_m)
    strip = math.pi * youngs_modulus(geometry) * mean_diameter(geometry) * geometry.wall_m**3
    return strip / (2.0 * (1.0 - POISSON_RUBBER**2) * height**3 * geometry.convolutions)


def bend_rate(geometry: BellowsGeometry) -> float:
    """Bending stiffness [N m/rad] about a stiff spine at eccentricity e: k (D_m²/8 + e²); e = 0 is the free bellows.

    D_m²/8 is an axial rate spread evenly over a ring of diameter D_m (EJMA, from memory), e² the parallel-axis term.
    """
    return axial_rate(geometry) * (mean_diameter(geometry) ** 2 / 8.0 + geometry.eccentricity_m**2)


def solid_stroke(geometry: BellowsGeometry, length_m: float) -> float:
    """Stroke [m] at which the walls touch: length minus two walls for each convolution; raises if there is none left."""
    stroke = length_m - 2.0 * geometry.wall_m * geometry.convolutions
    if stroke <= 0:
        got = f"{geometry.convolutions} convolutions of {geometry.wall_m * 1e3:g} mm wall"
        raise InputError(must("convolutions", f"fewer than fill the length of {length_m * 1e3:g} mm", got))
    return stroke


def solid_bend(geometry: BellowsGeometry, length_m: float) -> float:
    """Bend [rad] at which the walls touch on the side away from the spine: solid stroke over (e + D_o/2)."""
    return solid_stroke(geometry, length_m) / (geometry.eccentricity_m + 0.5 * geometry.outer_m)
