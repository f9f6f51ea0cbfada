"""A ring on a syringe: gas adds up, the vacuum is used up, and it ends."""

from __future__ import annotations

import numpy as np
import pytest

from gaitlab.errors import InputError
from gaitlab.ring.chambers import content
from gaitlab.ring.circuit import circuit_of
from gaitlab.ring.solve import ring_run
from gaitlab.ring.stroke import pulls, stroke_run, syringe_start
from gaitlab.robot.circuit import Syringe
from tests.ring.robots import in_order, tray, with_supply

SYRINGE = Syringe(20e-6, (0.0, 1.0), (0.0, 300e-6))


def test_a_stroke_carries_periods_and_dies() -> None:
    """Barrel vacuum falls from period to period once the plunger stands, down to about what lifts a valve."""
    circuit = circuit_of(with_supply(tray(), SYRINGE), in_order(tray()))
    stroke = stroke_run(circuit, syringe_start(circuit))
    assert stroke.strokes == 1 and 3 <= stroke.periods_per_stroke <= 40
    after = np.array(stroke.supply_Pa)[np.array(stroke.cuts_s) > 1.0]
    assert np.all(np.diff(after) < 0.0)
    assert 15e3 < after[-1] < 30e3  # threshold 18 kPa, span 6, sealing 0.15


def test_gas_in_the_barrel_is_what_came_through_the_ring() -> None:
    """Boyle with a leak: after the end the barrel holds its first gas plus all that passed; p V tells both."""
    circuit = circuit_of(with_supply(tray(), SYRINGE), in_order(tray()))
    stroke = stroke_run(circuit, syringe_start(circuit))
    assert stroke.end[-1] == pytest.approx(320e-6, rel=1e-9)
    first = content(circuit.bellows[0], np.array(circuit.gas.pressure_Pa), circuit.gas.pressure_Pa)[0]
    assert stroke.end[-2] > circuit.gas.pressure_Pa * 20e-6
    assert stroke.end[-2] < circuit.gas.pressure_Pa * 320e-6 and first > 0.0


def test_ring_run_on_a_syringe() -> None:
    """One period from the middle stands for the stroke; the stroke's own figures are in the details."""
    run = ring_run(with_supply(tray(), SYRINGE), in_order(tray()))
    details = dict(run.details)
    assert run.outcome == "oscillates" and run.harmonic == 1
    assert details["periods_per_stroke"] >= 3 and details["dies_at_s"] > run.period_s
    assert run.air_kg_per_period > 0.0


def test_a_short_stroke_is_named() -> None:
    """20 mL do not fill five bellows once: too few periods to speak of, with a remedy."""
    run = ring_run(with_supply(tray(), Syringe(5e-6, (0.0, 1.0), (0.0, 12e-6))), in_order(tray()))
    assert run.outcome == "short_stroke" and "stroke" in run.remedy


def test_pulls_are_counted() -> None:
    """Two pulls with a push between; a straight pull in pieces is one."""
    assert pulls(Syringe(1e-6, (0, 1, 2, 3), (0, 5e-5, 0, 5e-5))) == 2
    assert pulls(Syringe(1e-6, (0, 1, 2), (0, 2e-5, 5e-5))) == 1


def test_only_a_syringe_has_strokes() -> None:
    """Asked of a pump it says what it needs."""
    circuit = circuit_of(tray(), in_order(tray()))
    with pytest.raises(InputError, match="supply must be a syringe"):
        stroke_run(circuit, syringe_start(circuit))
