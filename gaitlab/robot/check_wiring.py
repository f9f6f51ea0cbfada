"""Wiring limits of a robot file: tied and fixed inlets exist, agree with each other and with what outputs may feed."""

from __future__ import annotations

from collections import Counter

from gaitlab.robot.faults import Place, fail
from gaitlab.robot.hints import suggestion
from gaitlab.robot.records import Robot, WiringLimits


def check_wiring(robot: Robot) -> None:
    """Raises FaultError for limits that name unknown inlets or that no wiring can keep."""
    inlets = robot.inlets()
    _check_tied(robot.wiring, inlets)
    _check_fixed(robot, inlets)
    _check_room(robot, inlets)


def _check_tied(limits: WiringLimits, inlets: tuple[str, ...]) -> None:
    seen: set[str] = set()
    for index, group in enumerate(limits.tied):
        place: Place = ("wiring", "tied", index)
        if len(group) < 2:
            raise fail(place, "tie two inlets or more", list(group))
        for name in group:
            _check_inlet(name, inlets, place)
            if name in seen:
                raise fail(place, "hold every inlet once in all groups", name, "join the groups")
            seen.add(name)


def _check_fixed(robot: Robot, inlets: tuple[str, ...]) -> None:
    limits = robot.wiring
    for name, source in limits.fixed:
        place: Place = ("wiring", "fixed", name)
        _check_inlet(name, inlets, place)
        if isinstance(source, int) and not 1 <= source <= robot.ring.stages:
            raise fail(place, f"be an output 1 to {robot.ring.stages}, open or held", source)
        if isinstance(source, str) and source not in ("open", "held"):
            raise fail(place, f"be an output 1 to {robot.ring.stages}, open or held", source)
    fixed = dict(limits.fixed)
    for group in limits.tied:
        sources = {fixed[name] for name in group if name in fixed}
        if len(sources) > 1:
            raise fail(("wiring", "fixed"), "give tied inlets the same source", sorted(map(str, sources)))


def _check_room(robot: Robot, inlets: tuple[str, ...]) -> None:
    limits, stages = robot.wiring, robot.ring.stages
    fixed = dict(limits.fixed)
    for group in limits.tied:
        known = next((fixed[name] for name in group if name in fixed), None)
        fixed.update(dict.fromkeys(group, known) if known is not None else {})
    per_output = Counter(source for source in fixed.values() if isinstance(source, int))
    for source, count in per_output.items():
        if count > limits.inlets_per_output_max:
            rule = f"leave at most {limits.inlets_per_output_max} inlets (inlets_per_output_max) on output {source}"
            raise fail(("wiring", "fixed"), rule, count)
    most = max((len(group) for group in limits.tied), default=1)
    if most > limits.inlets_per_output_max and not (limits.allow_open or limits.allow_held):
        raise fail(
            ("wiring", "inlets_per_output_max"),
            f"be at least {most}, the largest tied group",
            limits.inlets_per_output_max,
        )
    free = sum(1 for name in inlets if name not in fixed)
    room = sum(max(0, limits.inlets_per_output_max - per_output.get(k, 0)) for k in range(1, stages + 1))
    if free > room and not (limits.allow_open or limits.allow_held):
        rule = f"be large enough for {len(inlets)} inlets on {stages} outputs"
        fix = "raise it, or allow_open = true"
        raise fail(("wiring", "inlets_per_output_max"), rule, limits.inlets_per_output_max, fix)
    _check_every_output(robot, inlets, fixed, per_output)


def _check_every_output(
    robot: Robot, inlets: tuple[str, ...], fixed: dict[str, int | str], per_output: Counter[int]
) -> None:
    limits, stages = robot.wiring, robot.ring.stages
    tied = [group for group in limits.tied if not any(name in fixed for name in group)]
    sources_left = sum(1 for name in inlets if name not in fixed) - sum(len(group) - 1 for group in tied)
    outputs_left = sum(1 for k in range(1, stages + 1) if not per_output.get(k, 0))
    if limits.every_output_used and sources_left < outputs_left:
        rule = f"be false where {stages} outputs outnumber the inlets that can feed from them"
        raise fail(("wiring", "every_output_used"), rule, True, "add every_output_used = false to [wiring]")


def _check_inlet(name: str, inlets: tuple[str, ...], place: Place) -> None:
    if name not in inlets:
        raise fail(place, "name inlets of this file", name, suggestion(name, inlets))
