"""Which number decides the result: first-order sensitivity from the draws themselves, with its own uncertainty.

The first-order index of an input is the share of the output's variance that would go if that input were known
(Sobol 1993): S = Var(E[y | x]) / Var(y). It is read, with no extra runs, from a polynomial chaos expansion fitted to plain
draws (Sudret 2008): with orthonormal polynomials of each input, Var(E[y | x]) is the sum of the squared coefficients of that
input's terms. Straight terms are all in the fit where the draws carry them; others are added one by one, the most telling
first, while an extended Bayesian criterion agrees (Chen & Chen 2008). The interval is a bootstrap.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.special import eval_legendre

FloatArray = NDArray[np.float64]

DRAWS_PER_DEGREE = 32  # chosen by us: 64 draws carry parabolas
DRAWS_PER_STRAIGHT_TERM = 1.5  # chosen by us: a third of the draws is left to tell scatter from effect
NO_SPREAD = 1e-12  # relative; below this the values differ by rounding only
DEGREE_MAX = 8
RESAMPLES = 200  # bootstrap resamples, chosen by us: the 90 % interval's ends settle to about 0.02


@dataclass(frozen=True)
class Sensitivity:
    """First-order share of the variance that one tolerance carries, 0…1, and the 90 % interval of that estimate."""

    name: str
    share: float
    low: float
    high: float


def sensitivities(
    points: FloatArray, values: FloatArray, names: Sequence[str], *, seed: int = 0
) -> tuple[Sensitivity, ...]:
    """First-order shares, largest first; coordinates of one name (a tolerance drawn per stage or leg) are added up.

    `points` (n, D) in the unit cube, `values` (n,), `names` (D,). Rows whose value is not finite are left out. Empty
    where fewer than 16 values are left (no fair estimate); zero shares where the values do not vary.
    """
    finite = np.isfinite(values)
    x, y = points[finite], values[finite]
    if len(y) < 16 or points.shape[1] == 0:
        return ()
    shares = _grouped(first_order(x, y), names)
    rng = np.random.default_rng(seed)
    samples = np.array([_resampled(x, y, names, rng) for _ in range(RESAMPLES)])
    low, high = _interval(shares, samples)
    labels = list(dict.fromkeys(names))
    found = [Sensitivity(n, float(s), float(a), float(b)) for n, s, a, b in zip(labels, shares, low, high, strict=True)]
    return tuple(sorted(found, key=lambda s: (-s.share, s.name)))


def first_order(points: FloatArray, values: FloatArray) -> FloatArray:
    """Estimated first-order index of each column of `points` (n, D); zeros where `values` do not vary.

    What chance alone would give a coefficient is taken off, so estimates of idle inputs scatter about 0, a little below too.
    """
    count, dimensions = points.shape
    centred = values - values.mean()
    if np.sqrt(centred @ centred / count) <= NO_SPREAD * np.abs(values).max(initial=0.0):
        return np.zeros(dimensions)
    degree = min(DEGREE_MAX, max(1, count // DRAWS_PER_DEGREE))
    basis = np.hstack([np.sqrt(2 * k + 1) * eval_legendre(k, 2 * points - 1) for k in range(1, degree + 1)])
    start = list(range(dimensions)) if count >= DRAWS_PER_STRAIGHT_TERM * (dimensions + 1) else []
    terms = _grown(basis, centred, start)
    squares, unexplained = _squares(basis[:, terms], centred)
    by_input = np.bincount(np.array(terms, dtype=int) % dimensions, weights=squares, minlength=dimensions)
    return np.asarray(by_input / (np.maximum(by_input, 0.0).sum() + unexplained))


def _grown(basis: FloatArray, centred: FloatArray, terms: list[int]) -> list[int]:
    """`terms` and those columns of `basis` (n, P) that earn their place by the criterion n ln(rss) + k (ln n + ln P)."""
    count, candidates = basis.shape
    price = np.log(count) + np.log(candidates)
    residual = _residual(basis[:, terms], centred)
    while len(terms) < min(count // 2, candidates):
        gain = np.abs(basis.T @ residual)
        gain[terms] = -1.0
        grown = [*terms, int(gain.argmax())]
        rest = _residual(basis[:, grown], centred)
        if residual @ residual <= rest @ rest * np.exp(price / count):
            break
        terms, residual = grown, rest
    return terms


def _residual(columns: FloatArray, centred: FloatArray) -> FloatArray:
    design = np.column_stack([np.ones(len(centred)), columns])
    return np.asarray(centred - design @ np.linalg.lstsq(design, centred, rcond=None)[0])


def _squares(columns: FloatArray, centred: FloatArray) -> tuple[FloatArray, float]:
    """Squared coefficients less their own error variance, and the variance that is left unexplained."""
    design = np.column_stack([np.ones(len(centred)), columns])
    coefficients = np.linalg.lstsq(design, centred, rcond=None)[0]
    residual = centred - design @ coefficients
    unexplained = float(residual @ residual) / (len(centred) - design.shape[1])
    error = unexplained * np.diag(np.linalg.pinv(design.T @ design))
    return (coefficients**2 - error)[1:], unexplained


def _grouped(shares: FloatArray, names: Sequence[str]) -> FloatArray:
    labels = list(dict.fromkeys(names))
    place = [labels.index(n) for n in names]
    return np.asarray(np.clip(np.bincount(place, weights=shares, minlength=len(labels)), 0.0, 1.0))


def _resampled(x: FloatArray, y: FloatArray, names: Sequence[str], rng: np.random.Generator) -> FloatArray:
    picked = rng.integers(0, len(y), len(y))
    return _grouped(first_order(x[picked], y[picked]), names)


def _interval(shares: FloatArray, samples: FloatArray) -> tuple[FloatArray, FloatArray]:
    """share ∓ 1.645 standard errors: resampled rows repeat, which flatters every fit, so only their spread counts."""
    half = 1.645 * samples.std(axis=0)
    return np.maximum(shares - half, 0.0), np.minimum(shares + half, 1.0)
