"""`bellows` prints and plots what the law of every type says."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from tests.cli.commands import gaitlab
from tests.robot.documents import ROOT

ROW5, WORM5 = (str(ROOT / "robots" / f"{name}.toml") for name in ("tray_row5", "worm5"))


def test_a_bending_type_gives_its_bench_numbers_back() -> None:
    """60° at 50 kPa and 0.014 N m/rad over 32 mm: tip stiffness 3 k/L² = 0.0410 N/mm."""
    facts = json.loads(gaitlab("bellows", ROW5, "--json").out)["leg"]
    assert facts["source"] == "measured"
    deepest = facts["vacuum_kPa"][-1]
    assert facts["vacuum_kPa"][0] == 0 and 50 < deepest < 70
    assert facts["bend_deg"][-1] == pytest.approx(60.0 * deepest / 50)
    assert facts["tip_stiffness_N_mm"] == pytest.approx(3 * 0.014 / 0.032**2 / 1e3)
    assert facts["swept_volume_mL"][-1] == pytest.approx(1.4 * deepest / 50)
    assert len(facts["bend_deg"]) == len(facts["vacuum_kPa"]) == len(facts["swept_volume_mL"])
    assert facts["blocked_force_N"] == pytest.approx(1.5 * 0.014 * 1.0472 * deepest / 50 / 0.032, rel=1e-4)


def test_a_contracting_type_has_a_stroke() -> None:
    facts = json.loads(gaitlab("bellows", WORM5, "--type", "pull", "--json").out)["pull"]
    assert "bend_deg" not in facts and facts["stroke_mm"][-1] > facts["stroke_mm"][1] > 0
    assert "stroke_mm" in gaitlab("bellows", WORM5).out


def test_an_unknown_type_is_refused() -> None:
    shown = gaitlab("bellows", ROW5, "--type", "arm")
    assert shown.code == 2 and "--type must be one of leg, got 'arm'" in shown.err


def test_a_plot_is_written_once(tmp_path: Path) -> None:
    target = tmp_path / "bellows.png"
    assert gaitlab("bellows", ROW5, "--plot", str(target)).code == 0
    assert target.read_bytes().startswith(b"\x89PNG")
    shown = gaitlab("bellows", ROW5, "--plot", str(target))
    assert shown.code == 2 and "add --force to replace it" in shown.err
    assert gaitlab("bellows", ROW5, "--plot", str(target), "--force").code == 0


def test_check_refuses_a_body_that_cannot_stand(tmp_path: Path) -> None:
    """The body's own refusals and warnings reach the first command that a builder runs."""
    text = Path(ROW5).read_text(encoding="utf-8")
    path = tmp_path / "weak.toml"
    path.write_text(text.replace("bend_stiffness_N_m_rad = 0.014", "bend_stiffness_N_m_rad = 0.002"), encoding="utf-8")
    shown = gaitlab("check", str(path))
    assert shown.code == 2 and "leg a: buckling load must be above its share of the weight" in shown.err
    path.write_text(text.replace("bend_stiffness_N_m_rad = 0.014", "bend_stiffness_N_m_rad = 0.01"), encoding="utf-8")
    assert "warning: buckling_margin: leg a" in gaitlab("check", str(path)).err
