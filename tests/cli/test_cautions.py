"""Every command whose figures go to the bench says that they are estimates, to people and not in the JSON."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from gaitlab.trust.cautions import BENCH, DISTANCES, ESTIMATES
from tests.cli.commands import gaitlab

ROW5 = str(Path(__file__).resolve().parents[2] / "robots" / "tray_row5.toml")
WIRING = ("--wiring", "a=1 b=3 c=5 d=2 e=4")
IDEAL = ("--sequence", "alternate", "--period-s", "0.6")


@pytest.mark.parametrize(
    ("words", "said"),
    [
        (("check", ROW5), (ESTIMATES,)),
        (("bellows", ROW5), (ESTIMATES,)),
        (("inverter", ROW5), (ESTIMATES,)),
        (("ring", ROW5, *IDEAL), (ESTIMATES,)),
        (("supply", ROW5), (ESTIMATES, BENCH)),
        (("walk", ROW5, *WIRING, *IDEAL, "--periods", "1"), (DISTANCES, ESTIMATES)),
    ],
    ids=lambda value: value[0] if value[0] != ESTIMATES else "",
)
def test_the_last_words_are_the_cautions(words: tuple[str, ...], said: tuple[str, ...]) -> None:
    """In words they end the output; with --json there is one object and nothing else."""
    people, machine = gaitlab(*words), gaitlab(*words, "--json")
    assert people.code == machine.code == 0
    assert people.out.endswith("\n\n" + "\n".join(said) + "\n")
    json.loads(machine.out)
    assert ESTIMATES not in machine.out and BENCH not in machine.out and DISTANCES not in machine.out


def test_an_exported_body_and_an_exported_walk(tmp_path: Path) -> None:
    """The walk's distance carries its own doubt."""
    body = gaitlab("export", ROW5, "--urdf", str(tmp_path / "row5.urdf"))
    assert body.out.endswith(f"\n\n{ESTIMATES}\n")
    walk = gaitlab("export", ROW5, "--csv", str(tmp_path / "row5.csv"), *WIRING, "--periods", "1")
    assert walk.out.endswith(f"\n\n{DISTANCES}\n{ESTIMATES}\n")
