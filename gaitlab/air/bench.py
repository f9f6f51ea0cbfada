"""The bench test of a restrictor: from a gauge reading and one absolute flow to its resistance, with the uncertainty.

A pump, a T-piece with a gauge, the unknown channel open to the air on the third leg. One reading gives one ratio; the
absolute flow comes from the pump's curve, a flow meter, a known restrictor on the same T, or a known volume and a clock.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import ClassVar, TypeAlias

import numpy as np
from scipy.optimize import brentq

from gaitlab.air.duct import exact_mass_flow
from gaitlab.air.fanno import choking_mach, exit_ratio, mass_flux
from gaitlab.air.gas import DENSITY_ANR_KG_M3, TEMPERATURE_ANR_K, Gas
from gaitlab.air.restrictor import (
    EQUIVALENT_LENGTH_M,
    SIDE_RANGE_M,
    bench_mass_flow,
    check_reading,
    check_vacuum,
    square_for_flow,
)
from gaitlab.air.section import Duct, Section, section_of
from gaitlab.air.supply import pump_mass_flow
from gaitlab.errors import InputError, must
from gaitlab.robot.circuit import BenchRestrictor, RectDuct, RoundDuct, SquareDuct

QUADRATURE_POINTS = 16  # Gauss-Legendre over the pressure rise; 1e-6 of the time, see the tests


@dataclass(frozen=True)
class PumpReading:
    """Way a: the pump's free-air flow (at ambient density) and the shape of its curve, `mass` or `volume`."""

    dead_end_Pa: float
    reading_Pa: float
    free_flow_m3_s: float
    law: str
    ERRORS: ClassVar[tuple[str, ...]] = ("dead_end_Pa", "reading_Pa", "free_flow_m3_s")

    def mass_flow_kg_s(self, gas: Gas) -> float:
        """Flow through the restrictor at the reading."""
        return bench_mass_flow(BenchRestrictor(self.dead_end_Pa, self.reading_Pa, self.free_flow_m3_s, self.law), gas)

    def flow_fraction(self, gas: Gas) -> float | None:
        """Share of the pump's free flow."""
        return self.mass_flow_kg_s(gas) / (gas.density_kg_m3(gas.pressure_Pa) * self.free_flow_m3_s)


@dataclass(frozen=True)
class MeterReading:
    """Way b: a flow meter in the line, in free air of the ISO 8778 reference atmosphere (ANR)."""

    reading_Pa: float
    meter_m3_s: float
    ERRORS: ClassVar[tuple[str, ...]] = ("meter_m3_s",)

    def mass_flow_kg_s(self, gas: Gas) -> float:
        """Flow through the restrictor at the reading."""
        if not (math.isfinite(self.meter_m3_s) and self.meter_m3_s > 0):
            raise InputError(must("meter_m3_s", "finite and above 0", self.meter_m3_s, "read the meter in L/min ANR"))
        check_vacuum("reading", self.reading_Pa, gas)
        return DENSITY_ANR_KG_M3 * self.meter_m3_s

    def flow_fraction(self, gas: Gas) -> float | None:
        """Not known without the pump's free flow."""
        return None


@dataclass(frozen=True)
class KnownReading:
    """Way c: a restrictor of known size read on the same pump; the pump's free flow cancels, its law does not."""

    dead_end_Pa: float
    reading_Pa: float
    known: Duct
    known_reading_Pa: float
    law: str
    known_scale: float = 1.0
    ERRORS: ClassVar[tuple[str, ...]] = ("dead_end_Pa", "reading_Pa", "known_reading_Pa", "known_scale")

    def mass_flow_kg_s(self, gas: Gas) -> float:
        """Flow through the unknown restrictor: m_known times the ratio of the pump's flows at both readings."""
        check_reading(self.dead_end_Pa, self.reading_Pa, gas)
        check_reading(self.dead_end_Pa, self.known_reading_Pa, gas)
        known = scaled(self.known, self.known_scale)
        flow = exact_mass_flow(known, gas.pressure_Pa, gas.pressure_Pa - self.known_reading_Pa, gas)
        return flow * self._drawn(self.reading_Pa, gas) / self._drawn(self.known_reading_Pa, gas)

    def flow_fraction(self, gas: Gas) -> float | None:
        """Share of the pump's free flow."""
        return self._drawn(self.reading_Pa, gas) / gas.density_kg_m3(gas.pressure_Pa)

    def _drawn(self, vacuum_Pa: float, gas: Gas) -> float:
        return pump_mass_flow(vacuum_Pa, self.dead_end_Pa, 1.0, self.law, gas)[0]


