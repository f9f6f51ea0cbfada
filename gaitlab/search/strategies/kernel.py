"""How alike two wirings are: the kernel of a Gaussian process over wirings.

k(w, w′) = exp(−a (1 − s)), s the weighted mean over pairs of inlets of cos(Δ − Δ′), Δ being the phase difference of the pair. It sees
phase differences only, so that turning the ring changes nothing. A pair weighs the inverse square of its distance on the body,
because legs near each other share the load and get into each other's way. With a mirror-symmetric body k is averaged over both
images of a wiring.
"""

from __future__ import annotations

from collections.abc import Sequence
from itertools import combinations

import numpy as np
from numpy.typing import NDArray

from gaitlab.wiring.smooth import ideal_phase
from gaitlab.wiring.space import WiringSpace
from gaitlab.wiring.wiring import Wiring

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.intp]

# a of exp(−a (1 − s)) and the weights' power: where walks of one seven-leg body are most likely and most is found; kept for all.
SHARPNESS = 1.0
POWER = 2
KINDS = 3  # on an output, on atmosphere, on the supply


class WiringKernel:
    """Similarities between the wirings of one space, from the phases of an ideal ring."""

    def __init__(self, space: WiringSpace, sharpness: float = SHARPNESS) -> None:
        self._space, self._sharpness = space, sharpness
        self._first, self._second = pairs_of(len(space.inlets))
        self._share = np.sqrt(pair_weights(np.array(space.places)))

    def features(self, wirings: Sequence[Wiring]) -> FloatArray:
        """Rows whose products are s; shape (images, wirings, values), one image or, with a mirror, two."""
        numbers = np.array([self._space.numbers(w) for w in wirings], dtype=int).reshape(len(wirings), -1)
        if self._space.mirror is None:
            return self._rows(numbers)[None]
        return np.stack([self._rows(numbers), self._rows(numbers[:, np.asarray(self._space.mirror)])])

    def between(self, one: FloatArray, other: FloatArray) -> FloatArray:
        """Kernel values, shape (wirings of one, wirings of other); 1 between a wiring and itself, its turns and its mirror image."""
        values = sum(self._values(one[0] @ image.T) for image in other)
        return np.asarray(values / np.sqrt(np.outer(self._with_images(one), self._with_images(other))))

    def _with_images(self, features: FloatArray) -> FloatArray:
        """Similarity of each wiring to itself and its images together."""
        return np.asarray(sum(self._values(np.sum(features[0] * image, axis=-1)) for image in features))

    def _values(self, alike: FloatArray) -> FloatArray:
        return np.asarray(np.exp(self._sharpness * (alike - 1.0)))

    def _rows(self, numbers: IntArray) -> FloatArray:
        """For each pair e^{i Δ} where both are on outputs, else which kinds of source the two are on; weighted by √share.

        The product of two such rows is the weighted sum of cos(Δ − Δ′), of 1 for pairs of the same still kinds, of 0 for others.
        """
        stages = self._space.stages
        kind = np.maximum(numbers - stages, 0)
        phase = np.array([0.0] + [ideal_phase(k, stages) for k in range(1, stages + 1)] + [0.0, 0.0])[numbers]
        turn = np.exp(2j * np.pi * (phase[:, self._first] - phase[:, self._second]))
        kinds = KINDS * kind[:, self._first] + kind[:, self._second]
        turn = np.where(kinds == 0, turn, 0.0) * self._share
        still = range(1, KINDS**2) if self._may_be_still else ()
        return np.concatenate(
            [turn.real, turn.imag, *(np.where(kinds == code, self._share, 0.0) for code in still)], axis=1
        )

    @property
    def _may_be_still(self) -> bool:
        return bool(self._space.rules.still) or any(s > self._space.stages for _, s in self._space.constraints.fixed)


def pairs_of(number: int) -> tuple[IntArray, IntArray]:
    """First and second members of all pairs of so many things."""
    first, second = np.array(list(combinations(range(number), 2)), dtype=int).reshape(-1, 2).T
    return first, second


def pair_weights(places: FloatArray) -> FloatArray:
    """Share of each pair of places (n, 2), ∝ 1/distance²; distances below the smallest one between different places count as that."""
    first, second = pairs_of(len(places))
    distance = np.hypot(*(places[first] - places[second]).T)
    apart = distance[distance > 0.0]
    weights = np.maximum(distance, np.min(apart) if len(apart) else 1.0) ** -float(POWER)
    return np.asarray(weights / np.sum(weights))
