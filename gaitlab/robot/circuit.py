"""The air side of a robot file: surroundings, supply, flow elements, ring and tubes.

Pressures are gauge vacuum (positive numbers) unless the name says ambient; lengths in m, masses in kg, volumes in m³,
angles in rad, times in s. Body frame: x forward, y left, z up.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TypeAlias

from gaitlab.robot.fields import (
    DEGREE,
    DM3_S_BAR,
    KELVIN_AT_ZERO_C,
    KILO,
    MILLI,
    MINUTE_LITRE,
    ML,
    integer,
    number,
    numbers,
    table,
    tables,
    text,
)

Vector = tuple[float, float, float]


@dataclass(frozen=True)
class Ambient:
    """Air round the robot: `pressure_Pa` absolute and `temperature_K`.

    A file may give `altitude_m` instead of the pressure (the reader applies the standard atmosphere).
    """

    pressure_Pa: float = number("pressure_kPa", KILO, default=101_325.0, above=1, at_most=1000)
    temperature_K: float = number("temperature_C", 1.0, offset=KELVIN_AT_ZERO_C, default=293.15, above=-60, below=100)


@dataclass(frozen=True)
class Ground:
    """The floor: `slope_rad` positive uphill forward. Pair friction is the foot's, times `friction_factor` of this floor."""

    slope_rad: float = number("slope_deg", DEGREE, default=0.0, at_least=-60, at_most=60)
    friction_factor: float = number("friction_factor", default=1.0, above=0, at_most=3)


@dataclass(frozen=True)
class Pump:
    """A vacuum pump with buffer: `law` says how flow falls from `free_flow_m3_s` (free air, ambient) to zero at dead end.

    mass: mass flow linear in vacuum; volume: intake volume flow linear in vacuum; 40 % apart at mid-curve.
    """

    dead_end_vacuum_Pa: float = number("dead_end_vacuum_kPa", KILO, above=0, below=101.3)
    free_flow_m3_s: float = number("free_flow_L_min", MINUTE_LITRE, above=0, at_most=10000)
    law: str = text("law", choices=("mass", "volume"))
    buffer_m3: float = number("buffer_mL", ML, above=0, at_most=1e6)


@dataclass(frozen=True)
class PumpTable:
    """A pump by its measured curve: free-air flow [m³/s ANR] against gauge vacuum [Pa], falling, ending at zero flow."""

    table_vacuum_Pa: tuple[float, ...] = numbers("table_vacuum_kPa", KILO, at_least=0)
    table_flow_m3_s: tuple[float, ...] = numbers("table_flow_L_min", MINUTE_LITRE, at_least=0)
    buffer_m3: float = number("buffer_mL", ML, above=0, at_most=1e6)


@dataclass(frozen=True)
class FixedVacuum:
    """An unlimited source held at `vacuum_Pa` (a house vacuum line)."""

    vacuum_Pa: float = number("fixed_vacuum_kPa", KILO, above=0, below=101.3)


@dataclass(frozen=True)
class Syringe:
    """A finite source: the plunger's displaced volume follows (`schedule_s`, `schedule_m3`), straight between the points."""

    dead_m3: float = number("dead_mL", ML, above=0)
    schedule_s: tuple[float, ...] = numbers("schedule_s", at_least=0)
    schedule_m3: tuple[float, ...] = numbers("schedule_mL", ML, at_least=0)


Supply: TypeAlias = Pump | PumpTable | FixedVacuum | Syringe


@dataclass(frozen=True)
class SquareDuct:
    """A straight channel of square section."""

    side_m: float = number("square_mm", MILLI, above=0, at_most=100)
    length_m: float = number("length_mm", MILLI, above=0, at_most=100_000)
    inlet_loss: float = number("inlet_loss", default=0.5, at_least=0, at_most=5)


@dataclass(frozen=True)
class RectDuct:
    """A straight channel of rectangular section."""

    width_m: float = number("width_mm", MILLI, above=0, at_most=100)
    height_m: float = number("height_mm", MILLI, above=0, at_most=100)
    length_m: float = number("length_mm", MILLI, above=0, at_most=100_000)
    inlet_loss: float = number("inlet_loss", default=0.5, at_least=0, at_most=5)


@dataclass(frozen=True)
class RoundDuct:
    """A straight tube of round bore."""

    bore_m: float = number("bore_mm", MILLI, above=0, at_most=100)
    length_m: float = number("length_mm", MILLI, above=0, at_most=100_000)
    inlet_loss: float = number("inlet_loss", default=0.5, at_least=0, at_most=5)


@dataclass(frozen=True)
class IsoPart:
    """A part by data-sheet numbers (ISO 6358): sonic conductance [m³/(s Pa) ANR] and critical pressure ratio."""

    sonic_conductance_m3_s_Pa: float = number("sonic_conductance_dm3_s_bar", DM3_S_BAR, above=0, at_most=1000)
    critical_ratio: float = number("critical_ratio", above=0, below=1)


