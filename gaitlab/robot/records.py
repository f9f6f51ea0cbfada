"""What a robot file says as one frozen record in SI units: the thing every other part of gaitlab starts from.

Pressures are gauge vacuum (positive numbers) unless the name says ambient; lengths in m, masses in kg, volumes in m³,
angles in rad, times in s. Body frame: x forward, y left, z up.
"""

from __future__ import annotations

from dataclasses import dataclass

from gaitlab.robot.circuit import Ambient, FixedVacuum, Ground, Pump, PumpTable, Ring, Supply, Syringe, Tubes
from gaitlab.robot.fields import (
    MILLI,
    flag,
    integer,
    mapping,
    named_tables,
    number,
    table,
    tables,
    text,
    text_lists,
    texts,
)
from gaitlab.robot.parts import Bellows, Body, Foot, Leg, Spine


@dataclass(frozen=True)
class WiringLimits:
    """What a builder allows: `tied` inlets share one tube's source, `fixed` ones are decided, the rest is searched.

    With `every_output_used` each output must feed at least one inlet. `allow_open` / `allow_held` let inlets go to
    atmosphere or to the supply.
    """

    inlets_per_output_max: int = integer("inlets_per_output_max", default=1, at_least=1, at_most=64)
    every_output_used: bool = flag("every_output_used", default=True)
    allow_open: bool = flag("allow_open", default=False)
    allow_held: bool = flag("allow_held", default=False)
    tied: tuple[tuple[str, ...], ...] = text_lists("tied", default=())
    fixed: tuple[tuple[str, int | str], ...] = mapping("fixed", default=())


@dataclass(frozen=True)
class Tolerance:
    """How far one number of the file may be off: `key` is its dotted path (``ring.resistor.square_mm``).

    Exactly one of `plus_minus` (the file's unit) and `percent`. uniform: hard limits; normal, lognormal: two standard
    deviations. `each`: drawn once (shared), per stage or per leg. `truncate` cuts draws at the key's own bounds.
    """

    key: str = text("key")
    kind: str = text("kind", choices=("uniform", "normal", "lognormal"), default="uniform")
    plus_minus: float | None = number("plus_minus", default=None, at_least=0)
    percent: float | None = number("percent", default=None, at_least=0)
    each: str = text("each", choices=("shared", "stage", "leg"), default="shared")
    truncate: bool = flag("truncate", default=False)


@dataclass(frozen=True)
class SearchSettings:
    """Defaults of the search for this robot; the command line overrides them."""

    objective: str = text("objective", choices=("travel", "speed", "straight", "air"), default="travel")
    strategy: str = text("strategy", default="exhaustive")


@dataclass(frozen=True)
class Numerics:
    """Numerical settings of the body run, named and documented because travel must not depend on them.

    `inertia_factor` multiplies the segments' rotational inertia about the bending axis only. A walk ends when the
    travel of `settled_periods` periods in a row scatters (standard deviation) by less than `settled_scatter` of its mean
    or 0.2 mm, at the latest after `periods_max`.
    """

    step_s: float = number("step_ms", MILLI, default=1e-3, above=0, at_most=20)
    inertia_factor: float = number("inertia_factor", default=60.0, at_least=1, at_most=1000)
    settle_s: float = number("settle_s", default=0.5, at_least=0, at_most=60)
    settled_periods: int = integer("settled_periods", default=3, at_least=2, at_most=50)
    settled_scatter: float = number("settled_scatter", default=0.05, above=0, at_most=1)
    periods_max: int = integer("periods_max", default=10, at_least=2, at_most=500)


@dataclass(frozen=True)
class Robot:
    """One robot, its circuit and its ground: everything that a robot file says, checked."""

    name: str = text("name")
    supply: Supply = table("supply", (Pump, PumpTable, FixedVacuum, Syringe))
    ring: Ring = table("ring", Ring)
    tubes: Tubes = table("tubes", Tubes)
    bellows: tuple[Bellows, ...] = named_tables("bellows", Bellows)
    body: Body = table("body", Body)
    feet: tuple[Foot, ...] = named_tables("foot", Foot)
    ambient: Ambient = table("ambient", Ambient, default=Ambient())
    ground: Ground = table("ground", Ground, default=Ground())
    wiring: WiringLimits = table("wiring", WiringLimits, default=WiringLimits())
    tolerances: tuple[Tolerance, ...] = tables("tolerance", Tolerance, default=())
    search: SearchSettings = table("search", SearchSettings, default=SearchSettings())
    numerics: Numerics = table("numerics", Numerics, default=Numerics())
    notes: tuple[str, ...] = texts("notes", default=())

    def chains(self) -> tuple[Leg | Spine, ...]:
        """Every chain of bellows: legs first, then spines, each in the file's order."""
        return (*self.body.legs, *self.body.spines)

    def inlets(self) -> tuple[str, ...]:
        """Names of all air inlets, in the order of the chains and their units (an opposed inlet after its partner)."""
        names: list[str] = []
        for chain in self.chains():
            for unit in chain.units:
                names.append(unit.inlet)
                if unit.opposed_inlet is not None:
                    names.append(unit.opposed_inlet)
        return tuple(names)

    def bellows_named(self, name: str) -> Bellows:
        """The bellows type of that name (the reader has made sure it exists)."""
        return next(b for b in self.bellows if b.name == name)

    def foot_named(self, name: str) -> Foot:
        """The foot of that name (the reader has made sure it exists)."""
        return next(f for f in self.feet if f.name == name)
