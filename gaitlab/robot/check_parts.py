"""Rules inside one part of a robot file: supply tables, valves by drawing, and what a bellows must state."""

from __future__ import annotations

from itertools import pairwise

from gaitlab.robot.circuit import BenchRestrictor, FlowPart, Pump, PumpTable, Syringe, Valve, ValveGeometry
from gaitlab.robot.faults import Place, fail
from gaitlab.robot.names import chain_places
from gaitlab.robot.parts import Bellows, BellowsGeometry
from gaitlab.robot.records import Robot


def check_supply(robot: Robot) -> None:
    """Pump tables fall, syringe schedules run forward in time, and nothing is emptier than vacuum. Raises FaultError."""
    supply = robot.supply
    if isinstance(supply, PumpTable):
        _check_pump_table(supply, robot.ambient.pressure_Pa)
    elif isinstance(supply, Syringe):
        _check_syringe(supply)
    else:
        key = "dead_end_vacuum_kPa" if isinstance(supply, Pump) else "fixed_vacuum_kPa"
        vacuum = supply.dead_end_vacuum_Pa if isinstance(supply, Pump) else supply.vacuum_Pa
        if vacuum >= robot.ambient.pressure_Pa:
            rule = f"be below the ambient pressure of {robot.ambient.pressure_Pa / 1e3:g} kPa"
            raise fail(("supply", key), rule, vacuum / 1e3, "a pump reaches the same share of the local air pressure")


def _check_pump_table(table: PumpTable, ambient_Pa: float) -> None:
    vacuum, flow = table.table_vacuum_Pa, table.table_flow_m3_s
    place = ("supply", "table_flow_L_min")
    if len(vacuum) != len(flow) or len(vacuum) < 2:
        raise fail(place, "have as many entries as table_vacuum_kPa, at least 2", len(flow))
    if any(b <= a for a, b in pairwise(vacuum)):
        raise fail(("supply", "table_vacuum_kPa"), "rise from entry to entry", [v / 1e3 for v in vacuum])
    if vacuum[-1] >= ambient_Pa:
        raise fail(("supply", "table_vacuum_kPa"), f"stay below the ambient {ambient_Pa / 1e3:g} kPa", vacuum[-1] / 1e3)
    if any(b >= a for a, b in pairwise(flow)) or flow[-1] != 0.0:
        raise fail(place, "fall from entry to entry and end at 0", fix="the last entry is the dead end")


def _check_syringe(syringe: Syringe) -> None:
    times, volumes = syringe.schedule_s, syringe.schedule_m3
    if len(times) != len(volumes) or len(times) < 2:
        raise fail(("supply", "schedule_mL"), "have as many entries as schedule_s, at least 2", len(volumes))
    if any(b <= a for a, b in pairwise(times)):
        raise fail(("supply", "schedule_s"), "rise from entry to entry", list(times))


def check_valves(robot: Robot) -> None:
    """Valves by drawing name their material once, and bench readings lie below the dead end. Raises FaultError."""
    ring = robot.ring
    _check_valve(ring.valve, ("ring", "valve"))
    _check_bench(ring.resistor, ("ring", "resistor"))
    for index, override in enumerate(ring.overrides):
        if override.valve is not None:
            _check_valve(override.valve, ("ring", "stage", index, "valve"))
        if override.resistor is not None:
            _check_bench(override.resistor, ("ring", "stage", index, "resistor"))


def _check_valve(valve: Valve | ValveGeometry, place: Place) -> None:
    _check_bench(valve.open, (*place, "open"))
    if isinstance(valve, ValveGeometry):
        given = {"youngs_MPa": valve.youngs_Pa, "shore_A": valve.shore_A}
        _check_exactly_one(given, place)
        return
    if valve.hysteresis_Pa >= valve.threshold_Pa + valve.opening_span_Pa:
        raise fail((*place, "hysteresis_kPa"), "be below threshold_kPa + opening_span_kPa", valve.hysteresis_Pa / 1e3)


def _check_bench(part: FlowPart, place: Place) -> None:
    if isinstance(part, BenchRestrictor) and part.reading_Pa >= part.dead_end_Pa:
        raise fail(
            (*place, "reading_kPa"), "be below dead_end_kPa", part.reading_Pa / 1e3, "gauge vacuum, positive numbers"
        )