@dataclass(frozen=True)
class RiseReading:
    """Way d: a closed evacuated vessel of `volume_m3` leaks through the restrictor from one gauge vacuum to a lesser one."""

    dead_end_Pa: float
    reading_Pa: float
    volume_m3: float
    rise_s: float
    polytropic: float = 1.0
    ERRORS: ClassVar[tuple[str, ...]] = ("dead_end_Pa", "reading_Pa", "volume_m3", "rise_s", "polytropic")

    def mass_flow_kg_s(self, gas: Gas) -> float:
        """Mean flow, V/(n R T) Δp/Δt; n = 1 where the gas keeps the wall's temperature."""
        check_reading(self.dead_end_Pa, self.reading_Pa, gas)
        for name, value in (("volume_m3", self.volume_m3), ("rise_s", self.rise_s)):
            if not (math.isfinite(value) and value > 0):
                raise InputError(
                    must(name, "finite and above 0", value, "time the rise between two marks of the gauge")
                )
        return self.volume_m3 * (self.dead_end_Pa - self.reading_Pa) / (self.polytropic * gas.RT * self.rise_s)

    def flow_fraction(self, gas: Gas) -> float | None:
        """Not known without the pump's free flow."""
        return None


Reading: TypeAlias = PumpReading | MeterReading | KnownReading | RiseReading


@dataclass(frozen=True)
class Resistance:
    """A restrictor as the bench knows it.

    `laminar_kg_s_Pa2` is g of m = g (p_u² − p_d²) if it were all laminar; `sonic_conductance_m3_s_Pa` and `critical_ratio`
    belong to `square`, the 10 mm long square channel with the same reading, at ambient upstream pressure. `shares` are the
    relative standard deviations of the flow by input, `relative_uncertainty` their root sum of squares.
    """

    mass_flow_kg_s: float
    flow_fraction: float | None
    laminar_kg_s_Pa2: float
    sonic_conductance_m3_s_Pa: float
    critical_ratio: float
    square: SquareDuct
    square_range_m: tuple[float, float]
    shares: tuple[tuple[str, float], ...]
    relative_uncertainty: float


def resistance(reading: Reading, gas: Gas, errors: dict[str, float]) -> Resistance:
    """The restrictor behind a reading; `errors` gives the standard deviation [SI] of the reading's fields in its `ERRORS`.

    Raises InputError for a reading above the dead end, outside the ambient pressure, or that no channel explains.
    """
    flow = reading.mass_flow_kg_s(gas)
    shares = uncertainty_shares(reading, gas, errors)
    total = math.sqrt(sum(share**2 for _, share in shares))
    square = _square(reading, 1.0, gas)
    spread = min(total, 0.9)
    sonic, ratio = sonic_numbers(section_of(square), gas, gas.pressure_Pa)
    return Resistance(
        mass_flow_kg_s=flow,
        flow_fraction=reading.flow_fraction(gas),
        laminar_kg_s_Pa2=_laminar(reading, flow, gas),
        sonic_conductance_m3_s_Pa=sonic,
        critical_ratio=ratio,
        square=square,
        square_range_m=(_square(reading, 1.0 - spread, gas).side_m, _square(reading, 1.0 + spread, gas).side_m),
        shares=shares,
        relative_uncertainty=total,
    )


def uncertainty_shares(reading: Reading, gas: Gas, errors: dict[str, float]) -> tuple[tuple[str, float], ...]:
    """Relative standard deviation of the flow by each uncertain input: |∂ln m/∂x| σ_x by central differences."""
    return tuple((name, _share(reading, name, errors[name], gas)) for name in reading.ERRORS if name in errors)


