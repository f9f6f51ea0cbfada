"""A robot with its ring as built: each stage's resistor, valve seat and load off by its own amount, and the supply too."""

from __future__ import annotations

from dataclasses import dataclass, replace

from gaitlab.air.duct import exact_mass_flow
from gaitlab.air.gas import gas_of
from gaitlab.air.valve import valve_numbers
from gaitlab.robot.circuit import (
    BenchRestrictor,
    FixedVacuum,
    FlowPart,
    IsoPart,
    Pump,
    PumpTable,
    RectDuct,
    RoundDuct,
    SquareDuct,
    StageOverride,
    Supply,
    Valve,
)
from gaitlab.robot.records import Robot

LEAK_MOST = 0.45  # of the open valve: beyond it the stage has no low level worth the name


@dataclass(frozen=True)
class StageBuild:
    """How one stage differs from the file: size of its resistor's opening (factor), leak to atmosphere at its output as a
    fraction of the open valve (added), volume at its output [m³] (added)."""

    opening_factor: float = 1.0
    leak_fraction: float = 0.0
    extra_m3: float = 0.0


@dataclass(frozen=True)
class AsBuilt:
    """A whole ring as built: its stages 1…N, the supply's flow (vacuum, for a fixed one) and every valve's threshold as factors."""

    stages: tuple[StageBuild, ...]
    supply_factor: float = 1.0
    threshold_factor: float = 1.0


def built_robot(robot: Robot, built: AsBuilt) -> Robot:
    """The robot with that ring; what the file already says of single stages is kept underneath."""
    overrides = tuple(_override(robot, built, k) for k in range(1, robot.ring.stages + 1))
    ring = replace(robot.ring, overrides=overrides)
    return replace(robot, ring=ring, supply=scaled_supply(robot.supply, built.supply_factor))


def stage_parts(robot: Robot, stage: int) -> tuple[FlowPart, Valve, float]:
    """Resistor, valve (by its numbers) and port volume of one stage as the file has them."""
    own = next((o for o in robot.ring.overrides if o.stage == stage), StageOverride(stage))
    valve = robot.ring.valve if own.valve is None else own.valve
    port_m3 = robot.ring.port_m3 if own.port_m3 is None else own.port_m3
    return own.resistor or robot.ring.resistor, valve_numbers(valve), port_m3


def conductance_factor(robot: Robot, stage: int, build: StageBuild) -> float:
    """Flow of the as-built resistor over that of the file's, from atmosphere to half vacuum, by the exact duct model."""
    part, gas = stage_parts(robot, stage)[0], gas_of(robot.ambient)
    ends = (gas.pressure_Pa, gas.pressure_Pa / 2)
    return exact_mass_flow(scaled_part(part, build.opening_factor), *ends, gas) / exact_mass_flow(part, *ends, gas)


def _override(robot: Robot, built: AsBuilt, stage: int) -> StageOverride:
    build = built.stages[stage - 1]
    resistor, valve, port_m3 = stage_parts(robot, stage)
    own = next((o for o in robot.ring.overrides if o.stage == stage), StageOverride(stage))
    leaky = replace(
        valve,
        threshold_Pa=valve.threshold_Pa * built.threshold_factor,
        leak_fraction=min(valve.leak_fraction + build.leak_fraction, LEAK_MOST),
    )
    return replace(
        own,
        resistor=scaled_part(resistor, build.opening_factor),
        valve=leaky,
        port_m3=port_m3 + build.extra_m3,
    )


def scaled_part(part: FlowPart, factor: float) -> FlowPart:
    """The part with its opening (sides, bore) times `factor`; parts known by their flow let factor² as much through."""
    match part:
        case SquareDuct():
            return replace(part, side_m=part.side_m * factor)
        case RectDuct():
            return replace(part, width_m=part.width_m * factor, height_m=part.height_m * factor)
        case RoundDuct():
            return replace(part, bore_m=part.bore_m * factor)
        case IsoPart():
            return replace(part, sonic_conductance_m3_s_Pa=part.sonic_conductance_m3_s_Pa * factor**2)
        case BenchRestrictor():
            return replace(part, free_flow_m3_s=part.free_flow_m3_s * factor**2)


def scaled_supply(supply: Supply, factor: float) -> Supply:
    """The supply with its flow times `factor`; a fixed vacuum with its vacuum times it; a syringe as it is."""
    match supply:
        case Pump():
            return replace(supply, free_flow_m3_s=supply.free_flow_m3_s * factor)
        case PumpTable():
            return replace(supply, table_flow_m3_s=tuple(factor * q for q in supply.table_flow_m3_s))
        case FixedVacuum():
            return replace(supply, vacuum_Pa=supply.vacuum_Pa * factor)
    return supply


def opening_text(part: FlowPart, factor: float) -> str:
    """The as-built size of a resistor in the file's own words, against the drawn one.

    >>> opening_text(SquareDuct(0.5e-3, 10e-3), 0.9)
    '0.450 mm square where 0.500 was meant'
    """
    match part:
        case SquareDuct():
            return f"{part.side_m * factor * 1e3:.3f} mm square where {part.side_m * 1e3:.3f} was meant"
        case RectDuct():
            return (
                f"{part.width_m * factor * 1e3:.3f} × {part.height_m * factor * 1e3:.3f} mm where "
                f"{part.width_m * 1e3:.3f} × {part.height_m * 1e3:.3f} was meant"
            )
        case RoundDuct():
            return f"bore {part.bore_m * factor * 1e3:.3f} mm where {part.bore_m * 1e3:.3f} was meant"
    return f"{factor**2:.2f} of the meant flow"
