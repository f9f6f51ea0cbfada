"""Draws of a robot's numbers within their tolerances: scrambled Sobol points, the same for every wiring compared."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy.special import ndtr, ndtri
from scipy.stats import qmc

from gaitlab.errors import InputError, must
from gaitlab.robot.faults import Place
from gaitlab.robot.fields import Key
from gaitlab.robot.paths import value_at
from gaitlab.robot.reader import robot_from_document
from gaitlab.robot.records import Tolerance
from gaitlab.trust.places import Document, dotted, key_of, with_value
from gaitlab.trust.tolerances import Tolerances

FloatArray = NDArray[np.float64]

BLOCK = 64  # points made at a time, so that memory does not grow with the number of draws
EDGE = 2.0**-40  # keeps a point off 0 and 1, where a normal draw would be infinite
EXCLUSIVE = 1e-9  # relative distance a truncated draw keeps from a bound that it may not touch


@dataclass(frozen=True)
class Draw:
    """One build of the robot: its number from 0, its point in the unit cube (D,), and the document with its numbers."""

    number: int
    point: FloatArray
    document: Document


def sobol_points(count: int, dimensions: int, *, seed: int) -> Iterator[FloatArray]:
    """`count` scrambled Sobol points (`dimensions`,) in the open unit cube, one after the other; equal seeds, equal points.

    Balance is best where `count` is a power of two (Owen 1998; Sobol 1967). Without dimensions the points are empty.
    Raises InputError for a count below 1 or a seed that is no whole number from 0.
    """
    if isinstance(count, bool) or not isinstance(count, int) or count < 1:
        raise InputError(must("draws", "a whole number of at least 1", count, "64 is a fair start"))
    if isinstance(seed, bool) or not isinstance(seed, int) or seed < 0:
        raise InputError(must("seed", "a whole number of at least 0", seed))
    return _blocks(count, dimensions, seed)


def _blocks(count: int, dimensions: int, seed: int) -> Iterator[FloatArray]:
    sampler = qmc.Sobol(max(dimensions, 1), scramble=True, seed=np.random.default_rng(seed))
    for start in range(0, count, BLOCK):
        block = np.clip(sampler.random(BLOCK), EDGE, 1 - EDGE)[:, :dimensions]
        yield from block[: count - start]


def draws(tolerances: Tolerances, count: int, *, seed: int) -> Iterator[Draw]:
    """`count` builds of the robot, made one at a time.

    Raises InputError, naming draw and key, for a number that leaves its key's bounds (`truncate = true` in the
    tolerance cuts the distribution there instead) and for a build that the robot reader refuses.
    """
    for number, point in enumerate(sobol_points(count, len(tolerances.coordinates), seed=seed)):
        yield Draw(number, point, drawn_document(tolerances, point, number=number))


def checked_draws(tolerances: Tolerances, count: int, *, seed: int) -> Iterator[Draw]:
    """As `draws`, and every build is read once, so that one that cannot be is refused by its number before any run."""
    for draw in draws(tolerances, count, seed=seed):
        try:
            robot_from_document(draw.document, source=f"draw {draw.number}")
        except InputError as error:
            raise InputError(f"draw {draw.number} of the tolerances gives no robot: {error}") from error
        yield draw


def drawn_document(tolerances: Tolerances, point: FloatArray, *, number: int) -> Document:
    """The document of the build at `point` (D,) of the unit cube."""
    document = tolerances.document
    for coordinate, u in zip(tolerances.coordinates, point, strict=True):
        for place in coordinate.places:
            document = with_value(document, place, _drawn(document, coordinate.tolerance, place, float(u), number))
    return {key: value for key, value in document.items() if key != "tolerance"}


def _drawn(document: Document, tolerance: Tolerance, place: Place, u: float, number: int) -> Any:
    """The number at `place`, or its whole list times one drawn factor, within the key's bounds."""
    nominal, key = value_at(document, place), key_of(place)
    whole = isinstance(nominal, list)
    middle = 1.0 if whole else float(nominal)
    if tolerance.truncate:
        low, high = _bounds(key)
        u = _truncated(tolerance, middle, u, *(_factor_bounds(nominal, low, high) if whole else (low, high)))
    value = drawn_value(tolerance, middle, u)
    values = [value * x for x in nominal] if whole else [value]
    for one in values:
        if key is not None and _breaks(key, one):
            fix = "a smaller tolerance, or truncate = true in its [[tolerance]]"
            raise InputError(must(f"draw {number}: {dotted(document, place)}", key.rule(), round(one, 9), fix))
    return values if whole else value


