"""Options and argument types that several commands share, so that one word means the same everywhere."""

from __future__ import annotations

import math
from collections.abc import Callable
from pathlib import Path
from typing import Any, TypeVar

import click

from gaitlab.robot.records import Robot
from gaitlab.wiring.wiring import Wiring, wiring_from_text

F = TypeVar("F", bound=Callable[..., Any])


class Number(click.FloatRange):
    """A finite number within bounds, in the unit that the option's name carries."""

    name = "number"

    def __init__(
        self,
        *,
        above: float | None = None,
        at_least: float | None = None,
        below: float | None = None,
        at_most: float | None = None,
    ) -> None:
        lowest, highest = (above if at_least is None else at_least), (below if at_most is None else at_most)
        super().__init__(lowest, highest, min_open=above is not None, max_open=below is not None)

    def convert(self, value: Any, param: click.Parameter | None, ctx: click.Context | None) -> float:
        """The number, or a usage error that says the rule (NaN and infinities compare with nothing, so they are told first)."""
        try:
            finite = math.isfinite(float(value))
        except (TypeError, ValueError, OverflowError):
            finite = True  # not a number at all: the range type says so
        if not finite:
            self.fail(f"must be a finite number, got {value!r}", param, ctx)
        return float(super().convert(value, param, ctx))


class WholeNumber(click.IntRange):
    """A whole number within bounds."""

    name = "whole number"


robot_argument = click.argument("robot_path", metavar="ROBOT", type=click.Path(path_type=Path))


def json_option(function: F) -> F:
    """Adds ``--json`` as the argument `as_json`."""
    return click.option("--json", "as_json", is_flag=True, help="Print one JSON object on stdout instead of tables.")(
        function
    )


def wiring_option(*, required: bool = False, multiple: bool = False) -> Callable[[F], F]:
    """Adds ``--wiring`` as the argument `wiring_text` (a tuple of texts, `wiring_texts`, where it may be repeated)."""
    return click.option(
        "--wiring",
        "wiring_texts" if multiple else "wiring_text",
        metavar='"a=1 b=3 …"',
        required=required,
        multiple=multiple,
        help="Which output feeds each inlet; open is atmosphere, held the supply."
        + (" Repeat it." if multiple else ""),
    )


def workers_option(function: F) -> F:
    """Adds ``--workers`` as the argument `workers`."""
    return click.option(
        "--workers", type=WholeNumber(1, 256), default=None, help="Processes to use; default: one per core."
    )(function)


def engine_option(function: F) -> F:
    """Adds ``--engine`` as the argument `engine`."""
    return click.option(
        "--engine",
        type=click.Choice(["pybullet", "mujoco"]),
        default="pybullet",
        show_default=True,
        help="Physics engine of the body; mujoco needs the extra second-engine.",
    )(function)


def seed_option(function: F) -> F:
    """Adds ``--seed`` as the argument `seed`."""
    return click.option(
        "--seed",
        type=WholeNumber(0, 2**31 - 1),
        default=1,
        show_default=True,
        help="Same seed on the same machine, same numbers.",
    )(function)


def out_option(what: str, *, required: bool = False) -> Callable[[F], F]:
    """Adds ``--out`` as the argument `out`; `what` says what is written there."""
    return click.option("--out", type=click.Path(path_type=Path), required=required, help=what)


def force_option(function: F) -> F:
    """Adds ``--force`` as the argument `force`."""
    return click.option("--force", is_flag=True, help="Replace what is already there.")(function)


def wiring_for(robot: Robot, text: str) -> Wiring:
    """The wiring a command line gives for this robot. Raises InputError."""
    return wiring_from_text(text, robot.inlets(), robot.ring.stages)
