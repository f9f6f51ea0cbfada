"""The shape of a duct as the flow sees it: area, hydraulic diameter and the constants of its laminar friction."""

from __future__ import annotations

import math
from dataclasses import dataclass, fields, replace
from typing import TypeAlias

import numpy as np

from gaitlab.errors import InputError, must
from gaitlab.robot.circuit import RectDuct, RoundDuct, SquareDuct

Duct: TypeAlias = SquareDuct | RectDuct | RoundDuct

# Shah & London, Laminar Flow Forced Convection in Ducts (1978), eq. 341: Fanning f·Re of a rectangle over its aspect.
RECTANGLE_POLYNOMIAL = (1.0, -1.3553, 1.9467, -1.7012, 0.9564, -0.2537)
# Shah (1978) developing flow: aspect (short/long side), K∞ and C' (from memory of the published table).
DEVELOPING_ASPECT = (0.0, 0.2, 0.5, 1.0)
DEVELOPING_K = (0.674, 0.931, 1.28, 1.43)
DEVELOPING_C = (2.9e-5, 7.6e-5, 2.1e-4, 2.9e-4)
ROUND_K, ROUND_C, ROUND_F_RE = 1.25, 2.12e-4, 16.0
LEAST_HYDRAULIC_M = 1e-6  # some fifteen mean free paths of air at one atmosphere; chosen by us
# Equivalent sand roughness of technically smooth walls; tables give 1.5 µm for drawn tubing and less for glass (White,
# Fluid Mechanics, table 6.1). 1 µm is chosen by us for extruded tube and cast channels.
SMOOTH_WALL_M = 1e-6


@dataclass(frozen=True)
class Section:
    """A duct reduced to numbers.

    `f_re` is the Fanning friction factor times Reynolds of developed laminar flow on the hydraulic diameter;
    `k_developing` and `c_developing` are Shah's K∞ and C' of the entrance region. `roughness_m` is the height of the
    wall's roughness (equivalent sand grain), felt in turbulent flow only.
    """

    area_m2: float
    hydraulic_m: float
    length_m: float
    inlet_loss: float
    f_re: float
    k_developing: float
    c_developing: float
    roughness_m: float = SMOOTH_WALL_M

    def laminar_Pa2_s_per_kg(self, viscosity_Pa_s: float, rt_J_kg: float) -> float:
        """a of the fully laminar limit p_u² − p_d² = a m: a = 4 fRe μ R T L/(A D_h²)."""
        return 4.0 * self.f_re * viscosity_Pa_s * rt_J_kg * self.length_m / (self.area_m2 * self.hydraulic_m**2)


def rectangle_f_re(aspect: float) -> float:
    """Fanning f·Re of developed laminar flow in a rectangle of `aspect` (either side over the other).

    >>> round(rectangle_f_re(1.0), 2)
    14.23
    """
    short_over_long = min(aspect, 1.0 / aspect) if aspect > 0 else 0.0
    return 24.0 * sum(c * short_over_long**k for k, c in enumerate(RECTANGLE_POLYNOMIAL))


def section_of(duct: Duct, *, roughness_m: float = SMOOTH_WALL_M) -> Section:
    """Area, hydraulic diameter and friction constants of a square, rectangular or round duct.

    Raises InputError where a size is not finite and above zero, or the channel narrower than 1 µm.
    """
    _check_sizes(duct)
    if not (math.isfinite(roughness_m) and roughness_m >= 0):
        raise InputError(must("roughness_m", "finite and at least 0 m", roughness_m, "1 to 50 µm for printed channels"))
    smooth = _smooth_section(duct)
    if smooth.hydraulic_m < LEAST_HYDRAULIC_M:
        rule = f"at least {LEAST_HYDRAULIC_M * 1e6:g} µm in hydraulic diameter"
        raise InputError(must("channel", rule, smooth.hydraulic_m, "air is no continuum in anything narrower"))
    return replace(smooth, roughness_m=roughness_m)


def _smooth_section(duct: Duct) -> Section:
    if isinstance(duct, RoundDuct):
        area = math.pi * duct.bore_m**2 / 4.0
        return Section(area, duct.bore_m, duct.length_m, duct.inlet_loss, ROUND_F_RE, ROUND_K, ROUND_C)
    if isinstance(duct, SquareDuct):
        return _rectangle(duct.side_m, duct.side_m, duct.length_m, duct.inlet_loss)
    return _rectangle(duct.width_m, duct.height_m, duct.length_m, duct.inlet_loss)


def _rectangle(width_m: float, height_m: float, length_m: float, inlet_loss: float) -> Section:
    aspect = min(width_m, height_m) / max(width_m, height_m)
    k = float(np.interp(aspect, DEVELOPING_ASPECT, DEVELOPING_K))
    c = float(np.interp(aspect, DEVELOPING_ASPECT, DEVELOPING_C))
    hydraulic = 2.0 * width_m * height_m / (width_m + height_m)
    return Section(width_m * height_m, hydraulic, length_m, inlet_loss, rectangle_f_re(aspect), k, c)


def _check_sizes(duct: Duct) -> None:
    for field in fields(duct):
        value = getattr(duct, field.name)
        if field.name == "inlet_loss":
            if not (math.isfinite(value) and value >= 0):
                raise InputError(must("inlet_loss", "finite and at least 0", value, "0.5 sharp, 0.05 rounded"))
        elif not (math.isfinite(value) and value > 0):
            raise InputError(must(field.name, "finite and above 0 m", value, "give the drawn size"))