def _factor_bounds(values: Sequence[float], low: float, high: float) -> tuple[float, float]:
    """Between which factors every one of `values` stays from `low` to `high`; a value of 0 bounds nothing.

    >>> _factor_bounds([0.0, 10.0, 40.0], 0.0, 60.0)
    (0.0, 1.5)
    """
    pairs = [sorted((low / x, high / x)) for x in values if x]
    return max((p[0] for p in pairs), default=-math.inf), min((p[1] for p in pairs), default=math.inf)


def drawn_value(tolerance: Tolerance, nominal: float, u: float) -> float:
    """The number at quantile `u` of a tolerance about `nominal` (file's unit).

    uniform: nominal ± half; normal: half is two standard deviations; lognormal: ln(1 + half/nominal) is two.

    >>> drawn_value(Tolerance("x", percent=10.0), 50.0, 1.0)
    55.0
    """
    half = half_width(tolerance, nominal)
    if half == 0.0:
        return nominal
    if tolerance.kind == "uniform":
        return nominal + half * (2 * u - 1)
    z = float(ndtri(u))
    if tolerance.kind == "normal":
        return nominal + half / 2 * z
    return nominal * math.exp(math.log1p(half / nominal) / 2 * z)


def quantile_of(tolerance: Tolerance, nominal: float, value: float) -> float:
    """The quantile `u` in [0, 1] at which a tolerance about `nominal` reaches `value`: the inverse of `drawn_value`."""
    half = half_width(tolerance, nominal)
    if half == 0.0:
        return 0.0 if value < nominal else 1.0
    if tolerance.kind == "uniform":
        return min(max((value - nominal) / half / 2 + 0.5, 0.0), 1.0)
    if tolerance.kind == "normal":
        return float(ndtr((value - nominal) / (half / 2)))
    return float(ndtr(math.log(value / nominal) / (math.log1p(half / nominal) / 2))) if value > 0 else 0.0


def half_width(tolerance: Tolerance, nominal: float) -> float:
    """Half the width of a tolerance about `nominal`, in the file's unit."""
    if tolerance.plus_minus is not None:
        return tolerance.plus_minus
    return abs(nominal) * (tolerance.percent or 0.0) / 100.0


def _truncated(tolerance: Tolerance, nominal: float, u: float, low: float, high: float) -> float:
    """`u` moved into the part of the distribution between the bounds (the truncated distribution, not a pile at the bound)."""
    below = quantile_of(tolerance, nominal, low) if math.isfinite(low) else 0.0
    above = quantile_of(tolerance, nominal, high) if math.isfinite(high) else 1.0
    return below + u * (above - below)


def _bounds(key: Key | None) -> tuple[float, float]:
    if key is None:
        return -math.inf, math.inf
    low = [b for b in (key.at_least, _inside(key.above, 1)) if b is not None]
    high = [b for b in (key.at_most, _inside(key.below, -1)) if b is not None]
    return max(low, default=-math.inf), min(high, default=math.inf)


def _inside(bound: float | None, sign: int) -> float | None:
    return None if bound is None else bound + sign * EXCLUSIVE * max(abs(bound), 1.0)


def _breaks(key: Key, value: float) -> bool:
    return (
        (key.above is not None and value <= key.above)
        or (key.at_least is not None and value < key.at_least)
        or (key.below is not None and value >= key.below)
        or (key.at_most is not None and value > key.at_most)
    )