@dataclass(frozen=True)
class BenchRestrictor:
    """A channel by its bench reading: a pump of known curve, a T-piece with gauge, the channel open to atmosphere."""

    dead_end_Pa: float = number("dead_end_kPa", KILO, above=0, below=101.3)
    reading_Pa: float = number("reading_kPa", KILO, above=0, below=101.3)
    free_flow_m3_s: float = number("free_flow_L_min", MINUTE_LITRE, above=0)
    law: str = text("law", choices=("mass", "volume"))


FlowPart: TypeAlias = SquareDuct | RectDuct | RoundDuct | IsoPart | BenchRestrictor
FLOW_PARTS = (SquareDuct, RectDuct, RoundDuct, IsoPart, BenchRestrictor)


@dataclass(frozen=True)
class Valve:
    """A normally closed membrane valve by its measured numbers.

    It starts to open at control vacuum `threshold_Pa` with both flow sides at atmosphere and is fully open
    `opening_span_Pa` later; flow-side vacuum raises the threshold by `sealing` per Pa. `leak_fraction` of the open
    conductance remains when shut; `hysteresis_Pa` is opening minus closing threshold; `travel_s` the membrane's time constant.
    """

    threshold_Pa: float = number("threshold_kPa", KILO, above=0, below=101.3)
    opening_span_Pa: float = number("opening_span_kPa", KILO, above=0, below=101.3)
    sealing: float = number("sealing", at_least=0, at_most=2)
    open: FlowPart = table("open", FLOW_PARTS)
    leak_fraction: float = number("leak_fraction", default=1e-4, above=0, below=0.5)
    hysteresis_Pa: float = number("hysteresis_kPa", KILO, default=0.0, at_least=0)
    travel_s: float = number("travel_ms", MILLI, default=0.005, above=0, at_most=10_000)


@dataclass(frozen=True)
class ValveGeometry:
    """A normally closed membrane valve by its drawing: a round elastic membrane over a seat, drawn into a gap below.

    Exactly one of `youngs_Pa` and `shore_A` is given.
    """

    membrane_m: float = number("membrane_mm", MILLI, above=0, at_most=20)
    span_m: float = number("span_mm", MILLI, above=0, at_most=200)
    gap_m: float = number("gap_mm", MILLI, above=0, at_most=50)
    open: FlowPart = table("open", FLOW_PARTS)
    youngs_Pa: float | None = number("youngs_MPa", 1e6, default=None, above=0, at_most=10_000)
    shore_A: float | None = number("shore_A", default=None, above=0, below=100)
    seat_fraction: float = number("seat_fraction", default=0.3, above=0, below=0.95)
    leak_fraction: float = number("leak_fraction", default=1e-4, above=0, below=0.5)
    hysteresis_Pa: float = number("hysteresis_kPa", KILO, default=0.0, at_least=0)
    travel_s: float = number("travel_ms", MILLI, default=0.005, above=0, at_most=10_000)


@dataclass(frozen=True)
class StageOverride:
    """As-built parts of one stage, counted 1…N; what is left out stays as in [ring]."""

    stage: int = integer("number", at_least=1, at_most=31)
    resistor: FlowPart | None = table("resistor", FLOW_PARTS, default=None)
    valve: Valve | ValveGeometry | None = table("valve", (Valve, ValveGeometry), default=None)
    port_m3: float | None = number("port_mL", ML, default=None, above=0)
    control_m3: float | None = number("control_mL", ML, default=None, above=0)


@dataclass(frozen=True)
class Ring:
    """N equal inverters in a loop: supply – resistor – output – valve – atmosphere, each valve opened by the output before."""

    stages: int = integer("stages", at_least=1, at_most=31)
    resistor: FlowPart = table("resistor", FLOW_PARTS)
    valve: Valve | ValveGeometry = table("valve", (Valve, ValveGeometry))
    port_m3: float = number("port_mL", ML, above=0, at_most=1e5)
    control_m3: float = number("control_mL", ML, above=0, at_most=1e5)
    overrides: tuple[StageOverride, ...] = tables("stage", StageOverride, default=())


@dataclass(frozen=True)
class Tubes:
    """Tubes from the ring block at `manifold_m` (trunk frame) to the inlets: straight distance times `slack` plus `extra_m`."""

    bore_m: float = number("bore_mm", MILLI, above=0, at_most=50)
    manifold_m: Vector = numbers("manifold_mm", MILLI, default=(0.0, 0.0, 0.0), length=3)
    slack: float = number("slack", default=1.0, at_least=1, at_most=10)
    extra_m: float = number("extra_mm", MILLI, default=0.0, at_least=0)
    inlet_loss: float = number("inlet_loss", default=0.5, at_least=0, at_most=5)
