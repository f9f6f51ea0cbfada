"""The wiring limits of a robot file as counting rules, with the refusals that leave nothing to search."""

from __future__ import annotations

from gaitlab.errors import InputError, must
from gaitlab.robot.records import Robot
from gaitlab.wiring.constraints import Constraints
from gaitlab.wiring.counting import Rules, count
from gaitlab.wiring.wiring import HELD, OPEN, Source


def source_number(source: Source, stages: int) -> int:
    """An output by its number, atmosphere as N + 1, supply as N + 2."""
    if isinstance(source, int):
        return source
    return stages + 1 if source == OPEN else stages + 2


def source_of(number: int, stages: int) -> Source:
    """The source that `source_number` numbered."""
    if number <= stages:
        return number
    return OPEN if number == stages + 1 else HELD


def still_numbers(robot: Robot) -> tuple[int, ...]:
    """The numbers of the sources beside the outputs that the limits allow."""
    stages, limits = robot.ring.stages, robot.wiring
    return tuple(n for n, allowed in ((stages + 1, limits.allow_open), (stages + 2, limits.allow_held)) if allowed)


def rules_of(robot: Robot) -> Rules:
    """What an output may carry by the robot's limits. Raises InputError for an even ring."""
    stages, limits = robot.ring.stages, robot.wiring
    if stages % 2 == 0:
        raise InputError(
            must("ring.stages", "odd to be searched (an even ring latches)", stages, "add or drop a stage")
        )
    return Rules(stages, limits.inlets_per_output_max, limits.every_output_used, still_numbers(robot))


def constraints_of(robot: Robot) -> Constraints:
    """Tied and fixed inlets of the robot (the reader has made sure that they exist)."""
    stages = robot.ring.stages
    position = {inlet: i for i, inlet in enumerate(robot.inlets())}
    ties = tuple(tuple(position[inlet] for inlet in tie) for tie in robot.wiring.tied if tie)
    fixed = tuple((position[inlet], source_number(source, stages)) for inlet, source in robot.wiring.fixed)
    return Constraints.of(len(position), stages, ties, fixed)


def refuse_nothing(constraints: Constraints, rules: Rules) -> None:
    """Raises InputError, with the numbers that clash, when no wiring keeps the limits."""
    if count(constraints, rules) > 0:
        return
    decided = constraints.decided()
    if decided is None:
        raise InputError(must("wiring.fixed", "the same source for inlets tied together", dict(constraints.fixed)))
    on_outputs = sum(source <= rules.stages for _, source in constraints.fixed)
    room = rules.stages * rules.per_output_max
    if on_outputs > room:
        raise InputError(
            must(
                "wiring.fixed",
                f"at most {room} inlets on outputs ({_room_text(rules)})",
                on_outputs,
                "fix fewer inlets",
            )
        )
    raise InputError(
        must("wiring", _rule_text(rules), f"{constraints.inlets} inlets, {_groups_text(constraints)}", _fix(rules))
    )


def _room_text(rules: Rules) -> str:
    return f"{rules.stages} outputs of {rules.per_output_max} each"


def _rule_text(rules: Rules) -> str:
    used = ", each output used" if rules.every_output_used else ""
    still = ", no inlet on open or held" if not rules.still else ""
    return f"limits that leave at least one wiring ({_room_text(rules)}{used}{still})"


def _groups_text(constraints: Constraints) -> str:
    groups, decided = constraints.groups(), constraints.decided() or {}
    largest = max((len(group) for group in groups), default=0)
    return f"{len(groups)} groups (largest of {largest}), {len(decided)} of them fixed"


def _fix(rules: Rules) -> str:
    unused = ", set every_output_used = false" if rules.every_output_used else ""
    still = ", set allow_open = true" if not rules.still else ""
    return "raise inlets_per_output_max" + unused + still
