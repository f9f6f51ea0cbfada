"""How alike two wirings are: the kernel of a Gaussian process over wirings.

k(w, w′) = exp(−4 (1 − s)), s the mean over pairs of legs of cos(Δ − Δ′), Δ being the phase difference of the pair. It sees phase
differences only, so that turning the ring changes nothing; with a mirror-symmetric body k is averaged over both images of a wiring.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from gaitlab.wiring.smooth import ideal_phase
from gaitlab.wiring.space import WiringSpace
from gaitlab.wiring.wiring import Wiring

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

SHARPNESS = 4.0  # of exp(−4 (1 − s)); found on one seven-leg body by trial, kept for all others


class WiringKernel:
    """Similarities between the wirings of one space, from the phases of an ideal ring."""

    def __init__(self, space: WiringSpace, sharpness: float = SHARPNESS) -> None:
        self._space, self._sharpness = space, sharpness

    def features(self, wirings: Sequence[Wiring]) -> ComplexArray:
        """One row per wiring: e^{2πi·phase} of each inlet on an output (0 for others), then 1 where it is open, then where held.

        Shape (wirings, 3 · inlets).
        """
        stages = self._space.stages
        table = np.zeros((stages + 3, 3), dtype=complex)
        table[1 : stages + 1, 0] = np.exp(2j * np.pi * np.array([ideal_phase(k, stages) for k in range(1, stages + 1)]))
        table[stages + 1, 1] = table[stages + 2, 2] = 1.0
        numbers = np.array([self._space.numbers(wiring) for wiring in wirings], dtype=int).reshape(len(wirings), -1)
        return np.asarray(table[numbers].transpose(0, 2, 1).reshape(len(wirings), -1))

    def between(self, one: ComplexArray, other: ComplexArray) -> FloatArray:
        """Kernel values, shape (rows of one, rows of other); 1 between a wiring and itself, its turns and its mirror image."""
        values = self._values(one, other)
        if self._space.mirror is None:
            return values
        crossed = self._values(one, other[:, self._mirrored])
        return (values + crossed) / np.sqrt(np.outer(self._with_image(one), self._with_image(other)))

    def _with_image(self, features: ComplexArray) -> FloatArray:
        """Similarity of each wiring to itself and its mirror image together."""
        image = features[:, self._mirrored]
        return 1.0 + np.exp(self._sharpness * (self._pair_mean(features[:, None, :], image[:, :, None])[:, 0, 0] - 1.0))

    @property
    def _mirrored(self) -> NDArray[np.intp]:
        order = np.asarray(self._space.mirror)
        inlets = len(order)
        return np.concatenate([order, order + inlets, order + 2 * inlets])

    def _values(self, one: ComplexArray, other: ComplexArray) -> FloatArray:
        return np.exp(self._sharpness * (self._pair_mean(one, other.T) - 1.0))

    def _pair_mean(self, one: ComplexArray, other: ComplexArray) -> FloatArray:
        """Mean over pairs of inlets of the cosine of their difference of differences.

        With z the rotations of inlets on outputs in both wirings and m, q the numbers of inlets alike on outputs and alike still:
        Σ_{i≠j} = |Σ z|² + q² + 2 m q − m − q. A pair that is on an output in one wiring only counts as 0.
        """
        inlets = one.shape[-1] // 3
        turning = one[..., :inlets] @ np.conj(other[..., :inlets, :])
        moving = np.abs(one[..., :inlets]) @ np.abs(other[..., :inlets, :])
        still = (one[..., inlets:] @ np.conj(other[..., inlets:, :])).real
        pairs = np.abs(turning) ** 2 + still**2 + 2.0 * moving * still - moving - still
        if inlets < 2:
            return np.ones_like(pairs)
        return np.asarray(pairs / (inlets * (inlets - 1)), dtype=float)
