"""The shell of the command line: help, versions, exit codes, and short errors without --debug."""

from __future__ import annotations

import importlib
import os
import subprocess
import sys
from pathlib import Path

import click
import pytest

from gaitlab.cli.main import COMMANDS, cli, versions
from gaitlab.errors import InputError
from tests.cli.commands import gaitlab
from tests.robot.documents import ROBOTS

COMMAND_FOLDER = Path(__file__).resolve().parents[2] / "gaitlab" / "cli"


def test_help_lists_every_command_and_the_exit_codes() -> None:
    shown = gaitlab("--help")
    assert shown.code == 0
    assert all(f"\n  {name} " in shown.out for name in COMMANDS)
    assert "_GAITLAB_COMPLETE=bash_source" in shown.out
    assert "2 bad input" in shown.out


def test_every_command_module_is_registered_and_takes_json_and_debug() -> None:
    files = {path.name.removesuffix("_command.py") for path in COMMAND_FOLDER.glob("*_command.py")}
    assert files == set(COMMANDS)
    context = click.Context(cli)
    for name in COMMANDS:
        command = cli.get_command(context, name)
        assert command is not None
        assert {"as_json", "debug"} <= {param.name for param in command.params}


@pytest.mark.parametrize("name", COMMANDS)
def test_help_of_each_command_says_how_to_use_it(name: str) -> None:
    shown = gaitlab(name, "--help")
    assert shown.code == 0
    assert shown.out.count(f"gaitlab {name} ") >= 2, "one usage line and an example to copy"


def test_versions_name_every_engine() -> None:
    shown = gaitlab("--version")
    assert shown.code == 0
    assert [line.split()[0] for line in shown.out.splitlines()][:5] == [
        "gaitlab",
        "python",
        "numpy",
        "scipy",
        "pybullet",
    ]
    assert shown.out.splitlines() == [f"{name} {version}" for name, version in versions().items()]


def test_versions_say_what_is_not_installed(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("gaitlab.cli.main.VERSIONED", ("no-such-library",))
    assert versions()["no-such-library"] == "not installed"


def test_a_misspelt_command_is_answered_with_a_close_one() -> None:
    shown = gaitlab("chek")
    assert shown.code == 2
    assert "Did you mean check?" in shown.err
    assert gaitlab("qqqq").err.strip().endswith("No such command 'qqqq'. See gaitlab --help.")


def raising(error: BaseException) -> click.Command:
    def run() -> None:
        raise error

    return click.Command("check", callback=run)


@pytest.mark.parametrize(
    ("error", "code", "text"),
    [
        (InputError("length_mm must be above 0"), 2, "Error: length_mm must be above 0\n"),
        (ZeroDivisionError("division"), 3, "Error: a fault in gaitlab itself (ZeroDivisionError: division)"),
        (MemoryError(), 3, "a fault in gaitlab itself (MemoryError: )"),
    ],
)
def test_errors_are_short_and_debug_shows_the_traceback(
    monkeypatch: pytest.MonkeyPatch, error: Exception, code: int, text: str
) -> None:
    module = importlib.import_module("gaitlab.cli.check_command")
    monkeypatch.setattr(module, "command", raising(error))
    shown = gaitlab("check")
    assert (shown.code, shown.out) == (code, "")
    assert shown.err.startswith("Error: ") and text in shown.err
    assert "Traceback" not in shown.err
    from click.testing import CliRunner

    for arguments in (["check", "--debug"], ["--debug", "check"]):
        assert CliRunner().invoke(cli, arguments).exception is error


def test_as_a_process_it_prints_no_traceback_and_exits_2(tmp_path: Path) -> None:
    run = [sys.executable, "-m", "gaitlab", "check", str(tmp_path / "none.toml")]
    done = subprocess.run(run, capture_output=True, text=True, cwd=COMMAND_FOLDER.parents[1])
    assert done.returncode == 2
    assert done.stdout == ""
    assert len(done.stderr.splitlines()) == 1
    loud = subprocess.run([*run, "--debug"], capture_output=True, text=True, cwd=COMMAND_FOLDER.parents[1])
    assert "Traceback" in loud.stderr


@pytest.mark.parametrize("path", ROBOTS, ids=lambda p: p.stem)
def test_every_robot_that_ships_passes_check(path: Path) -> None:
    shown = gaitlab("check", str(path))
    assert shown.code == 0
    assert "distinct" in shown.out


def test_ctrl_c_exits_130_without_a_traceback(monkeypatch: pytest.MonkeyPatch) -> None:
    module = importlib.import_module("gaitlab.cli.check_command")
    monkeypatch.setattr(module, "command", raising(KeyboardInterrupt()))
    shown = gaitlab("check")
    assert (shown.code, shown.out, shown.err) == (130, "", "interrupted\n")


def test_shell_completion_offers_commands_and_options() -> None:
    def offered(words: str, position: int) -> list[str]:
        environment = {
            **os.environ,
            "_GAITLAB_COMPLETE": "bash_complete",
            "COMP_WORDS": words,
            "COMP_CWORD": str(position),
        }
        run = [sys.executable, "-m", "gaitlab"]
        done = subprocess.run(run, capture_output=True, text=True, cwd=COMMAND_FOLDER.parents[1], env=environment)
        return [line.split(",")[1] for line in done.stdout.splitlines()]

    assert offered("gaitlab che", 1) == ["check"]
    assert {"--legs", "--json", "--debug"} <= set(offered("gaitlab new --", 2))