def _share(reading: Reading, name: str, error: float, gas: Gas) -> float:
    value = float(getattr(reading, name))
    step = 1e-4 * value
    above, below = (replace(reading, **{name: value + s}).mass_flow_kg_s(gas) for s in (step, -step))  # type: ignore[arg-type]
    return abs(math.log(above / below)) / (2.0 * step) * error


def sonic_numbers(section: Section, gas: Gas, p_up_Pa: float) -> tuple[float, float]:
    """Sonic conductance [m³/(s Pa) ANR] and pressure ratio at which a duct chokes, at an upstream pressure."""
    mach = choking_mach(section, p_up_Pa, gas)
    flow = mass_flux(mach, p_up_Pa, gas) * section.area_m2
    reference = DENSITY_ANR_KG_M3 * p_up_Pa * math.sqrt(TEMPERATURE_ANR_K / gas.temperature_K)
    return flow / reference, exit_ratio(mach, 1.0)


def scaled(duct: Duct, factor: float) -> Duct:
    """The duct with its cross section's sides times `factor`, the length kept."""
    if isinstance(duct, SquareDuct):
        return replace(duct, side_m=factor * duct.side_m)
    if isinstance(duct, RectDuct):
        return replace(duct, width_m=factor * duct.width_m, height_m=factor * duct.height_m)
    return RoundDuct(factor * duct.bore_m, duct.length_m, duct.inlet_loss)


def rise_time_s(duct: Duct, reading: RiseReading, gas: Gas) -> float:
    """Time in which the vessel's vacuum falls from the dead end to the reading through `duct`: ∫ V/(n R T m(p)) dp."""
    low, high = gas.pressure_Pa - reading.dead_end_Pa, gas.pressure_Pa - reading.reading_Pa
    nodes, weights = np.polynomial.legendre.leggauss(QUADRATURE_POINTS)
    half = 0.5 * (high - low)
    flows = [exact_mass_flow(duct, gas.pressure_Pa, low + half * (1.0 + float(x)), gas) for x in nodes]
    return reading.volume_m3 / (reading.polytropic * gas.RT) * half * float(np.sum(weights / np.array(flows)))


def _square(reading: Reading, factor: float, gas: Gas) -> SquareDuct:
    """The square channel that explains `factor` times the flow of the reading."""
    if isinstance(reading, RiseReading):
        return _square_for_rise(replace(reading, rise_s=reading.rise_s / factor), gas)
    below = gas.pressure_Pa - reading.reading_Pa
    return square_for_flow(factor * reading.mass_flow_kg_s(gas), gas.pressure_Pa, below, gas)


def _square_for_rise(reading: RiseReading, gas: Gas) -> SquareDuct:
    def channel(log_side: float) -> SquareDuct:
        return SquareDuct(math.exp(log_side), EQUIVALENT_LENGTH_M)

    def excess(log_side: float) -> float:
        return math.log(rise_time_s(channel(log_side), reading, gas) / reading.rise_s)

    low, high = (math.log(side) for side in SIDE_RANGE_M)
    if excess(low) < 0 or excess(high) > 0:
        rule = "one that a 10 mm long square channel of 2 µm to 20 mm gives"
        raise InputError(must("rise_s", rule, reading.rise_s, "check the volume and the two gauge marks"))
    return channel(brentq(excess, low, high, xtol=1e-9))


def _laminar(reading: Reading, flow_kg_s: float, gas: Gas) -> float:
    """g if all were laminar; for a rise from p1 to p2: artanh(p2/p_s) − artanh(p1/p_s) = t p_s R T g/(V/n)."""
    ambient = gas.pressure_Pa
    if not isinstance(reading, RiseReading):
        return flow_kg_s / (ambient**2 - (ambient - reading.reading_Pa) ** 2)
    start, end = (1.0 - vacuum / ambient for vacuum in (reading.dead_end_Pa, reading.reading_Pa))
    scale = reading.volume_m3 / (reading.polytropic * gas.RT * reading.rise_s * ambient)
    return scale * (math.atanh(end) - math.atanh(start))
