"""A linearly implicit integrator for stiff, autonomous networks: Rosenbrock's method RODAS of order 4 with step control.

Why not scipy's Radau or BDF: a ring has 10 to 150 unknowns and a few hundred steps a period, so what costs time is the
number of Python calls, not arithmetic. Radau iterates and BDF takes small steps after each valve edge; both hand a
full matrix to LU. A Rosenbrock step needs no iteration, takes the analytic Jacobian once, and lets the network
eliminate membranes and bellows before anything is factorised. The tests hold it against scipy's Radau and its order.

Source of the method: E. Hairer, G. Wanner, Solving Ordinary Differential Equations II, section IV.7 (RODAS); the
coefficients are from memory and are held by the order-of-convergence test.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from typing import Protocol

import numpy as np

from gaitlab.ring.waves import FloatArray

GAMMA = 0.25
# Stage i starts from y + Σ A_ij k_j and its right side gets Σ C_ij k_j/h; the last two stages reuse the sums.
A = tuple(
    np.array(row)
    for row in (
        (),
        (1.544,),
        (0.9466785280815826, 0.2557011698983284),
        (3.314825187068521, 2.896124015972201, 0.9986419139977817),
        (1.221224509226641, 6.019134481288629, 12.53708332932087, -0.687886036105895),
    )
)
C = tuple(
    np.array(row)
    for row in (
        (),
        (-5.6688,),
        (-2.430093356833875, -0.2063599157091915),
        (-0.1073529058151375, -9.594562251023355, -20.47028614809616),
        (7.496443313967647, -10.24680431464352, -33.99990352819905, 11.7089089320616),
        (8.083246795921522, -7.981132988064893, -31.52159432874371, 16.31930543123136, -6.058818238834054),
    )
)
DENSE_3 = np.array((10.12623508344586, -7.487995877610167, -34.80091861555747, -7.992771707568823, 1.025137723295662))
DENSE_4 = np.array((-0.6762803392801253, 6.087714651680015, 16.43084320892478, 24.76722511418386, -6.594389125716872))
ORDER = 4
SAFETY, SHRINK, GROW = 0.9, 0.15, 5.0  # step control, common practice in Hairer & Wanner's codes
STEPS_MAX = 200_000  # for one run; a ring needs a few hundred a period


class Linearised(Protocol):
    """Rates and Jacobian J at one state."""

    rates: FloatArray

    def solver(self, shift: float) -> Callable[[FloatArray], FloatArray]:
        """The map r → (shift·1 − J)⁻¹ r."""


class Network(Protocol):
    """An autonomous system dy/dt = f(y)."""

    def rates(self, state: FloatArray) -> FloatArray:
        """f(y)."""

    def linearised(self, state: FloatArray) -> Linearised:
        """f(y) with its Jacobian."""


@dataclass(frozen=True)
class Step:
    """One accepted step with its cubic interpolant; θ runs from 0 to 1 over [start_s, start_s + length_s]."""

    start_s: float
    length_s: float
    before: FloatArray
    after: FloatArray
    third: FloatArray
    fourth: FloatArray

    @property
    def end_s(self) -> float:
        """Time at the end of the step."""
        return self.start_s + self.length_s

    def state(self, theta: float) -> FloatArray:
        """State at the fraction θ of the step (third order)."""
        rest = 1.0 - theta
        return self.before * rest + theta * (self.after + rest * (self.third + theta * self.fourth))

    def component(self, index: int, theta: float) -> float:
        """One component of `state`."""
        rest = 1.0 - theta
        bend = float(self.third[index]) + theta * float(self.fourth[index])
        return float(self.before[index]) * rest + theta * (float(self.after[index]) + rest * bend)


def steps(
    network: Network,
    start: FloatArray,
    *,
    scale: FloatArray,
    tolerance: float,
    first_s: float,
    longest_s: float = np.inf,
    start_s: float = 0.0,
) -> Iterator[Step]:
    """Accepted steps from `start`, without end; the caller stops when it has seen enough.

    The error of a step is kept below `tolerance` · `scale` in the root mean square over the components. `first_s` is the first
    step tried, `longest_s` a limit. Raises ArithmeticError when the step shrinks to nothing or STEPS_MAX is reached.
    """
    time, state, length = start_s, start, first_s
    divisor = tolerance * scale
    linear, rejected = network.linearised(state), False
    for _ in range(STEPS_MAX):
        step, error = tried(network, linear, state, time, length, divisor)
        factor = min(GROW, max(SHRINK, SAFETY * error ** (-1.0 / ORDER))) if error > 0 else GROW
        if error > 1.0:
            length, rejected = length * factor, True
            if length < 1e-15 * (1.0 + abs(time)):
                break
            continue
        length = min(longest_s, length * (min(factor, 1.0) if rejected else factor))
        time, state, rejected = step.end_s, step.after, False
        yield step
        linear = network.linearised(state)
    raise ArithmeticError(f"the ring's equations cannot be followed past {time:.6g} s")


def tried(
    network: Network, linear: Linearised, state: FloatArray, time: float, length: float, divisor: FloatArray
) -> tuple[Step, float]:
    """One step of RODAS4 and its error over the tolerance (infinite when the state left the numbers)."""
    solve = linear.solver(1.0 / (GAMMA * length))
    k = np.empty((6, state.size))
    k[0] = solve(linear.rates)
    for i in range(1, 5):
        at = state + A[i] @ k[:i]
        k[i] = solve(network.rates(at) + (C[i] @ k[:i]) / length)
    at = at + k[4]
    k[5] = solve(network.rates(at) + (C[5] @ k[:5]) / length)
    scaled = k[5] / divisor
    error = float(np.sqrt(scaled @ scaled / state.size))
    step = Step(time, length, state, at + k[5], DENSE_3 @ k[:5], DENSE_4 @ k[:5])
    return step, error if np.isfinite(error) else 1e9
