"""Ideal sequences: the orders, their phases, and the waves at the inlets."""

from __future__ import annotations

import numpy as np
import pytest

from gaitlab.errors import InputError
from gaitlab.ring.measures import phases
from gaitlab.ring.sequence import alternate_order, ideal_phases, ideal_run, ideal_waves
from gaitlab.wiring.wiring import wiring_from_text
from tests.ring.robots import in_order, tray

ODD = (3, 5, 7, 9, 31)


@pytest.mark.parametrize("stages", ODD)
def test_alternate_order_steps_evenly(stages: int) -> None:
    """Read along 1, 3, 5, …, 2, 4, … a natural ring steps by 1/N each time (arithmetic of π + π/N)."""
    natural = ideal_phases("natural", stages)
    in_time = natural[np.array(alternate_order(stages)) - 1]
    assert in_time == pytest.approx(np.arange(stages) / stages, abs=1e-12)
    assert sorted(alternate_order(stages)) == list(range(1, stages + 1))


@pytest.mark.parametrize("stages", ODD)
def test_natural_and_alternate_are_one_wave(stages: int) -> None:
    """For odd N they describe the same phases; the reverse negates each of them."""
    natural, alternate = ideal_phases("natural", stages), ideal_phases("alternate", stages)
    assert natural == pytest.approx(alternate, abs=1e-12)
    total = np.mod(alternate + ideal_phases("reverse-alternate", stages) + 0.5, 1.0) - 0.5
    assert total == pytest.approx(np.zeros(stages), abs=1e-12)


def test_each_stage_lags_216_degrees() -> None:
    """N = 5: half a period and a tenth, 216°."""
    steps = np.mod(np.diff(ideal_phases("natural", 5)), 1.0) * 360.0
    assert steps == pytest.approx(np.full(4, 216.0))


def test_a_list_of_phases_is_taken_as_it_is() -> None:
    """Any list, wrapped into [0, 1)."""
    assert ideal_phases([0.0, 1.25, -0.25], 3) == pytest.approx([0.0, 0.25, 0.75])


@pytest.mark.parametrize("wrong", ["sideways", [0.0, 0.1], [0.0, float("nan"), 0.2]])
def test_wrong_sequences_are_refused(wrong: object) -> None:
    """Unknown names and lists of the wrong length, with what would be right."""
    with pytest.raises(InputError, match="sequence must be"):
        ideal_phases(wrong, 3)  # type: ignore[arg-type]


def test_waves_follow_the_wiring() -> None:
    """A wired inlet gets its output's phase, an open one nothing, a held one the full vacuum."""
    robot = tray()
    wiring = wiring_from_text("a=1 b=3 c=open d=held e=2", robot.inlets(), 5)
    waves = ideal_waves(robot, wiring, "natural", 2.0, 30e3)
    rows = dict(zip(waves.inlets, waves.vacuum_Pa, strict=True))
    assert waves.period_s == 2.0 and waves.vacuum_Pa.shape == (5, 512)
    assert not rows["c"].any() and np.all(rows["d"] == 30e3)
    found = phases(np.array([rows["a"], rows["b"], rows["e"]]))
    assert found == pytest.approx([0.0, 0.2, 0.6], abs=1e-5)


def test_an_ideal_run_says_that_it_is_none() -> None:
    """Its outcome is not that of a ring."""
    run = ideal_run(tray(), in_order(tray()), "reverse-alternate", 1.0, 50e3)
    assert run.outcome == "ideal" and run.output_vacuum_Pa.shape == (5, 512)
    assert phases(run.output_vacuum_Pa) == pytest.approx(run.phase, abs=1e-5)


@pytest.mark.parametrize(("period_s", "vacuum_Pa"), [(0.0, 5e4), (1.0, -1.0)])
def test_periods_and_vacuums_above_zero(period_s: float, vacuum_Pa: float) -> None:
    """Neither may be zero or below."""
    with pytest.raises(InputError, match="above 0"):
        ideal_waves(tray(), in_order(tray()), "natural", period_s, vacuum_Pa)
