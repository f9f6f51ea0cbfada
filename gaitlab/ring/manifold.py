"""The supply as the ring's network sees it: a manifold of some volume with something that draws gas out of it."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

from gaitlab.air.gas import Gas
from gaitlab.air.supply import FixedLaw, SyringeLaw, supply_law
from gaitlab.ring.network import SupplyLaw
from gaitlab.robot.circuit import FixedVacuum, Supply

# A house line is a pump so strong that the ring's whole draw (below 1 g/s) moves it by less than 1 Pa, on a vessel of
# 1 L; both chosen by us, so that gas drawn in still equals gas pumped out.
STIFF_KG_S_PA = 1e-3
STIFF_VOLUME_M3 = 1e-3


@dataclass(frozen=True)
class StiffSource:
    """A source that holds its pressure: m = STIFF_KG_S_PA (p − rest)."""

    rest_Pa: float

    def mass_flow(self, manifold_Pa: float) -> tuple[float, float]:
        """Mass flow out [kg/s] and its derivative [kg/(s Pa)]."""
        return STIFF_KG_S_PA * (manifold_Pa - self.rest_Pa), STIFF_KG_S_PA


@dataclass(frozen=True)
class Sealed:
    """Nothing draws: a syringe's barrel, whose growing volume does the work instead."""

    def mass_flow(self, manifold_Pa: float) -> tuple[float, float]:
        """Zero flow, zero slope."""
        return 0.0, 0.0


@dataclass(frozen=True)
class Manifold:
    """What draws, the volume it draws from, and the absolute pressure that it reaches with nothing to draw.

    `swept_m3_s` is the growth of the volume that begins at `volume_m3` (syringes only).
    """

    source: SupplyLaw
    volume_m3: float
    dead_end_Pa: float
    swept_m3_s: float = 0.0


def manifold_of(supply: Supply, gas: Gas, *, held_m3: float = 0.0) -> Manifold:
    """The manifold of a robot file's supply, `held_m3` larger; a syringe as it stands when its first stroke begins."""
    own = _own_manifold(supply, gas)
    return replace(own, volume_m3=own.volume_m3 + held_m3)


def _own_manifold(supply: Supply, gas: Gas) -> Manifold:
    law = supply_law(supply, gas)
    if isinstance(law, FixedLaw):
        return Manifold(StiffSource(law.rest_Pa), STIFF_VOLUME_M3, law.rest_Pa)
    if isinstance(law, SyringeLaw):
        return syringe_strokes(law)[0].manifold
    return Manifold(law, law.volume_m3, law.rest_Pa)


@dataclass(frozen=True)
class Stroke:
    """One straight piece of a syringe's schedule."""

    start_s: float
    end_s: float
    manifold: Manifold


def syringe_strokes(law: SyringeLaw) -> tuple[Stroke, ...]:
    """The schedule as pieces of steady plunger speed. The dead end of all: the whole stroke drawn on a sealed syringe."""
    sizes = [law.dead_m3 + stroke for stroke in law.strokes_m3]
    best = law.rest_Pa * sizes[0] / max(sizes)
    pieces: Sequence[tuple[float, float, float, float]] = list(
        zip(law.times_s, law.times_s[1:], sizes, sizes[1:], strict=False)
    )
    return tuple(
        Stroke(start, end, Manifold(Sealed(), before, best, (after - before) / (end - start)))
        for start, end, before, after in pieces
    )


def stiffened(supply_vacuum_Pa: float) -> FixedVacuum:
    """A house line at this gauge vacuum, for asking whether a ring fails for its supply."""
    return FixedVacuum(supply_vacuum_Pa)
