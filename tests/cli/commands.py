"""Runs the command line in this process and keeps what it printed."""

from __future__ import annotations

from dataclasses import dataclass

from click.testing import CliRunner

from gaitlab.cli.main import cli


@dataclass(frozen=True)
class Finished:
    """Exit code and both outputs of one command."""

    code: int
    out: str
    err: str


def gaitlab(*arguments: str) -> Finished:
    """One run of the command line with these arguments."""
    result = CliRunner().invoke(cli, list(arguments))
    return Finished(result.exit_code, result.stdout, result.stderr)
