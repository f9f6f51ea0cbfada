"""The vacuum that a supply keeps while a ring draws on it, from the steady flows alone."""

from __future__ import annotations

import numpy as np
from scipy.optimize import brentq

from gaitlab.air.elements import FlowElements
from gaitlab.air.gas import gas_of
from gaitlab.air.valve import valve_numbers
from gaitlab.ring.inverter import held_outputs
from gaitlab.ring.manifold import manifold_of
from gaitlab.ring.pattern import StageParts, stage_parts
from gaitlab.robot.circuit import Syringe
from gaitlab.robot.records import Robot

LEAST_PART = 1e-3  # of the dead-end vacuum; nothing works below


def working_vacuum(robot: Robot) -> float:
    """Gauge vacuum [Pa] at which the supply carries half of the stages with their valves open, the mean of a running ring.

    A syringe is taken at its dead end, where the whole stroke has been pulled.
    """
    gas = gas_of(robot.ambient)
    manifold = manifold_of(robot.supply, gas)
    dead_end = gas.pressure_Pa - manifold.dead_end_Pa
    if isinstance(robot.supply, Syringe):
        return dead_end
    stages = stage_parts(robot.ring)

    def excess(vacuum_Pa: float) -> float:
        drawn = 0.5 * sum(_draw(stage, vacuum_Pa, robot) for stage in stages)
        return manifold.source.mass_flow(gas.pressure_Pa - vacuum_Pa)[0] - drawn

    return float(brentq(excess, LEAST_PART * dead_end, dead_end, xtol=1.0))


def _draw(stage: StageParts, supply_Pa: float, robot: Robot) -> float:
    """Mass flow [kg/s] through one stage whose valve is fully open."""
    gas = gas_of(robot.ambient)
    _, output = held_outputs(stage.resistor, valve_numbers(stage.valve), supply_Pa, gas)
    inside = np.array([gas.pressure_Pa - output[-1]])
    flow = FlowElements.of([stage.resistor], gas).flow(inside, np.array([gas.pressure_Pa - supply_Pa]))[0]
    return float(flow[0])
