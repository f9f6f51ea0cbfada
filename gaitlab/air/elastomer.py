"""How a clamped round membrane of rubber bulges."""

from __future__ import annotations

import math

# w0 = 0.662 a (q a/(E h))^(1/3), clamped round membrane, ν near one half (Timoshenko & Woinowsky-Krieger, Theory of
# Plates and Shells; quoted from memory). Reproduces both membranes of Grover et al., Lab Chip 8(6) 913 (2008).
MEMBRANE_FACTOR = 0.662
RUBBER_POISSON = 0.5  # rubber hardly changes its volume


def membrane_deflection_m(pressure_Pa: float, *, radius_m: float, thickness_m: float, youngs_Pa: float) -> float:
    """Centre deflection w0 = 0.662 a (q a/(E h))^(1/3) of a clamped membrane much thinner than it bulges.

    >>> round(1e6 * membrane_deflection_m(70e3, radius_m=650e-6, thickness_m=254e-6, youngs_Pa=750e3))
    267
    """
    return MEMBRANE_FACTOR * radius_m * math.cbrt(pressure_Pa * radius_m / (youngs_Pa * thickness_m))


def lift_pressure_Pa(deflection_m: float, *, radius_m: float, thickness_m: float, youngs_Pa: float) -> float:
    """Pressure that bulges a clamped round sheet by `deflection_m`: bending plus stretching.

    q = 16 E h³ w/(3 (1 − ν²) a⁴) + (w/(0.662 a))³ E h/a: the clamped plate's small deflections (Timoshenko &
    Woinowsky-Krieger, eq. 62) and the inverse of `membrane_deflection_m`; the second takes over above w ≈ h.
    """
    bending = 16.0 * youngs_Pa * thickness_m**3 / (3.0 * (1.0 - RUBBER_POISSON**2) * radius_m**4)
    stretching = (deflection_m / (MEMBRANE_FACTOR * radius_m)) ** 3 * youngs_Pa * thickness_m / radius_m
    return bending * deflection_m + stretching
