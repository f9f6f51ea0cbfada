"""How a walk can end: each outcome has a name and, where it failed, a remedy for the bench."""

from __future__ import annotations

WALKED = "walked"
FELL_OVER = "fell_over"
DIVERGED = "diverged"
DRAGGING = "dragging"
LOST_CONTACT = "lost_contact"
NEVER_SETTLED = "never_settled"

REMEDIES: dict[str, str] = {
    WALKED: "",
    FELL_OVER: "widen the stance, lower the payload, or use a wiring that keeps more legs on the ground",
    DIVERGED: "halve the step, raise inertia_factor, or lengthen the damping times: the numbers ran away, not the robot",
    DRAGGING: "a block rubs on the floor: stiffen or lengthen the legs, or take weight off",
    LOST_CONTACT: "no foot carries weight for much of the period: lower the stiffness or the vacuum, or add mass",
    NEVER_SETTLED: "the travel changes from period to period: raise periods_max, or stiffen the legs against buckling",
}


def remedy_of(outcome: str) -> str:
    """What usually helps against `outcome` (empty for a walk that walked). Raises KeyError for an unknown name."""
    return REMEDIES[outcome]
