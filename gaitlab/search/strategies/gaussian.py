"""A Gaussian process on wirings: what the walks so far say about those not walked."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.linalg import cho_solve, cholesky, solve_triangular

FloatArray = NDArray[np.float64]

# Variance beside the kernel's, as a share of the readings' variance: what a short walk says wrongly; chosen by us.
NOISE = 1e-3


@dataclass(frozen=True)
class Scale:
    """The process before any reading: its mean, and its standard deviation [unit of the readings]."""

    mean: float
    deviation: float


def likely_scale(kernel: FloatArray, readings: FloatArray, noise: float = NOISE, mean: float | None = None) -> Scale:
    """The mean of the readings where none is given, and the deviation that makes them most likely under the kernel:
    σ² = yᵀ K⁻¹ y / n."""
    mean = float(np.mean(readings)) if mean is None else mean
    factor = cholesky(kernel + noise * np.eye(len(readings)), lower=True, check_finite=False)
    white = solve_triangular(factor, readings - mean, lower=True, check_finite=False)
    deviation = float(np.sqrt(np.mean(white**2)))
    return Scale(mean, deviation if deviation > 0.0 else 1.0)


@dataclass(frozen=True)
class Posterior:
    """The process after some readings: its scale, their kernel's factor and weights."""

    scale: Scale
    factor: FloatArray
    weights: FloatArray

    def predicted(self, kernel: FloatArray, own: FloatArray | float = 1.0) -> tuple[FloatArray, FloatArray]:
        """Mean and standard deviation [unit of the readings] of wirings by their kernel rows (wirings, readings).

        `own` is the kernel of each wiring with itself. μ = m + k K⁻¹ (y − m), σ² = s² (own − k K⁻¹ kᵀ) with K = kernel of the readings
        + noise; see Rasmussen & Williams, Gaussian Processes for Machine Learning (2006), equations 2.25 and 2.26.
        """
        through = solve_triangular(self.factor, kernel.T, lower=True, check_finite=False)
        variance = np.maximum(0.0, own - np.sum(through**2, axis=0))
        return self.scale.mean + kernel @ self.weights, self.scale.deviation * np.sqrt(variance)


def posterior(kernel: FloatArray, readings: FloatArray, scale: Scale, noise: float = NOISE) -> Posterior:
    """The process that has seen `readings` (n,) at wirings whose kernel with each other is `kernel` (n, n)."""
    factor = cholesky(kernel + noise * np.eye(len(readings)), lower=True, check_finite=False)
    return Posterior(scale, factor, cho_solve((factor, True), readings - scale.mean, check_finite=False))
