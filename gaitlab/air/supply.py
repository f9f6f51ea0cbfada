"""Where the vacuum comes from: pump, measured pump table, house vacuum or syringe, each with its derivative."""

from __future__ import annotations

import math
from dataclasses import dataclass
from itertools import pairwise
from typing import TypeAlias

import numpy as np
from scipy.interpolate import PchipInterpolator

from gaitlab.air.gas import DENSITY_ANR_KG_M3, Gas
from gaitlab.errors import InputError, must
from gaitlab.robot.circuit import FixedVacuum, Pump, PumpTable, Supply


def pump_mass_flow(
    vacuum_Pa: float, dead_end_Pa: float, free_flow_m3_s: float, law: str, gas: Gas
) -> tuple[float, float]:
    """Mass flow a pump draws at a gauge vacuum [Pa] and its derivative by the vacuum: (kg/s, kg/(s Pa)).

    mass: m = ρ_atm Q0 (1 − v/v0), exact for a clearance-volume pump with isothermal re-expansion. volume: the intake
    volume flow falls linearly, m = (p_atm − v)/(R T) Q0 (1 − v/v0). Beyond the dead end the pump's own valves shut: 0.
    """
    left = 1.0 - vacuum_Pa / dead_end_Pa
    if left <= 0.0:
        return 0.0, 0.0
    if law == "mass":
        full = gas.density_kg_m3(gas.pressure_Pa) * free_flow_m3_s
        return full * left, -full / dead_end_Pa
    per_pressure = free_flow_m3_s / gas.RT
    pressure = gas.pressure_Pa - vacuum_Pa
    return per_pressure * pressure * left, -per_pressure * (left + pressure / dead_end_Pa)


@dataclass(frozen=True)
class PumpLaw:
    """A pump on a buffer of `volume_m3`; `rest_Pa` is the absolute pressure it reaches with nothing to draw."""

    pump: Pump
    gas: Gas
    volume_m3: float
    rest_Pa: float

    def mass_flow(self, pressure_Pa: float) -> tuple[float, float]:
        """Mass flow drawn from the manifold at an absolute pressure, and its derivative by that pressure."""
        flow, slope = pump_mass_flow(
            self.gas.pressure_Pa - pressure_Pa,
            self.pump.dead_end_vacuum_Pa,
            self.pump.free_flow_m3_s,
            self.pump.law,
            self.gas,
        )
        return flow, -slope


@dataclass(frozen=True)
class PumpTableLaw:
    """A measured pump curve, shape-preserving between its points (no overshoot), constant below the first one."""

    vacuum_Pa: tuple[float, ...]
    curve: PchipInterpolator
    slope: PchipInterpolator
    gas: Gas
    volume_m3: float
    rest_Pa: float

    def mass_flow(self, pressure_Pa: float) -> tuple[float, float]:
        """Mass flow drawn from the manifold at an absolute pressure, and its derivative by that pressure."""
        vacuum = self.gas.pressure_Pa - pressure_Pa
        if vacuum <= self.vacuum_Pa[0]:
            return float(self.curve(self.vacuum_Pa[0])), 0.0
        if vacuum >= self.vacuum_Pa[-1]:
            return 0.0, 0.0
        return float(self.curve(vacuum)), -float(self.slope(vacuum))


@dataclass(frozen=True)
class FixedLaw:
    """A manifold held at the absolute pressure `rest_Pa`, whatever it has to draw."""

    rest_Pa: float


@dataclass(frozen=True)
class SyringeLaw:
    """A finite source: p(V_d + V_s(t)) = p0(V_d + V_s0) + R T ∫m dt; `rest_Pa` is the ambient pressure it starts from.

    The plunger follows the schedule, straight between its points and at rest outside them.
    """

    dead_m3: float
    times_s: tuple[float, ...]
    strokes_m3: tuple[float, ...]
    rest_Pa: float

    def volume(self, time_s: float) -> tuple[float, float]:
        """Gas volume in the syringe [m³] and its rate [m³/s] (the right-hand one at a corner of the schedule)."""
        stroke = float(np.interp(time_s, self.times_s, self.strokes_m3))
        after = int(np.searchsorted(self.times_s, time_s, side="right"))
        if after == 0 or after == len(self.times_s):
            return self.dead_m3 + stroke, 0.0
        rise = self.strokes_m3[after] - self.strokes_m3[after - 1]
        return self.dead_m3 + stroke, rise / (self.times_s[after] - self.times_s[after - 1])


SupplyLaw: TypeAlias = PumpLaw | PumpTableLaw | FixedLaw | SyringeLaw


def supply_law(supply: Supply, gas: Gas) -> SupplyLaw:
    """The law of a robot file's supply in this gas; raises InputError where it cannot work at this ambient pressure."""
    if isinstance(supply, Pump):
        rest = _rest(supply.dead_end_vacuum_Pa, "dead_end_vacuum", gas)
        return PumpLaw(supply, gas, supply.buffer_m3, rest)
    if isinstance(supply, PumpTable):
        return _table_law(supply, gas)
    if isinstance(supply, FixedVacuum):
        return FixedLaw(_rest(supply.vacuum_Pa, "fixed_vacuum", gas))
    _check_rising("schedule_s", supply.schedule_s)
    _check_paired("schedule_s", supply.schedule_s, "schedule_mL", supply.schedule_m3)
    return SyringeLaw(supply.dead_m3, supply.schedule_s, supply.schedule_m3, gas.pressure_Pa)


def _table_law(table: PumpTable, gas: Gas) -> PumpTableLaw:
    vacuums, flows = table.table_vacuum_Pa, table.table_flow_m3_s
    _check_rising("table_vacuum", vacuums)
    _check_paired("table_vacuum", vacuums, "table_flow", flows)
    if any(not later < earlier for earlier, later in pairwise(flows)) or flows[-1] != 0.0:
        raise InputError(must("table_flow", "falling all the way and ending at 0", flows, "add the dead-end point"))
    curve = PchipInterpolator(vacuums, DENSITY_ANR_KG_M3 * np.asarray(flows))
    rest = _rest(vacuums[-1], "table_vacuum", gas)
    return PumpTableLaw(vacuums, curve, curve.derivative(), gas, table.buffer_m3, rest)


def _rest(vacuum_Pa: float, name: str, gas: Gas) -> float:
    if not (math.isfinite(vacuum_Pa) and 0.0 < vacuum_Pa < gas.pressure_Pa):
        rule = f"above 0 and below the ambient pressure of {gas.pressure_Pa / 1e3:g} kPa"
        raise InputError(must(f"{name}_Pa", rule, vacuum_Pa, "at altitude a pump reaches less gauge vacuum"))
    return gas.pressure_Pa - vacuum_Pa


def _check_rising(name: str, values: tuple[float, ...]) -> None:
    if len(values) < 2 or any(not later > earlier for earlier, later in pairwise(values)):
        raise InputError(must(name, "at least two values, each above the one before", values, "sort the points"))


def _check_paired(name: str, values: tuple[float, ...], other: str, others: tuple[float, ...]) -> None:
    if len(values) != len(others):
        raise InputError(must(other, f"as long as {name} ({len(values)} values)", len(others), "give pairs of points"))
