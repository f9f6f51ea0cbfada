"""The integrator alone: its order, its stiffness, its interpolant."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest

from gaitlab.ring.rosenbrock import FloatArray, steps, tried


class Dense:
    """Any autonomous system given by rates and Jacobian."""

    def __init__(self, rates: Callable[[FloatArray], FloatArray], jacobian: Callable[[FloatArray], FloatArray]) -> None:
        self.rates, self.jacobian = rates, jacobian

    def linearised(self, state: FloatArray) -> DenseAt:
        return DenseAt(self.rates(state), self.jacobian(state))


class DenseAt:
    """Its linearisation at one state."""

    def __init__(self, rates: FloatArray, jacobian: FloatArray) -> None:
        self.rates, self.jacobian = rates, jacobian

    def solver(self, shift: float) -> Callable[[FloatArray], FloatArray]:
        matrix = shift * np.eye(self.rates.size) - self.jacobian
        return lambda right: np.linalg.solve(matrix, right)


def pendulum() -> Dense:
    """Undamped pendulum: smooth, nonlinear, not stiff."""
    return Dense(lambda y: np.array([y[1], -np.sin(y[0])]), lambda y: np.array([[0.0, 1.0], [-np.cos(y[0]), 0.0]]))


def end_of(system: Dense, start: FloatArray, end_s: float, count: int) -> FloatArray:
    """State after `count` equal steps."""
    state, length = start, end_s / count
    for k in range(count):
        state = tried(system, system.linearised(state), state, k * length, length, np.ones(start.size))[0].after
    return state


def test_order_of_convergence() -> None:
    """Error against halved steps falls with the fourth power: regression over five step sizes, pendulum."""
    start, counts = np.array([1.0, 0.3]), np.array([10, 20, 40, 80, 160])
    exact = end_of(pendulum(), start, 2.0, 3000)
    errors = [np.linalg.norm(end_of(pendulum(), start, 2.0, int(c)) - exact) for c in counts]
    order = -np.polyfit(np.log(counts), np.log(errors), 1)[0]
    assert 3.8 < order < 4.4


def test_interpolant_is_third_order() -> None:
    """Halving the step divides the interpolant's error in mid-step by more than 2³."""
    start = np.array([1.0, 0.3])
    errors = []
    for length in (0.4, 0.2, 0.1):
        step = tried(pendulum(), pendulum().linearised(start), start, 0.0, length, np.ones(2))[0]
        errors.append(np.linalg.norm(step.state(0.5) - end_of(pendulum(), start, 0.5 * length, 200)))
        assert step.component(1, 0.5) == pytest.approx(step.state(0.5)[1], abs=1e-15)
    assert errors[0] / errors[1] > 8.0 and errors[1] / errors[2] > 8.0


def test_stiff_decay_is_followed_with_long_steps() -> None:
    """y' = −10⁶ (y − cos t) with t as a state: after the layer the steps are those of cos t."""
    system = Dense(
        lambda y: np.array([-1e6 * (y[0] - np.cos(y[1])), 1.0]),
        lambda y: np.array([[-1e6, -1e6 * np.sin(y[1])], [0.0, 0.0]]),
    )
    count = 0
    for step in steps(system, np.array([0.0, 0.0]), scale=np.ones(2), tolerance=1e-5, first_s=1e-6):
        count += 1
        if step.end_s > 10.0:
            break
    assert step.after[0] == pytest.approx(np.cos(step.after[1]), abs=1e-5)
    assert count < 300


def test_a_system_that_blows_up_is_reported(monkeypatch: pytest.MonkeyPatch) -> None:
    """y' = y² reaches infinity at t = 1: the integrator says where it stopped."""
    monkeypatch.setattr("gaitlab.ring.rosenbrock.STEPS_MAX", 3000)
    system = Dense(lambda y: y * y, lambda y: np.diag(2.0 * y))
    with pytest.raises(ArithmeticError, match="cannot be followed past"):
        for step in steps(system, np.array([1.0]), scale=np.ones(1), tolerance=1e-6, first_s=1e-3):
            assert step.end_s < 1.01
