"""One inverter at rest: its curve, the levels it holds, its gain, and what a ring of N of them needs.

At a steady opening the resistor and the valve pass the same flow; that gives the output for each opening. The opening then
balances when the control vacuum puts its target there. A valve that seals against the vacuum it vents opens with a
snap: between two controls there are two balances, the curve is taken upwards and downwards.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from gaitlab.air.elements import FlowElements
from gaitlab.air.gas import Gas
from gaitlab.ring.membranes import Membranes
from gaitlab.ring.waves import FloatArray
from gaitlab.robot.circuit import FlowPart, Valve

OPENINGS = 400  # points of the balance curve along the opening (chosen by us)
CONTROL_STEP_PA = 250.0  # of the printed curve
BISECTIONS = 48


@dataclass(frozen=True)
class InverterCurve:
    """Output against control, both gauge vacuum [Pa], at one supply vacuum; `rising` as the control grows, `falling` as it falls.

    `low_Pa`, `high_Pa` are the outputs held at full and at no control, `switch_in_Pa` and `switch_out_Pa` the controls
    (rising, falling) at which the output passes the middle between them, `gain_max` the steepest step of the curve, a
    snap counted as one step of `CONTROL_STEP_PA`. The margins say how far `low_Pa` stays below the falling switch and
    `high_Pa` above the rising one.
    """

    supply_Pa: float
    control_Pa: FloatArray
    rising_Pa: FloatArray
    falling_Pa: FloatArray
    low_Pa: float
    high_Pa: float
    switch_in_Pa: float
    switch_out_Pa: float
    gain_max: float

    @property
    def margin_low_Pa(self) -> float:
        """How far the low level stays below the control at which the next valve lets go."""
        return self.switch_out_Pa - self.low_Pa

    @property
    def margin_high_Pa(self) -> float:
        """How far the high level stays above the control at which the next valve takes hold."""
        return self.high_Pa - self.switch_in_Pa


def gain_needed(stages: int) -> float:
    """Least small-signal gain of N equal first-order stages that oscillate: sec(π/N); infinite for N < 3.

    Source: each stage may lag by π/N, where a first-order stage has lost a factor cos(π/N) (Razavi, Design of
    Analog CMOS Integrated Circuits, ring oscillators; from memory).

    >>> round(gain_needed(5), 6)
    1.236068
    """
    return 1.0 / math.cos(math.pi / stages) if stages > 2 else math.inf


def inverter_curve(resistor: FlowPart, valve: Valve, supply_Pa: float, gas: Gas) -> InverterCurve:
    """The curve of one inverter whose supply is held at `supply_Pa` of gauge vacuum."""
    opening, output = held_outputs(resistor, valve, supply_Pa, gas)
    balance = _balance(valve, opening, output, gas)
    control = np.arange(0.0, supply_Pa + CONTROL_STEP_PA, CONTROL_STEP_PA)
    rising, falling = (
        np.array([_output_at(c, opening, output, balance, first) for c in control]) for first in (True, False)
    )
    low, high = float(rising[-1]), float(rising[0])
    middle = 0.5 * (low + high)
    return InverterCurve(
        supply_Pa=supply_Pa,
        control_Pa=control,
        rising_Pa=rising,
        falling_Pa=falling,
        low_Pa=low,
        high_Pa=high,
        switch_in_Pa=_passage(control, rising, middle),
        switch_out_Pa=_passage(control, falling, middle),
        gain_max=float(np.max(-np.diff(rising)) / CONTROL_STEP_PA),
    )


def held_outputs(resistor: FlowPart, valve: Valve, supply_Pa: float, gas: Gas) -> tuple[FloatArray, FloatArray]:
    """Openings from leak to 1 (OPENINGS,) and the output vacuum [Pa] at which resistor and valve pass the same flow."""
    opening = np.geomspace(valve.leak_fraction, 1.0, OPENINGS)
    flows = FlowElements.of([resistor] * OPENINGS + [valve.open] * OPENINGS, gas)
    ambient = np.full(OPENINGS, gas.pressure_Pa)
    low, high = ambient - supply_Pa, ambient.copy()
    supply = low.copy()
    for _ in range(BISECTIONS):
        middle = 0.5 * (low + high)
        flow = flows.flow(np.concatenate((middle, ambient)), np.concatenate((supply, middle)))[0]
        too_high = flow[:OPENINGS] > opening * flow[OPENINGS:]
        low, high = np.where(too_high, low, middle), np.where(too_high, middle, high)
    return opening, gas.pressure_Pa - 0.5 * (low + high)


def _balance(valve: Valve, opening: FloatArray, output: FloatArray, gas: Gas) -> Callable[[float], FloatArray]:
    """The map control → (target − opening) along the opening."""
    membranes = Membranes.of([valve] * opening.size, gas.pressure_Pa)
    inside = gas.pressure_Pa - output

    def excess(control_Pa: float) -> FloatArray:
        control = np.full(opening.size, gas.pressure_Pa - control_Pa)
        return membranes.target(control, inside, opening)[0] - opening

    return excess


def _output_at(
    control_Pa: float, opening: FloatArray, output: FloatArray, balance: Callable[[float], FloatArray], first: bool
) -> float:
    """Output at the first (opening from shut) or last (closing from open) balance at one control."""
    excess = balance(control_Pa)
    if first:
        at = int(np.argmax(excess <= 0.0))
        pair = (at - 1, at)
        end = at == 0
    else:
        at = int(excess.size - 1 - np.argmax(excess[::-1] >= 0.0))
        pair = (at, at + 1)
        end = at == excess.size - 1
    if end or excess[pair[0]] == excess[pair[1]]:
        return float(output[at])
    part = excess[pair[0]] / (excess[pair[0]] - excess[pair[1]])
    return float(output[pair[0]] + part * (output[pair[1]] - output[pair[0]]))


def _passage(control: FloatArray, output: FloatArray, level: float) -> float:
    """Control at which the falling curve passes `level`; nan where it never does."""
    below = np.flatnonzero(output <= level)
    if below.size == 0 or below[0] == 0:
        return float("nan")
    at = int(below[0])
    part = (output[at - 1] - level) / (output[at - 1] - output[at])
    return float(control[at - 1] + part * (control[at] - control[at - 1]))
