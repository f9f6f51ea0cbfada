"""The fitted ring as [[ring.stage]] tables that can be put into the robot file, so that the next search uses the parts as built."""

from __future__ import annotations

from gaitlab.robot.circuit import BenchRestrictor, FlowPart, IsoPart, Pump, RectDuct, RoundDuct, SquareDuct, Valve
from gaitlab.robot.fields import DM3_S_BAR, KILO, MILLI, MINUTE_LITRE, ML
from gaitlab.robot.records import Robot
from gaitlab.trust.as_built import AsBuilt, built_robot, stage_parts


def as_built_toml(robot: Robot, built: AsBuilt) -> str:
    """TOML text: every stage as fitted, and the supply's free flow as a comment to copy."""
    fitted = built_robot(robot, built)
    tables = [_stage(fitted, stage) for stage in range(1, robot.ring.stages + 1)]
    if isinstance(fitted.supply, Pump):
        flow = fitted.supply.free_flow_m3_s / MINUTE_LITRE
        tables.insert(0, f"# in [supply]: free_flow_L_min = {flow:.4g}\n")
    return "\n".join(tables)


def _stage(robot: Robot, stage: int) -> str:
    resistor, valve, port_m3 = stage_parts(robot, stage)
    return (
        f"[[ring.stage]]\nnumber = {stage}\nresistor = {flow_part_toml(resistor)}\n"
        f"valve = {_valve_toml(valve)}\nport_mL = {port_m3 / ML:.4g}\n"
    )


def _valve_toml(valve: Valve) -> str:
    return (
        f"{{ threshold_kPa = {valve.threshold_Pa / KILO:.4g}, opening_span_kPa = {valve.opening_span_Pa / KILO:.4g}, "
        f"sealing = {valve.sealing:.4g}, leak_fraction = {valve.leak_fraction:.3g}, "
        f"hysteresis_kPa = {valve.hysteresis_Pa / KILO:.4g}, travel_ms = {valve.travel_s / MILLI:.4g}, "
        f"open = {flow_part_toml(valve.open)} }}"
    )


def flow_part_toml(part: FlowPart) -> str:
    """One flow part as an inline table.

    >>> flow_part_toml(SquareDuct(0.45e-3, 10e-3))
    '{ square_mm = 0.45, length_mm = 10, inlet_loss = 0.5 }'
    """
    match part:
        case SquareDuct():
            pairs = {
                "square_mm": part.side_m / MILLI,
                "length_mm": part.length_m / MILLI,
                "inlet_loss": part.inlet_loss,
            }
        case RectDuct():
            sizes = {"width_mm": part.width_m / MILLI, "height_mm": part.height_m / MILLI}
            pairs = {**sizes, "length_mm": part.length_m / MILLI, "inlet_loss": part.inlet_loss}
        case RoundDuct():
            pairs = {"bore_mm": part.bore_m / MILLI, "length_mm": part.length_m / MILLI, "inlet_loss": part.inlet_loss}
        case IsoPart():
            conductance = part.sonic_conductance_m3_s_Pa / DM3_S_BAR
            pairs = {"sonic_conductance_dm3_s_bar": conductance, "critical_ratio": part.critical_ratio}
        case BenchRestrictor():
            return _bench_toml(part)
    return "{ " + ", ".join(f"{name} = {value:.4g}" for name, value in pairs.items()) + " }"


def _bench_toml(part: BenchRestrictor) -> str:
    return (
        f"{{ dead_end_kPa = {part.dead_end_Pa / KILO:.4g}, reading_kPa = {part.reading_Pa / KILO:.4g}, "
        f'free_flow_L_min = {part.free_flow_m3_s / MINUTE_LITRE:.4g}, law = "{part.law}" }}'
    )
