"""The air budget: what the ring draws, where that puts the pump, and the smallest pump that keeps the ring alive."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from gaitlab.air.gas import DENSITY_ANR_KG_M3, gas_of
from gaitlab.air.valve import valve_numbers
from gaitlab.errors import InputError, must
from gaitlab.ring.manifold import manifold_of
from gaitlab.ring.pattern import LoadPattern
from gaitlab.ring.periodic import Settings
from gaitlab.ring.solve import pattern_run
from gaitlab.ring.verdict import OSCILLATES
from gaitlab.ring.waves import FloatArray, RingRun
from gaitlab.robot.circuit import FixedVacuum, Pump, PumpTable, Supply, Syringe

PART, TRIES_MAX = 0.04, 12  # steps in which a pump that is just too small is made larger (chosen by us)
ASSUMED_FREE_M3_S = 1e-3 / 6.0  # 10 L/min, where the file has no pump yet; only the start of a search
ASSUMED_BUFFER_M3 = 50e-6
PATIENT = Settings(cuts_max=25)  # a pump at its limit is not waited for longer


@dataclass(frozen=True)
class AirBudget:
    """Mean draw [kg/s], mean and least gauge vacuum [Pa] it leaves, and the least free flow [m³/s] that is enough.

    `alive`: the ring runs on its supply. `enough`: it runs, and no output peaks below the level where the next valve takes
    hold (`holds_on`); the smallest pump is judged by the same rule. `smallest_m3_s` is nan for a syringe, and where no pump
    of that dead end is enough.
    """

    flow_kg_s: float
    working_Pa: float
    least_Pa: float
    alive: bool
    enough: bool
    smallest_m3_s: float

    @property
    def flow_m3_s_ANR(self) -> float:
        """Mean draw as free air in the ISO 8778 reference atmosphere."""
        return self.flow_kg_s / DENSITY_ANR_KG_M3


def air_budget(pattern: LoadPattern, run: RingRun) -> AirBudget:
    """The budget of a solved load pattern; the smallest pump has the file's dead end, curve law and buffer."""
    smallest = float("nan") if isinstance(pattern.supply, Syringe) else smallest_free_flow(pattern)
    alive, enough = run.outcome == OSCILLATES, holds_on(run)
    if enough and isinstance(pattern.supply, Pump | PumpTable):
        smallest = float(np.fmin(smallest, free_flow(pattern.supply)))
    flow = run.air_kg_per_period / run.period_s if alive else float("nan")
    return AirBudget(flow, run.supply_mean_Pa, run.supply_min_Pa, alive, enough, smallest)


def holds_on(run: RingRun) -> bool:
    """Whether a ring runs with every output's peak past the level where the next valve takes hold.

    One that runs below it has a small swing and stops with the next leak.
    """
    return run.outcome == OSCILLATES and dict(run.details)["high_margin_Pa"] >= 0.0


def smallest_free_flow(pattern: LoadPattern) -> float:
    """Least free flow [m³/s] of a pump like the file's that keeps every output past the level where the next valve takes hold.

    The pump whose curve passes through the ring's own demand just above the least vacuum that does; it is then tried, and made
    larger by PART until the ring runs on it. A house line is answered by a pump of that dead end, mass flow linear, with
    ASSUMED_BUFFER_M3. nan if the dead end is too low, or TRIES_MAX parts more do not help.
    """
    if isinstance(pattern.supply, Syringe):
        raise InputError(must("supply", "a pump, a pump table or a house line", "a syringe"))
    least = (1.0 + PART) * least_vacuum(pattern)
    if least >= dead_end(pattern):
        return float("nan")
    asked = float(demand(pattern, [least])[0])
    vacuum, flow = pump_curve(pattern)
    factor = asked / float(np.interp(least, vacuum, flow))
    for _ in range(TRIES_MAX if np.isfinite(factor) else 0):
        if holds_on(pattern_run(replace(pattern, supply=scaled(pattern.supply, factor)), settings=PATIENT)):
            return factor * free_flow(pattern.supply)
        factor *= 1.0 + PART
    return float("nan")


def least_vacuum(pattern: LoadPattern) -> float:
    """Supply vacuum [Pa] at which a shut stage just opens each next valve half way, that one's own output as deep.

    v = threshold + span/2 + sealing v for the hardest valve; infinite where sealing is 1 or more.
    """
    valves = [valve_numbers(stage.valve) for stage in pattern.stages]
    return max((v.threshold_Pa + 0.5 * v.opening_span_Pa) / max(1.0 - v.sealing, 1e-9) for v in valves)


def free_flow(supply: Supply) -> float:
    """Free flow [m³/s] of a supply's pump, or of the one assumed for a house line."""
    if isinstance(supply, Pump):
        return supply.free_flow_m3_s
    return supply.table_flow_m3_s[0] if isinstance(supply, PumpTable) else ASSUMED_FREE_M3_S


def scaled(supply: Supply, factor: float) -> Pump | PumpTable:
    """A pump like this one with its free flow multiplied."""
    if isinstance(supply, Pump):
        return replace(supply, free_flow_m3_s=supply.free_flow_m3_s * factor)
    if isinstance(supply, PumpTable):
        return replace(supply, table_flow_m3_s=tuple(q * factor for q in supply.table_flow_m3_s))
    assert isinstance(supply, FixedVacuum)
    return Pump(supply.vacuum_Pa, ASSUMED_FREE_M3_S * factor, "mass", ASSUMED_BUFFER_M3)


def demand(pattern: LoadPattern, vacuums_Pa: Sequence[float] | FloatArray) -> FloatArray:
    """Mean draw [kg/s] of the ring on house lines of these vacuums [Pa gauge]; nan where it does not run."""
    runs = [pattern_run(replace(pattern, supply=FixedVacuum(float(v)))) for v in vacuums_Pa]
    return np.array([r.air_kg_per_period / r.period_s if r.outcome == OSCILLATES else np.nan for r in runs])


def dead_end(pattern: LoadPattern) -> float:
    """Gauge vacuum [Pa] that the supply reaches with nothing to draw."""
    gas = gas_of(pattern.ambient)
    return gas.pressure_Pa - manifold_of(pattern.supply, gas).dead_end_Pa


def pump_curve(pattern: LoadPattern, factor: float = 1.0, *, points: int = 60) -> tuple[FloatArray, FloatArray]:
    """The curve of a pump like the file's, its free flow multiplied: gauge vacuum [Pa] up to its dead end, mass flow [kg/s]."""
    gas = gas_of(pattern.ambient)
    law = manifold_of(scaled(pattern.supply, factor), gas)
    vacuum = np.linspace(0.0, dead_end(pattern), points)
    return vacuum, np.array([law.source.mass_flow(gas.pressure_Pa - float(v))[0] for v in vacuum])
