"""First-order stages for the ring's own network code: rings whose onset and period are known in closed form.

Pressures run from 0 (vacuum, logic 1) to 1 (atmosphere); the manifold is so large that it does not move. A stage is
push-pull: its resistor shuts as its valve opens, so that it pulls up with rate 1/τu and down with 1/τd.
"""

from __future__ import annotations

import numpy as np
from scipy.optimize import brentq, fsolve

from gaitlab.ring.chambers import Chambers
from gaitlab.ring.manifold import Sealed
from gaitlab.ring.network import FloatArray, Network
from gaitlab.ring.periodic import cut_fraction
from gaitlab.ring.rosenbrock import steps

TRAVEL_S = 1e-9  # membranes that follow at once
HUGE_M3 = 1e12


class Conductances:
    """Linear flow m = g (p_a − p_b)."""

    def __init__(self, conductance: FloatArray) -> None:
        self.conductance = conductance

    def flow(self, p_a: FloatArray, p_b: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
        return self.mass_flow(p_a, p_b), self.conductance, -self.conductance

    def mass_flow(self, p_a: FloatArray, p_b: FloatArray) -> FloatArray:
        return self.conductance * (p_a - p_b)


class Gain:
    """Opening ½ + K (control vacuum − θ), held between 0 and 1."""

    def __init__(self, gain: float, threshold: float = 0.5) -> None:
        self.gain, self.threshold = gain, threshold

    def target(
        self, control_Pa: FloatArray, output_Pa: FloatArray, opening: FloatArray
    ) -> tuple[FloatArray, FloatArray, FloatArray, FloatArray]:
        free = 0.5 + self.gain * (1.0 - control_Pa - self.threshold)
        slope = np.where((free > 0.0) & (free < 1.0), -self.gain, 0.0)
        return np.clip(free, 0.0, 1.0), slope, np.zeros_like(free), np.zeros_like(free)

    def share(self, control_Pa: FloatArray, output_Pa: FloatArray, opening: FloatArray) -> FloatArray:
        return np.clip(0.5 + self.gain * (1.0 - control_Pa - self.threshold), 0.0, 1.0)


def first_order_ring(
    stages: int, gain: float, *, up_s: float = 1.0, down_s: float = 1.0, threshold: float = 0.5
) -> Network:
    """N push-pull stages of this gain and these time constants."""
    conductance = np.concatenate((np.full(stages, 1.0 / up_s), np.full(stages, 1.0 / down_s)))
    return Network(
        gas_J_kg=1.0,
        ambient_Pa=1.0,
        volume_m3=np.ones(stages),
        travel_s=np.full(stages, TRAVEL_S),
        fed_by=np.zeros(0, dtype=np.int64),
        flows=Conductances(conductance),
        openings=Gain(gain, threshold),
        chambers=Chambers.of([], 1.0),
        supply=Sealed(),
        complement=1.0,
    )


def state_of(outputs: FloatArray, openings: FloatArray) -> FloatArray:
    """The network's state; the manifold is empty."""
    return np.concatenate((outputs, openings, [0.0, HUGE_M3]))


def scale_of(stages: int) -> FloatArray:
    """Full swings; the manifold is let be."""
    return np.concatenate((np.ones(2 * stages), [HUGE_M3, HUGE_M3]))


def simulated(network: Network, *, level: float, cuts: int, tolerance: float) -> tuple[float, float]:
    """Last period of output 1 between cuts at `level`, and the most vacuum that it reached in it."""
    n = network.stages
    start = state_of(np.where(np.arange(n) % 2 == 0, 0.3, 0.7), np.full(n, 0.5))
    times: list[float] = []
    lowest = 1.0
    for step in steps(network, start, scale=scale_of(n), tolerance=tolerance, first_s=1e-4, longest_s=0.2):
        lowest = min(lowest, *(step.component(0, theta) for theta in (0.25, 0.5, 0.75, 1.0)))
        theta = cut_fraction(step, level)
        if theta is not None:
            times.append(step.start_s + theta * step.length_s)
            if len(times) == cuts:
                return times[-1] - times[-2], 1.0 - lowest
            lowest = 1.0
    raise AssertionError("the integrator ended by itself")


def comparator_period(stages: int) -> float:
    """T/RC of N comparators at half swing: T = 2 N ln q with q + q^−(N−1) = 2, q > 1."""
    q = brentq(lambda x: x + x ** (1 - stages) - 2.0, 1.0 + 1e-3, 2.0, xtol=1e-15)
    return float(2 * stages * np.log(q))


def unequal_period(stages: int, up_s: float, down_s: float, threshold: float) -> tuple[float, float]:
    """T and peak of N comparators at θ with unequal rise and fall, from the four equations of the periodic state.

    An output falls from v1 to θ in a (then the next one switches), rises from v2 to θ in b, and goes on for the rest of
    D and U: v1 e^(−a/τd) = θ, 1 − (1 − v2) e^(−b/τu) = θ, v2 = v1 e^(−U/τd), v1 = 1 − (1 − v2) e^(−D/τu) with
    U = ((N+1) a + (N−1) b)/2 the time pulled down, D = ((N+1) b + (N−1) a)/2 the time pulled up.
    """

    def faults(x: FloatArray) -> list[float]:
        a, b, v1, v2 = x
        u, d = ((stages + 1) * a + (stages - 1) * b) / 2.0, ((stages + 1) * b + (stages - 1) * a) / 2.0
        return [
            v1 * np.exp(-a / down_s) - threshold,
            1.0 - (1.0 - v2) * np.exp(-b / up_s) - threshold,
            v1 * np.exp(-u / down_s) - v2,
            1.0 - (1.0 - v2) * np.exp(-d / up_s) - v1,
        ]

    a, b, v1, _ = fsolve(faults, [0.5 * down_s, 0.6 * up_s, 0.9, 0.1], xtol=1e-13)
    return float(stages * (a + b)), float(v1)
