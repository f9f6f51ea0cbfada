"""Friction that depends on the direction of sliding, as bristle feet have it, in a form that any engine can take."""

from __future__ import annotations

import math
from collections.abc import Sequence


def bristle_friction(friction: tuple[float, float, float], sliding: Sequence[float], forward: Sequence[float]) -> float:
    """Friction coefficient of a foot that slides, or would slide, along `sliding`; only the ground plane's x and y count.

    1/μ² = cos²φ/μ_x² + sin²φ/μ_y², φ from the foot's forward axis, μ_x the forward or backward value by the sign of
    cos φ: an ellipse of two halves, smooth at the sides. `sliding` is taken from the friction force that holds the foot,
    turned round: a resting foot then keeps the limit of the way it is pushed, and there is no creep near zero speed. When
    the force turns over it passes through zero, where the limit does not matter.
    """
    ahead, back, side = friction
    size = math.hypot(sliding[0], sliding[1]) * math.hypot(forward[0], forward[1])
    if size == 0.0:
        return min(friction)
    cosine = (sliding[0] * forward[0] + sliding[1] * forward[1]) / size
    along = ahead if cosine >= 0 else back
    return 1.0 / math.sqrt(cosine**2 / along**2 + (1.0 - min(cosine**2, 1.0)) / side**2)
