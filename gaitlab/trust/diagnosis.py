"""From a fitted ring to words at the bench: what differs from the drawing, what to look at, what such data cannot tell."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from gaitlab.air.duct import exact_mass_flow
from gaitlab.air.gas import gas_of
from gaitlab.ring.waves import RingRun
from gaitlab.robot.records import Robot
from gaitlab.trust.as_built import conductance_factor, opening_text, stage_parts
from gaitlab.trust.matching import Fitted, Match, typical_volume_m3
from gaitlab.trust.trace_reading import TraceReading
from gaitlab.wiring.wiring import Wiring

FloatArray = NDArray[np.float64]

# Smallest differences worth a word, chosen by us: 2 % of an opening (5 % of flow), 0.2 % of an open valve leaking, a
# twentieth of the gas an output moves, 3 % of the pump, 4 % of a threshold, 1.5 kPa along a tube; all beyond two errors.
WORTH = {"opening": 0.02, "leak": 0.002, "supply flow": 0.03, "valve threshold": 0.04}
VOLUME_SHARE, TUBE_DROP_PA, ERRORS = 0.05, 1500.0, 2.0
MIRRORED = (
    0.06  # of a period: phases this near to the mirror of the expected ones, and far from these, are counted backwards
)
ANR_KG_M3 = 1.185  # ISO 8778 reference density


@dataclass(frozen=True)
class Finding:
    """One difference from the drawing: where, how many standard errors it stands out by, and what it means in words."""

    where: str
    errors: float
    words: str


def findings(robot: Robot, wiring: Wiring, reading: TraceReading, match: Match) -> tuple[Finding, ...]:
    """What differs, the clearest first."""
    told = [f for item in match.fitted if (f := _finding(robot, item, match)) is not None]
    told += _tube_findings(wiring, reading, match)
    return tuple(sorted(told, key=lambda f: -f.errors))


def _finding(robot: Robot, item: Fitted, match: Match) -> Finding | None:
    away = item.away
    worth = WORTH.get(item.kind, VOLUME_SHARE * typical_volume_m3(robot))
    if not item.decided or abs(away) < worth or abs(away) < ERRORS * item.error:
        return None
    stands_out = abs(away) / max(item.error, 1e-12)
    return Finding(item.name, stands_out, _words(robot, item, match))


def _words(robot: Robot, item: Fitted, match: Match) -> str:
    stage = item.stage
    match item.kind:
        case "opening":
            return _opening_words(robot, item, match)
        case "leak":
            return (
                f"output {stage} leaks {_leak_mL_min(robot, item, match):.3g} mL/min at its peak vacuum: "
                f"valve seat {stage}, a fitting, the tube or the bellows on it"
            )
        case "volume":
            more = "more" if item.value > 0 else "less"
            cause = (
                "a longer tube, a larger bellows, a trapped pocket"
                if item.value > 0
                else "a tube pinched shut, a bellows not joined"
            )
            return f"output {stage} moves {abs(item.value) * 1e6:.2f} mL {more} gas than drawn: {cause}"
        case "supply flow":
            short = item.value < 1
            cause = (
                "pump worn, hose or filter narrow, or a leak at the manifold"
                if short
                else "the pump gives more than its sheet"
            )
            return f"the supply delivers {item.value:.2f} of the stated flow{', it sags' if short else ''}: {cause}"
    return f"the valves open at {item.value:.2f} of the stated threshold: membrane {'stiffer' if item.value > 1 else 'softer'} than drawn"


def _opening_words(robot: Robot, item: Fitted, match: Match) -> str:
    factor = conductance_factor(robot, item.stage, match.built.stages[item.stage - 1])
    size = opening_text(stage_parts(robot, item.stage)[0], item.value)
    flow = f"its resistor lets {factor:.2f} of the drawn flow through ({size})"
    if factor < 1:
        return f"stage {item.stage} evacuates slowly: {flow}: narrow or partly blocked"
    return f"stage {item.stage} evacuates fast: {flow}: too wide, or air bypasses it"


def _leak_mL_min(robot: Robot, item: Fitted, match: Match) -> float:
    gas, peak_Pa = gas_of(robot.ambient), float(match.run.peak_vacuum_Pa[item.stage - 1])
    valve = stage_parts(robot, item.stage)[1]
    flow = exact_mass_flow(valve.open, gas.pressure_Pa, gas.pressure_Pa - peak_Pa, gas)
    return item.value * flow / ANR_KG_M3 * 60e6


def _tube_findings(wiring: Wiring, reading: TraceReading, match: Match) -> list[Finding]:
    """Bellows whose vacuum falls short of what the fitted ring would give them."""
    found = []
    for inlet, gauge in reading.inlets:
        expected = float(match.run.waves.vacuum_Pa[match.run.waves.inlets.index(inlet)].max())
        short = expected - gauge.peak_Pa
        if short > TUBE_DROP_PA:
            words = (
                f"bellows {inlet} peaks {short / 1e3:.1f} kPa below what output {wiring.source(inlet)} would give it: "
                "its own leak, or a pinched or blocked tube"
            )
            found.append(Finding(f"inlet {inlet}", short / TUBE_DROP_PA * ERRORS, words))
    return found


def cannot_tell(match: Match, reading: TraceReading) -> tuple[str, ...]:
    """What pressure traces such as these cannot tell apart, for this fit and in general."""
    told = [f"{one} and {other} (their errors go together, r = {r:+.2f})" for one, other, r in match.confounded]
    undecided = [item.name for item in match.fitted if not item.decided]
    if undecided:
        told.append("nothing was learnt about " + ", ".join(undecided))
    told.append("a narrow resistor from a partly blocked or a longer one: only their flow counts")
    told.append(
        "a leak at a valve seat from one in the tube or bellows of that output: clamp the tube at the port and log again"
    )
    told.append("extra volume in a tube from extra volume in a bellows or port")
    if reading.supply_Pa is None:
        told.append(
            "a weak pump from a narrow supply hose, and both from resistors that are all narrow: log supply_kPa too"
        )
    if not reading.inlets:
        told.append(
            "a leaking or pinched bellows from a sound one that does not load its output: log inlet_NAME_kPa at the weak legs"
        )
    return tuple(told)


def counted_backwards(expected: RingRun, reading: TraceReading) -> bool:
    """Whether the gauges' phases fit the mirror image of the expected ones: stages counted the wrong way round."""
    reference = reading.reference_stage
    pairs = [(g.phase, (expected.phase[k - 1] - expected.phase[reference - 1]) % 1.0) for k, g in reading.stages]
    told = np.array([pair for pair in pairs if all(math.isfinite(phase) for phase in pair)])
    if len(told) < 3:
        return False
    plain, mirrored = (np.abs(_turn(told[:, 0] - sign * told[:, 1])).max() for sign in (1, -1))
    return bool(mirrored < MIRRORED < plain)


