"""Mass, centre and inertia of simple solids, and of several of them held together."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

FloatArray = NDArray[np.float64]


@dataclass(frozen=True)
class Solid:
    """A rigid piece: mass [kg], centre of mass (3,) [m] and inertia (3, 3) [kg m²] about that centre."""

    mass_kg: float
    centre_m: FloatArray
    inertia_kg_m2: FloatArray

    def moved(self, by: FloatArray) -> Solid:
        """The same piece somewhere else."""
        return Solid(self.mass_kg, self.centre_m + by, self.inertia_kg_m2)


def box(mass_kg: float, size_m: Sequence[float], centre_m: ArrayLike) -> Solid:
    """A box of even density: I_xx = m (y² + z²)/12 and so on."""
    square = np.square(np.asarray(size_m, dtype=float))
    inertia = mass_kg / 12.0 * np.diag(square.sum() - square)
    return Solid(mass_kg, np.asarray(centre_m, dtype=float), inertia)


def ball(mass_kg: float, radius_m: float, centre_m: ArrayLike) -> Solid:
    """A solid sphere: I = 2 m r²/5."""
    return Solid(mass_kg, np.asarray(centre_m, dtype=float), 0.4 * mass_kg * radius_m**2 * np.eye(3))


def point(mass_kg: float, centre_m: ArrayLike) -> Solid:
    """A mass without extent."""
    return Solid(mass_kg, np.asarray(centre_m, dtype=float), np.zeros((3, 3)))


def rod(mass_kg: float, radius_m: float, length_m: float, *, centre_m: FloatArray, along: FloatArray) -> Solid:
    """A solid cylinder along the unit vector `along`: m r²/2 about it, m (L²/12 + r²/4) across."""
    axial, across = 0.5 * mass_kg * radius_m**2, mass_kg * (length_m**2 / 12.0 + radius_m**2 / 4.0)
    inertia = across * np.eye(3) + (axial - across) * np.outer(along, along)
    return Solid(mass_kg, np.asarray(centre_m, dtype=float), inertia)


def joined(solids: Sequence[Solid]) -> Solid:
    """Several pieces as one, by the parallel-axis theorem."""
    mass = sum(solid.mass_kg for solid in solids)
    centre = sum((solid.mass_kg * solid.centre_m for solid in solids), np.zeros(3)) / mass
    inertia = np.zeros((3, 3))
    for solid in solids:
        offset = solid.centre_m - centre
        inertia += solid.inertia_kg_m2 + solid.mass_kg * (offset @ offset * np.eye(3) - np.outer(offset, offset))
    return Solid(mass, centre, inertia)
