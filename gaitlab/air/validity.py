"""Where the models of ducts and valves leave their ground: named warnings, never silent."""

from __future__ import annotations

from gaitlab.air.gas import Gas
from gaitlab.air.section import SMOOTH_WALL_M, Duct, Section, section_of
from gaitlab.air.valve_geometry import valve_warnings
from gaitlab.robot.circuit import FlowPart, RectDuct, Ring, RoundDuct, SquareDuct, ValveGeometry

KNUDSEN_MAX = (
    0.01  # above it gas slips at the wall (Gad-el-Hak, The fluid mechanics of microdevices, 1999: 0.001 to 0.1)
)
ASPECT_MAX = 1.0  # hydraulic diameter over length; a shorter duct is an orifice. Chosen by us
ROUGHNESS_MAX = 0.05  # roughness over hydraulic diameter: the end of Moody's chart (1944)


def knudsen_number(duct: Duct, pressure_Pa: float, gas: Gas) -> float:
    """Mean free path over hydraulic diameter at an absolute pressure."""
    return gas.mean_free_path_m(pressure_Pa) / section_of(duct).hydraulic_m


def duct_warnings(duct: Duct, lowest_Pa: float, gas: Gas, *, roughness_m: float = SMOOTH_WALL_M) -> tuple[str, ...]:
    """What makes the flow through this duct doubtful, each text beginning with its name; empty when nothing does.

    knudsen: the gas is too thin at `lowest_Pa` (the lower of the two absolute pressures). aspect_ratio: shorter than wide.
    wall_roughness: the wall's roughness is no longer small against the channel.
    """
    section = section_of(duct, roughness_m=roughness_m)
    found = (_knudsen(duct, lowest_Pa, gas), _aspect(section), _roughness(section))
    return tuple(text for text in found if text)


def _knudsen(duct: Duct, lowest_Pa: float, gas: Gas) -> str:
    number = knudsen_number(duct, lowest_Pa, gas)
    if number <= KNUDSEN_MAX:
        return ""
    return f"knudsen: {number:.3g} is above {KNUDSEN_MAX:g}, the gas slips at the wall and the real flow is larger"


def _aspect(section: Section) -> str:
    ratio = section.hydraulic_m / section.length_m
    if ratio <= ASPECT_MAX:
        return ""
    return f"aspect_ratio: width over length {ratio:.3g} is above {ASPECT_MAX:g}, this is a hole rather than a duct"


def _roughness(section: Section) -> str:
    ratio = section.roughness_m / section.hydraulic_m
    if ratio <= ROUGHNESS_MAX:
        return ""
    return f"wall_roughness: {100 * ratio:.3g} % of the channel is above {100 * ROUGHNESS_MAX:g} %, measure the channel instead"


def circuit_warnings(ring: Ring, gas: Gas, lowest_Pa: float) -> tuple[str, ...]:
    """What is doubtful in a ring's resistors and valves, each text led by its table; `lowest_Pa` is the supply's pressure."""
    valves = [("ring.valve", ring.valve)]
    valves += [(f"ring.stage {own.stage} valve", own.valve) for own in ring.overrides if own.valve is not None]
    parts: list[tuple[str, FlowPart]] = [("ring.resistor", ring.resistor)]
    parts += [(f"ring.stage {own.stage} resistor", own.resistor) for own in ring.overrides if own.resistor is not None]
    parts += [(f"{name}.open", valve.open) for name, valve in valves]
    ducts = [(name, part) for name, part in parts if isinstance(part, SquareDuct | RectDuct | RoundDuct)]
    drawn = [(name, valve) for name, valve in valves if isinstance(valve, ValveGeometry)]
    found = [f"{name}: {text}" for name, duct in ducts for text in duct_warnings(duct, lowest_Pa, gas)]
    return (*found, *(f"{name}: {text}" for name, valve in drawn for text in valve_warnings(valve)))
