"""Every command with every option given wrong: a message, exit code 2, nothing on stdout and nothing written."""

from __future__ import annotations

import shutil
from collections.abc import Iterator
from pathlib import Path

import click
import pytest

from gaitlab.cli.main import COMMANDS, cli
from tests.cli.commands import gaitlab
from tests.robot.documents import ROOT

CONTEXT = click.Context(cli)
WRONG_NUMBERS = ["nan", "inf", "-inf", "x", "", "1e999", "5 mm", "0x10", "1,5", "-1e300"]
WRONG_TEXTS = ["no-such-choice", "", "../..", "\x1b[31m"]


def command(name: str) -> click.Command:
    found = cli.get_command(CONTEXT, name)
    assert found is not None
    return found


def options(name: str) -> list[click.Option]:
    return [p for p in command(name).params if isinstance(p, click.Option) and not p.is_flag]


def wrong_values(option: click.Option) -> Iterator[str]:
    kind = option.type
    if isinstance(kind, click.Choice):
        yield from WRONG_TEXTS
    elif isinstance(kind, click.FloatRange | click.IntRange):
        yield from WRONG_NUMBERS
        if kind.min is not None:
            yield str(kind.min - 1)
        if kind.max is not None:
            yield str(kind.max + 1)
    elif isinstance(kind, type(click.INT) | type(click.FLOAT)):
        yield from WRONG_NUMBERS


CASES = [(name, option) for name in COMMANDS for option in options(name) if list(wrong_values(option))]


def needed(name: str) -> list[str]:
    """Arguments and required options of a command, filled with something that could be right."""
    filled: list[str] = []
    for param in command(name).params:
        if isinstance(param, click.Argument) and param.required:
            filled += ["robot.toml"] * max(1, param.nargs)
        elif isinstance(param, click.Option) and param.required:
            sample = param.type.choices[0] if isinstance(param.type, click.Choice) else "1"
            filled += [param.opts[0], str(sample)]
    return filled


@pytest.fixture
def here(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Iterator[Path]:
    """An own folder with one robot file in it; whatever a command leaves there shows at the end."""
    shutil.copy(ROOT / "robots" / "tray_row5.toml", tmp_path / "robot.toml")
    monkeypatch.chdir(tmp_path)
    yield tmp_path
    assert [p.name for p in tmp_path.iterdir()] == ["robot.toml"]


def assert_refused(*arguments: str) -> str:
    shown = gaitlab(*arguments)
    assert shown.code == 2, f"{arguments}: exit code {shown.code}\n{shown.out}\n{shown.err}"
    assert shown.out == ""
    assert "Error: " in shown.err and "Traceback" not in shown.err and "\x1b" not in shown.err
    return shown.err


@pytest.mark.parametrize(("name", "option"), CASES, ids=lambda x: x if isinstance(x, str) else x.opts[0])
def test_wrong_values_of_an_option_are_refused(here: Path, name: str, option: click.Option) -> None:
    given = needed(name)
    if option.opts[0] in given:
        at = given.index(option.opts[0])
        del given[at : at + 2]
    for value in wrong_values(option):
        assert_refused(name, *given, option.opts[0], value)


@pytest.mark.parametrize("name", COMMANDS)
def test_an_unknown_option_a_missing_value_and_too_many_arguments(here: Path, name: str) -> None:
    assert "No such option" in assert_refused(name, *needed(name), "--no-such-option")
    assert_refused(name, *needed(name), *["extra"] * 9)
    for option in options(name):
        assert_refused(name, *needed(name), option.opts[0])


@pytest.mark.parametrize("name", [n for n in COMMANDS if needed(n)])
def test_nothing_given_is_refused(here: Path, name: str) -> None:
    assert "Missing" in assert_refused(name)


# What only the command itself can judge: wirings, budgets, folders and files that do not fit.
MEANINGLESS = [
    ("walk", "robot.toml", "--wiring", "a=1"),
    ("walk", "robot.toml", "--wiring", "a=1 b=2 c=3 d=4 e=6"),
    ("walk", "robot.toml", "--wiring", "a=1 a=2 b=2 c=3 d=4 e=5"),
    ("walk", "robot.toml", "--wiring", "a=1 b=2 c=3 d=4 z=5"),
    ("walk", "robot.toml", "--wiring", "a=1 b=2 c=3 d=4 e=shut"),
    ("walk", "robot.toml", "--wiring", ""),
    ("walk", "none.toml", "--wiring", "a=1 b=2 c=3 d=4 e=5"),
    ("ring", "robot.toml", "--wiring", "a=1"),
    ("ring", "none.toml"),
    ("inverter", "robot.toml", "--stage", "6"),
    ("inverter", "none.toml"),
    ("bellows", "robot.toml", "--type", "none"),
    ("bellows", "none.toml"),
    ("search", "none.toml"),
    ("search", "robot.toml", "--resume"),
    ("search", "robot.toml", "--out", "robot.toml"),
    ("search", "robot.toml", "--out", "robot.toml/below"),
    ("search", "robot.toml", "--budget", "0"),
    ("compare", "robot.toml", "--wiring", "a=1"),
    ("compare", "none.toml", "--wiring", "a=1 b=2 c=3 d=4 e=5"),
    ("spread", "robot.toml", "--wiring", "a=1"),
    ("spread", "none.toml", "--wiring", "a=1 b=2 c=3 d=4 e=5"),
    ("supply", "robot.toml", "--wiring", "a=1"),
    ("supply", "none.toml"),
    ("check", "none.toml"),
    ("check", "."),
    ("sheet", "none"),
    ("sheet", "robot.toml"),
    ("page", "none"),
    ("page", "robot.toml"),
    ("match", "none.toml", "none.csv"),
    ("export", "none.toml"),
    ("new", "robot.toml"),
    ("new", "none/new.toml"),
    ("duct", "--square-mm", "0.5", "--length-mm", "10", "--from-kPa", "50", "--to-kPa", "-5"),
    ("duct", "--square-mm", "0.5", "--bore-mm", "1", "--length-mm", "10", "--from-kPa", "101", "--to-kPa", "50"),
    ("duct", "--square-mm", "0", "--length-mm", "10", "--from-kPa", "101", "--to-kPa", "50"),
    ("divider", "--dead-end-kPa", "50", "--reading-kPa", "60", "--free-flow-L-min", "9", "--curve", "mass"),
]


@pytest.mark.parametrize("arguments", MEANINGLESS, ids=" ".join)
def test_what_makes_no_sense_is_refused(here: Path, arguments: tuple[str, ...]) -> None:
    assert_refused(*arguments)


@pytest.mark.parametrize("name", ["check", "walk", "search", "compare", "spread"])
def test_an_even_ring_is_refused_by_all_that_need_it_to_swing(here: Path, name: str) -> None:
    robot = here / "robot.toml"
    text = robot.read_text(encoding="utf-8").replace("stages = 5", "stages = 4")
    robot.write_text(text + "\n[wiring]\ninlets_per_output_max = 2\n", encoding="utf-8")
    wiring = [] if name in ("check", "search") else ["--wiring", "a=1 b=2 c=3 d=4 e=4"]
    assert "an even ring latches" in assert_refused(name, "robot.toml", *wiring)