def check_bellows(robot: Robot) -> None:
    """Every bellows says how far it moves, how stiff it is, and stays within its own solid limit. Raises FaultError."""
    for bellows in robot.bellows:
        place = ("bellows", bellows.name)
        if bellows.geometry is not None:
            _check_geometry(bellows, bellows.geometry, (*place, "geometry"))
        elif bellows.axial_stiffness_N_m is None:
            fix = "it decides the sign of the travel: measure it (N/m of the whole bellows) or give a geometry"
            raise fail((*place, "axial_stiffness_N_m"), "be given where there is no geometry", fix=fix)
        if bellows.swept_volume_m3 > bellows.rest_volume_m3:
            raise fail((*place, "swept_mL"), "be at most rest_mL", bellows.swept_volume_m3 * 1e6)
        _check_motion(bellows, place)


def check_opposed(robot: Robot) -> None:
    """Only a bending bellows has another side to bend to. Raises FaultError."""
    for place, chain in chain_places(robot):
        for index, unit in enumerate(chain.units):
            if unit.opposed_inlet is not None and robot.bellows_named(unit.bellows).action != "bend":
                where = (*place, "unit", index, "opposed_inlet")
                raise fail(where, 'be left out where the bellows has action = "contract"', unit.opposed_inlet)


def _check_motion(bellows: Bellows, place: Place) -> None:
    wanted, other = (
        ("measured_bend", "measured_stroke") if bellows.action == "bend" else ("measured_stroke", "measured_bend")
    )
    if getattr(bellows, other) is not None:
        raise fail((*place, other), f'be left out where action = "{bellows.action}"', fix=f"give {wanted} instead")
    if getattr(bellows, wanted) is None and bellows.geometry is None:
        raise fail((*place, wanted), "be given, or a geometry in its place", fix="bench numbers always beat a formula")
    if bellows.action == "bend":
        _check_bend(bellows, place)
    else:
        _check_stroke(bellows, place)


def _check_bend(bellows: Bellows, place: Place) -> None:
    measured = bellows.measured_bend
    if measured is not None:
        sources = {
            "bend_stiffness_N_m_rad": measured.bend_stiffness_N_m_rad,
            "tip_stiffness_N_mm": measured.tip_stiffness_N_m,
            "blocked_force_N": measured.blocked_force_N,
        }
        given = sum(value is not None for value in sources.values())
        if given > 1 or (given == 0 and bellows.bend_stiffness_N_m_rad is None and bellows.geometry is None):
            raise fail((*place, "measured_bend"), "give one of " + ", ".join(sources))
        if bellows.solid_bend_rad is not None and bellows.solid_bend_rad < measured.free_bend_rad:
            raise fail(
                (*place, "solid_bend_deg"),
                "be at least the measured free_bend_deg",
                fix="the limit lies past any bend seen",
            )


def _check_stroke(bellows: Bellows, place: Place) -> None:
    measured = bellows.measured_stroke
    if bellows.bend_stiffness_N_m_rad is None and bellows.geometry is None:
        raise fail(
            (*place, "bend_stiffness_N_m_rad"), "be given where there is no geometry", fix="it bends under side loads"
        )
    longest = measured.free_stroke_m if measured is not None else 0.0
    if longest >= bellows.length_m:
        raise fail((*place, "measured_stroke", "free_stroke_mm"), "be below length_mm", longest * 1e3)
    if bellows.solid_stroke_m is not None and bellows.solid_stroke_m < longest:
        raise fail((*place, "solid_stroke_mm"), "be at least the measured free_stroke_mm", bellows.solid_stroke_m * 1e3)
    if bellows.solid_stroke_m is not None and bellows.solid_stroke_m >= bellows.length_m:
        raise fail((*place, "solid_stroke_mm"), "be below length_mm", bellows.solid_stroke_m * 1e3)


def _check_geometry(bellows: Bellows, geometry: BellowsGeometry, place: Place) -> None:
    given = {
        "youngs_MPa": geometry.youngs_Pa,
        "shore_A": geometry.shore_A,
        "spring_rate_N_mm": geometry.spring_rate_N_m,
    }
    _check_exactly_one(given, place)
    if geometry.inner_m >= geometry.outer_m:
        raise fail((*place, "inner_mm"), "be below outer_mm", geometry.inner_m * 1e3)
    if geometry.wall_m * 2 >= geometry.outer_m:
        raise fail((*place, "wall_mm"), "be below half of outer_mm", geometry.wall_m * 1e3)
    if bellows.action == "bend" and bellows.measured_bend is None and geometry.eccentricity_m == 0.0:
        fix = "the distance of the stiff spine from the axis; a bellows without one contracts"
        raise fail((*place, "eccentricity_mm"), 'be above 0 where action = "bend"', 0, fix)


def _check_exactly_one(given: dict[str, float | None], place: Place) -> None:
    names = [name for name, value in given.items() if value is not None]
    if len(names) != 1:
        raise fail(place, "give exactly one of " + ", ".join(given), ", ".join(names) or "none")
