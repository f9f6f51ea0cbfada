"""gaitlab valve on the command line, with the published measurements of one valve."""

from __future__ import annotations

import json
import tomllib
from pathlib import Path
from typing import Any

import pytest
from PIL import Image

from tests.air.test_valve import JENSEN_FLOW, JENSEN_PASSED
from tests.cli.commands import gaitlab


def written(path: Path, header: str, rows: list[tuple[float, float]]) -> str:
    """A CSV file of these rows; its path."""
    path.write_text("# a note\n" + header + "\n" + "\n".join(f"{a},{b}" for a, b in rows) + "\n", encoding="utf-8")
    return str(path)


@pytest.fixture
def curve(tmp_path: Path) -> str:
    # Jensen, Grover & Mathies 2007, fig. 3c, mL/min as L/min.
    return written(tmp_path / "curve.csv", "control_kPa,flow_L_min", [(c, 1e-3 * q) for c, q in JENSEN_FLOW])


@pytest.fixture
def passed(tmp_path: Path) -> str:
    return written(tmp_path / "passed.csv", "control_kPa,passed_kPa", JENSEN_PASSED)


def facts(*arguments: str) -> dict[str, Any]:
    """What --json prints."""
    done = gaitlab("valve", *arguments, "--flow-vacuum-kPa", "87", "--json")
    assert done.code == 0, done.err
    return dict(json.loads(done.out))


def test_numbers_of_a_measured_valve(curve: str, passed: str) -> None:
    found = facts(curve, "--passed", passed, "--supply-kPa", "87")
    assert found["opens_at_kPa"] == pytest.approx(31.0, abs=1.0)
    assert found["full_flow_L_min"] == pytest.approx(0.0107, rel=0.05)
    assert found["sealing"] == pytest.approx(1 / 3, abs=0.025)  # slope 1.5 of fig. 3a is 1/(1 − sealing)
    assert found["threshold_kPa"] == pytest.approx(found["opens_at_kPa"] - 87 * found["sealing"])
    assert found["warnings"] == []


def test_without_a_second_table_the_published_sealing_is_taken(curve: str) -> None:
    assert facts(curve)["sealing"] == 0.32
    assert facts(curve, "--sealing", "0.1")["threshold_kPa"] > facts(curve)["threshold_kPa"]


def test_what_it_prints_is_a_valve_table_of_a_robot_file(curve: str, tmp_path: Path) -> None:
    from gaitlab.robot.reader import robot_from_document

    printed = gaitlab("valve", curve, "--flow-vacuum-kPa", "87").out
    text = printed[printed.index("[ring.valve]") : printed.rindex("}") + 1]
    document = tomllib.loads(Path("robots/tray_row5.toml").read_text(encoding="utf-8"))
    document["ring"]["valve"] = tomllib.loads(text)["ring"]["valve"]
    valve = robot_from_document(document).ring.valve
    assert valve.opening_span_Pa == pytest.approx(11.53e3, rel=1e-3)  # type: ignore[union-attr]


def test_a_poor_fit_is_named(tmp_path: Path) -> None:
    rows = [(0.0, 0.0), (10.0, 1.0), (20.0, 0.2), (30.0, 0.3), (40.0, 1.0), (50.0, 0.4)]
    table = written(tmp_path / "odd.csv", "control_kPa,flow_L_min", rows)
    done = gaitlab("valve", table, "--flow-vacuum-kPa", "10", "--sealing", "0")
    assert done.code == 0, done.err
    assert "warning: misfit" in done.err


def test_the_picture(curve: str, tmp_path: Path) -> None:
    picture = tmp_path / "valve.png"
    arguments = ("valve", curve, "--flow-vacuum-kPa", "87", "--plot", str(picture))
    assert gaitlab(*arguments).code == 0
    with Image.open(picture) as image:
        assert len(image.convert("RGB").getcolors(1_000_000)) > 20
    assert gaitlab(*arguments).code == 2


@pytest.mark.parametrize(
    ("extra", "message"),
    [
        (("--sealing", "0.5"), "sealing must be below 0.348"),
        (("--supply-kPa", "87"), "belong together"),
        (("--ambient-kPa", "80"), "flow_vacuum_kPa must be a gauge vacuum above 0 and below the ambient 80 kPa"),
    ],
)
def test_bad_options_end_with_exit_code_2(curve: str, extra: tuple[str, ...], message: str) -> None:
    done = gaitlab("valve", curve, "--flow-vacuum-kPa", "87", *extra)
    assert done.code == 2
    assert message in done.err


def test_a_refused_default_sealing_names_the_option(curve: str, tmp_path: Path) -> None:
    soft = [(c / 2, q) for c, q in JENSEN_FLOW]
    table = written(tmp_path / "soft.csv", "control_kPa,flow_L_min", [(c, 1e-3 * q) for c, q in soft])
    done = gaitlab("valve", table, "--flow-vacuum-kPa", "87")
    assert done.code == 2
    assert "got 0.32" in done.err and "with --sealing" in done.err


def test_sealing_is_given_or_measured_not_both(curve: str, passed: str) -> None:
    both = ("--passed", passed, "--supply-kPa", "87", "--sealing", "0.3")
    done = gaitlab("valve", curve, "--flow-vacuum-kPa", "87", *both)
    assert done.code == 2
    assert "not both" in done.err


def test_a_table_that_means_negative_sealing_is_refused(curve: str, tmp_path: Path) -> None:
    wrong = written(tmp_path / "wrong.csv", "control_kPa,passed_kPa", [(30.0, 10.0), (85.0, 60.0)])
    done = gaitlab("valve", curve, "--flow-vacuum-kPa", "87", "--passed", wrong, "--supply-kPa", "87")
    assert done.code == 2
    assert "passed table must be one that needs more control vacuum to pass more" in done.err


@pytest.mark.parametrize(
    ("content", "message"),
    [
        ("control_kPa,flow\n1,2\n", "first row must be with columns control_kPa and flow_L_min"),
        ("", "first row must be with columns"),
        ("control_kPa,flow_L_min\n1,abc\n", "line 2 must be finite numbers"),
        ("control_kPa,flow_L_min\n1\n", "line 2 must be finite numbers"),
        ("control_kPa,flow_L_min\n1,nan\n", "line 2 must be finite numbers"),
        ("control_kPa,flow_L_min\n1,2\n", "at least 5 pairs"),
    ],
)
def test_bad_tables_are_refused_by_line(tmp_path: Path, content: str, message: str) -> None:
    path = tmp_path / "table.csv"
    path.write_text(content, encoding="utf-8")
    done = gaitlab("valve", str(path), "--flow-vacuum-kPa", "50")
    assert done.code == 2
    assert message in done.err


def test_a_missing_file_is_named(tmp_path: Path) -> None:
    done = gaitlab("valve", str(tmp_path / "none.csv"), "--flow-vacuum-kPa", "50")
    assert done.code == 2
    assert "readable UTF-8 CSV file" in done.err
    assert "no such file or directory; usual fix: check the name" in done.err.lower() and "Errno" not in done.err
