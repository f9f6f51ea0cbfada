"""The command line: finds commands by name, turns bad input into exit code 2, and keeps tracebacks for --debug."""

from __future__ import annotations

import importlib
import os
import platform
from importlib import metadata
from typing import Any

import click

from gaitlab import __version__
from gaitlab.errors import GaitlabError

# One module per command, gaitlab/cli/<name>_command.py, imported only when its command is asked for.
COMMANDS = {
    "check": "Read a robot file and say what it will be.",
    "search": "Find the wiring that walks best.",
    "duct": "Flow through one channel or tube.",
    "bellows": "Bend or stroke, force and volume of bellows against vacuum.",
    "divider": "A gauge reading on the bench becomes a resistance.",
    "valve": "A measured valve becomes the valve table of a robot file.",
    "inverter": "Curve, levels and margins of one stage.",
    "ring": "Does the ring start, and what does it put out.",
    "supply": "Air budget, pump choice, strokes of a syringe.",
    "new": "Write a commented starter robot file.",
    "walk": "Walk one wiring and measure it.",
    "compare": "Wirings side by side, each with its reversed wave.",
    "spread": "What wirings do over the build tolerances.",
    "match": "Measured pressure traces become as-built parts and a diagnosis.",
    "sheet": "One A4 page for the bench from a saved run.",
    "page": "One self-contained HTML page from a saved run.",
    "draw": "The pictures and films of a saved run.",
    "export": "The body as URDF, a walk as CSV.",
}

EXIT_BAD_INPUT = 2
EXIT_INTERNAL = 3
EXIT_INTERRUPTED = 130

VERSIONED = ("numpy", "scipy", "pybullet", "matplotlib", "click", "mujoco", "distributed", "jinja2")

EPILOG = """\b
Shell completion (bash; zsh and fish alike):
  eval "$(_GAITLAB_COMPLETE=bash_source gaitlab)"

\b
Exit codes: 0 done, 1 a run failed (its outcome is named), 2 bad input,
3 a fault in gaitlab itself, 130 interrupted.
"""


class BadInput(click.ClickException):
    """Bad input as click shows it: one message on stderr, exit code 2."""

    exit_code = EXIT_BAD_INPUT


class InternalFault(click.ClickException):
    """A fault in gaitlab itself, without its traceback."""

    exit_code = EXIT_INTERNAL


class LazyGroup(click.Group):
    """A group whose commands are imported when they are asked for; keeps errors short unless --debug is given."""

    def list_commands(self, ctx: click.Context) -> list[str]:
        """Names of all commands, in the order of `COMMANDS`."""
        return list(COMMANDS)

    def get_command(self, ctx: click.Context, cmd_name: str) -> click.Command | None:
        """The command of that name, with --debug added; None when there is none."""
        if cmd_name not in COMMANDS:
            return None
        command: click.Command = importlib.import_module(f"gaitlab.cli.{cmd_name}_command").command
        if not any(param.name == "debug" for param in command.params):
            command.params.append(_debug_option())
        return command

    def resolve_command(
        self, ctx: click.Context, args: list[str]
    ) -> tuple[str | None, click.Command | None, list[str]]:
        """As click does, with close names in the message for an unknown command."""
        import difflib

        if args and args[0] not in COMMANDS and not args[0].startswith("-"):
            close = difflib.get_close_matches(args[0], COMMANDS, n=2)
            hint = f" Did you mean {' or '.join(close)}?" if close else " See gaitlab --help."
            raise click.UsageError(f"No such command {args[0]!r}.{hint}", ctx)
        return super().resolve_command(ctx, args)

    def format_commands(self, ctx: click.Context, formatter: click.HelpFormatter) -> None:
        """Lists the commands without importing any of them."""
        with formatter.section("Commands"):
            formatter.write_dl(list(COMMANDS.items()))

    def invoke(self, ctx: click.Context) -> Any:
        """Runs a command; what it raises becomes a short message and an exit code."""
        try:
            return super().invoke(ctx)
        except (click.ClickException, click.exceptions.Exit, click.Abort):
            raise
        except GaitlabError as error:
            if ctx.meta.get("debug"):
                raise
            raise BadInput(str(error)) from error
        except KeyboardInterrupt:
            click.echo("interrupted", err=True)
            raise click.exceptions.Exit(EXIT_INTERRUPTED) from None
        except BrokenPipeError:
            raise
        except Exception as error:
            if ctx.meta.get("debug"):
                raise
            raise InternalFault(_internal_text(error)) from error


def _internal_text(error: Exception) -> str:
    first = (str(error).splitlines() or [""])[0][:200]
    return f"a fault in gaitlab itself ({type(error).__name__}: {first}); run it again with --debug and report what it prints"


def _set_debug(ctx: click.Context, param: click.Parameter, value: bool) -> None:
    if value:
        ctx.meta["debug"] = True


def _debug_option() -> click.Option:
    return click.Option(
        ["--debug"],
        is_flag=True,
        expose_value=False,
        is_eager=True,
        callback=_set_debug,
        help="Show a full traceback on an error.",
    )


def _print_versions(ctx: click.Context, param: click.Parameter, value: bool) -> None:
    if not value or ctx.resilient_parsing:
        return
    for name, version in versions().items():
        click.echo(f"{name} {version}")
    ctx.exit()


def versions() -> dict[str, str]:
    """Versions of gaitlab, Python and every engine and library a result may depend on; those not installed say so."""
    found = {"gaitlab": __version__, "python": platform.python_version()}
    for name in VERSIONED:
        try:
            found[name] = metadata.version(name)
        except metadata.PackageNotFoundError:
            found[name] = "not installed"
    return found


@click.group(cls=LazyGroup, context_settings={"help_option_names": ["-h", "--help"]}, epilog=EPILOG)
@click.option(
    "--version", is_flag=True, expose_value=False, is_eager=True, callback=_print_versions, help="Print all versions."
)
def cli() -> None:
    """Choose the wiring of an air-driven walking robot before anything is cast.

    A robot file (TOML) says everything about one robot, its pneumatic ring and its ground. Start with

    \b
      gaitlab new my_robot.toml
      gaitlab check my_robot.toml
      gaitlab search my_robot.toml

    All figures are estimates; they replace neither a bench test nor local codes for compressed air and vacuum.
    """


cli.params.append(_debug_option())


# The matrices here are small: threads inside numpy cost more than they give, and their number must not touch the last digits.
THREAD_SETTINGS = ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS")


def main(arguments: list[str] | None = None) -> None:
    """Runs the command line and ends the process with its exit code."""
    for name in THREAD_SETTINGS:
        os.environ.setdefault(name, "1")  # before the first command imports numpy
    cli.main(args=arguments, prog_name="gaitlab", standalone_mode=True)
