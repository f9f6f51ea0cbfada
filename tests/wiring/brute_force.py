"""Counts wirings by writing every one of them down: the independent route that closed forms are held against."""

from __future__ import annotations

from itertools import product

from gaitlab.robot.records import Robot
from gaitlab.wiring.wiring import HELD, OPEN, Source


def allowed(robot: Robot) -> set[tuple[Source, ...]]:
    """Every wiring that the robot's limits allow, tested rule by rule on all of sources ^ inlets."""
    limits, inlets = robot.wiring, robot.inlets()
    outputs: list[Source] = list(range(1, robot.ring.stages + 1))
    fixed = dict(limits.fixed)
    still = [s for s, ok in ((OPEN, limits.allow_open), (HELD, limits.allow_held)) if ok]
    tied_to_fixed = {i for tie in limits.tied if any(j in fixed for j in tie) for i in tie} | set(fixed)
    found = set()
    for sources in product([*outputs, OPEN, HELD], repeat=len(inlets)):
        wired = dict(zip(inlets, sources, strict=True))
        if any(wired[i] != s for i, s in fixed.items()):
            continue
        if any(len({wired[i] for i in tie}) > 1 for tie in limits.tied):
            continue
        if any(s in (OPEN, HELD) and s not in still and i not in tied_to_fixed for i, s in wired.items()):
            continue
        loads = [sources.count(output) for output in outputs]
        if max(loads) <= limits.inlets_per_output_max and (min(loads) > 0 or not limits.every_output_used):
            found.add(sources)
    return found


def images(
    sources: tuple[Source, ...], stages: int, turns: bool, mirror: tuple[int, ...] | None
) -> set[tuple[Source, ...]]:
    """Everything that turns and mirror make of one wiring."""
    seen = {sources}
    if mirror is not None:
        seen.add(tuple(sources[i] for i in mirror))
    steps = range(stages) if turns else range(1)
    return {
        tuple((s - 1 + k) % stages + 1 if isinstance(s, int) else s for s in image) for image in seen for k in steps
    }


def classes(robot: Robot, turns: bool, mirror: tuple[int, ...] | None) -> list[set[tuple[Source, ...]]]:
    """The allowed wirings sorted into sets of equals."""
    left, found = allowed(robot), []
    while left:
        equals = images(min(left, key=str), robot.ring.stages, turns, mirror) & left
        found.append(equals)
        left -= equals
    return found