def _turn(phase: FloatArray) -> FloatArray:
    return (phase + 0.5) % 1.0 - 0.5


def resting_words(robot: Robot, reading: TraceReading) -> tuple[str, ...]:
    """A ring that stands still: the stages whose output does not follow from their input, and what that points to.

    A sound stage whose input is below its threshold is at vacuum, one whose input is well above it is near atmosphere; in a
    ring with an odd number of stages not all can be, and those that are not are where to look.
    """
    levels = dict(reading.levels_Pa)
    told = []
    for stage, output_Pa in levels.items():
        input_Pa = levels.get((stage - 2) % robot.ring.stages + 1)
        if input_Pa is not None:
            told += _stuck_words(robot, stage, input_Pa, output_Pa)
    return tuple(told) or ("no single stage stands out: compare the levels with those of `gaitlab inverter`",)


def _stuck_words(robot: Robot, stage: int, input_Pa: float, output_Pa: float) -> list[str]:
    valve = stage_parts(robot, stage)[1]
    high = output_Pa > valve.threshold_Pa
    at = f"stage {stage} (input {input_Pa / 1e3:.1f} kPa, output {output_Pa / 1e3:.1f} kPa)"
    if input_Pa < valve.threshold_Pa and not high:
        return [f"{at} should pull vacuum and does not: resistor blocked, output leaking, or its valve stuck open"]
    if input_Pa > valve.threshold_Pa + valve.opening_span_Pa + valve.sealing * output_Pa and high:
        return [f"{at} should vent and does not: its valve does not open, or its control chamber is cut off"]
    return []
