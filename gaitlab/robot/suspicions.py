"""Things a robot file may say that are legal but rarely meant: each is a named warning, never an error."""

from __future__ import annotations

from collections.abc import Iterator

from gaitlab.robot.circuit import FixedVacuum, Pump, PumpTable, Ring, Valve
from gaitlab.robot.parts import Bellows, Foot
from gaitlab.robot.records import Robot

# Thresholds below are chosen by us, each where its comment says so, from the reason named in the warning's text.


def suspicions(robot: Robot) -> tuple[str, ...]:
    """Named warnings (``name: what and why``) about legal but unlikely numbers, in the file's order."""
    found: list[str] = [*_ring_suspicions(robot)]
    for bellows in robot.bellows:
        found += _bellows_suspicions(bellows)
    for foot in robot.feet:
        found += _foot_suspicions(foot)
    found += _body_suspicions(robot)
    return tuple(found)


def greatest_vacuum_Pa(robot: Robot) -> float | None:
    """The deepest gauge vacuum the supply can hold [Pa]; None for a syringe, which depends on its load."""
    supply = robot.supply
    if isinstance(supply, Pump):
        return supply.dead_end_vacuum_Pa
    if isinstance(supply, PumpTable):
        return supply.table_vacuum_Pa[-1]
    return supply.vacuum_Pa if isinstance(supply, FixedVacuum) else None


def _ring_suspicions(robot: Robot) -> Iterator[str]:
    ring: Ring = robot.ring
    if ring.stages % 2 == 0 or ring.stages < 3:
        yield f"even_ring: {ring.stages} inverters in a loop latch; only an odd ring of 3 or more oscillates"
    vacuum = greatest_vacuum_Pa(robot)
    if isinstance(ring.valve, Valve) and vacuum is not None and ring.valve.threshold_Pa >= vacuum:
        yield (
            f"valve_never_opens: threshold {ring.valve.threshold_Pa / 1e3:g} kPa is not below "
            f"the supply's {vacuum / 1e3:g} kPa"
        )
    if isinstance(ring.valve, Valve) and ring.valve.sealing > 1.0:
        yield "sealing_above_1: a flow-side vacuum then shuts the valve harder than its control opens it"


def _bellows_suspicions(bellows: Bellows) -> Iterator[str]:
    if bellows.bend_damping_s < 0.02:  # below it two physics engines stop agreeing on the order of wirings
        yield f"low_bend_damping: bellows {bellows.name} rings on; the order of wirings is then less certain"
    if bellows.measured_bend is None and bellows.measured_stroke is None:
        yield f"formula_only: bellows {bellows.name} rests on its drawing; a measured bend or stroke always beats a formula"
    if bellows.rest_volume_m3 > 1.2 * bellows.length_m * bellows.diameter_m**2:  # 1.5 × a full cylinder (π/4)
        yield f"volume_too_large: bellows {bellows.name} holds more air than a cylinder of its length and diameter"


def _foot_suspicions(foot: Foot) -> Iterator[str]:
    if foot.friction >= 1.0:
        yield f"high_friction: foot {foot.name} with friction {foot.friction:g}; engines differ from 1 upwards"
    if foot.spacing_m == 0.0:
        yield f"single_point_foot: foot {foot.name} is one sphere; a row of them can roll over sideways"


def _body_suspicions(robot: Robot) -> Iterator[str]:
    body = robot.body
    used = {unit.bellows for chain in robot.chains() for unit in chain.units}
    unused = [b.name for b in robot.bellows if b.name not in used]
    if unused:
        yield "unused_bellows: no chain uses " + ", ".join(unused)
    if not body.legs and not body.skids:
        yield "no_feet: nothing but the blocks themselves touches the ground"
    for leg in body.legs:
        half = next(b for b in body.blocks if b.name == leg.block).size_m
        if any(abs(at) > 1.5 * size / 2 for at, size in zip(leg.at_m[:2], half[:2], strict=True)):
            yield f"leg_off_block: leg {leg.name} starts outside block {leg.block}"
