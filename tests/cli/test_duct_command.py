"""gaitlab duct on the command line."""

from __future__ import annotations

import json
from pathlib import Path

import pytest
from PIL import Image

from tests.cli.commands import gaitlab

CHANNEL = ("duct", "--square-mm", "0.5", "--length-mm", "10", "--from-kPa", "101.325", "--to-kPa", "44.325")
KEYS = {
    "mass_flow_mg_s",
    "flow_L_min_ANR",
    "reynolds",
    "inlet_mach",
    "exit_mach",
    "choked",
    "sonic_conductance_dm3_s_bar",
    "critical_ratio",
    "laminar_Pa2_s_per_kg",
    "regime",
    "warnings",
}


def facts(*arguments: str) -> dict[str, object]:
    """What --json prints."""
    done = gaitlab(*arguments, "--json")
    assert done.code == 0, done.err
    return dict(json.loads(done.out))


def test_json_of_a_channel() -> None:
    # 41.708 mg/s, Re about 4600, Mach 0.46 and 0.86: computed independently for 57 kPa across 0.5 × 0.5 × 10 mm.
    found = facts(*CHANNEL)
    assert set(found) == KEYS
    assert found["mass_flow_mg_s"] == pytest.approx(41.708, rel=1e-3)
    assert found["flow_L_min_ANR"] == pytest.approx(41.708 / 1.185 * 0.06, rel=1e-3)
    assert found["reynolds"] == pytest.approx(4600, rel=0.01)
    assert (found["inlet_mach"], found["exit_mach"]) == (
        pytest.approx(0.456, abs=0.005),
        pytest.approx(0.861, abs=0.005),
    )
    assert found["choked"] is False
    assert found["warnings"] == []


def test_a_flow_backwards_is_negative() -> None:
    back = facts("duct", "--square-mm", "0.5", "--length-mm", "10", "--from-kPa", "44.325", "--to-kPa", "101.325")
    assert back["mass_flow_mg_s"] == pytest.approx(-facts(*CHANNEL)["mass_flow_mg_s"])  # type: ignore[operator]


def test_shapes() -> None:
    ends = ("--length-mm", "10", "--from-kPa", "101.325", "--to-kPa", "44.325")
    square = facts(*CHANNEL)
    assert facts("duct", "--width-mm", "0.5", "--height-mm", "0.5", *ends) == square
    round_bore = facts("duct", "--bore-mm", "0.5", *ends)
    assert round_bore["mass_flow_mg_s"] < square["mass_flow_mg_s"]  # type: ignore[operator]


def test_temperature_roughness_and_inlet_matter() -> None:
    base = facts(*CHANNEL)["mass_flow_mg_s"]
    for extra in (("--temperature-C", "60"), ("--roughness-um", "20"), ("--inlet-loss", "1.5")):
        assert facts(*CHANNEL, *extra)["mass_flow_mg_s"] < base  # type: ignore[operator]
    assert facts(*CHANNEL, "--inlet-loss", "0.05")["mass_flow_mg_s"] > base  # type: ignore[operator]


def test_warnings_go_to_stderr_and_into_json() -> None:
    hole = ("duct", "--bore-mm", "2", "--length-mm", "1", "--from-kPa", "101.325", "--to-kPa", "90")
    assert str(facts(*hole)["warnings"]).startswith("['aspect_ratio:")
    assert "warning: aspect_ratio" in gaitlab(*hole).err


def test_people_read_units_and_the_caveat() -> None:
    done = gaitlab(*CHANNEL)
    assert "41.71 mg/s" in done.out
    assert "L/min ANR" in done.out
    assert "estimate" in done.out


def test_the_picture_is_drawn_and_never_overwritten_unasked(tmp_path: Path) -> None:
    picture = tmp_path / "duct.png"
    assert gaitlab(*CHANNEL, "--plot", str(picture)).code == 0
    with Image.open(picture) as image:
        assert image.format == "PNG"
        assert len(image.convert("RGB").getcolors(1_000_000)) > 20
    first = picture.read_bytes()
    refused = gaitlab(*CHANNEL, "--plot", str(picture))
    assert refused.code == 2
    assert "--force" in refused.err
    assert gaitlab(*CHANNEL, "--plot", str(picture), "--force").code == 0
    assert picture.read_bytes() == first


@pytest.mark.parametrize(
    ("change", "message"),
    [
        (("--square-mm", "0"), "0.0 is not in the range"),
        (("--square-mm", "nan"), "must be a finite number"),
        (("--to-kPa", "-4"), "-4.0 is not in the range"),
        (("--length-mm", "0"), "0.0 is not in the range"),
        (("--bore-mm", "1"), "give exactly one of --square-mm"),
        (("--width-mm", "1"), "give exactly one of --square-mm"),
        (("--plot", "picture.bmp"), ".png, .svg or .pdf"),
    ],
)
def test_bad_input_ends_with_exit_code_2(change: tuple[str, str], message: str) -> None:
    done = gaitlab(*CHANNEL, *change)
    assert done.code == 2
    assert message in done.err


def test_a_rectangle_needs_both_sides() -> None:
    done = gaitlab("duct", "--width-mm", "1", "--length-mm", "10", "--from-kPa", "101", "--to-kPa", "90")
    assert done.code == 2
    assert "--height-mm" in done.err
