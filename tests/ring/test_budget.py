"""The air budget: the draw against a count of fillings, the working point on the curve, the smallest pump by trial."""

from __future__ import annotations

import numpy as np
import pytest

from gaitlab.air.gas import gas_of
from gaitlab.errors import InputError
from gaitlab.ring.budget import air_budget, demand, holds_on, least_vacuum, pump_curve, scaled, smallest_free_flow
from gaitlab.ring.pattern import LoadPattern, load_pattern
from gaitlab.ring.solve import pattern_run
from gaitlab.robot.circuit import FixedVacuum, Pump, PumpTable, Syringe
from tests.ring.robots import in_order, tray, with_supply


def pattern() -> LoadPattern:
    return load_pattern(tray(), in_order(tray()))


def test_budget_of_the_row() -> None:
    """The mean draw lies on the pump's curve at the mean vacuum (a straight line, so means keep to it)."""
    run = pattern_run(pattern())
    budget = air_budget(pattern(), run)
    vacuum, flow = pump_curve(pattern())
    assert budget.alive
    assert budget.flow_kg_s == pytest.approx(float(np.interp(run.supply_mean_Pa, vacuum, flow)), rel=1e-3)
    emptied = sum(np.ptp(w) for w in run.output_vacuum_Pa) * 3e-6 / gas_of(tray().ambient).RT
    assert run.air_kg_per_period > emptied  # each filling is drawn off again, and open valves let more through
    margins = []
    for factor in (1.0, 0.85):
        pump = scaled(tray().supply, factor * budget.smallest_m3_s / tray().supply.free_flow_m3_s)  # type: ignore[union-attr]
        tried = pattern_run(load_pattern(with_supply(tray(), pump), in_order(tray())))
        margins.append(dict(tried.details).get("high_margin_Pa", -1.0))
    assert margins[0] >= 0.0 > margins[1]


def test_least_vacuum_by_hand() -> None:
    """(18 + 3)/(1 − 0.15) kPa: threshold, half the span, sealing."""
    assert least_vacuum(pattern()) == pytest.approx(21e3 / 0.85, rel=1e-12)


def test_a_dead_end_below_the_least_vacuum_has_no_pump() -> None:
    """However large: it never gets there."""
    robot = with_supply(tray(), dead_end_vacuum_Pa=24e3)
    assert np.isnan(smallest_free_flow(load_pattern(robot, in_order(robot))))


def test_demand_rises_with_vacuum() -> None:
    """More vacuum, more air; too little to run is nan."""
    flows = demand(pattern(), [15e3, 35e3, 50e3])
    assert np.isnan(flows[0]) and 0.0 < flows[1] < flows[2]


def test_scaled_supplies() -> None:
    """Free flows multiply; a house line becomes a pump of its vacuum."""
    table = PumpTable((0.0, 50e3), (1e-4, 0.0), 5e-5)
    assert scaled(table, 2.0) == PumpTable((0.0, 50e3), (2e-4, 0.0), 5e-5)
    assert isinstance(scaled(FixedVacuum(50e3), 1.0), Pump)


def test_a_syringe_has_no_smallest_pump() -> None:
    """Asked for one it says what it needs."""
    robot = with_supply(tray(), Syringe(1e-6, (0.0, 1.0), (0.0, 1e-4)))
    with pytest.raises(InputError, match="supply must be a pump"):
        smallest_free_flow(load_pattern(robot, in_order(robot)))


@pytest.mark.parametrize("free_L_min", [1.8, 1.9, 2.0, 2.2, 9.0])
def test_a_pump_is_enough_exactly_where_the_smallest_is_no_larger(free_L_min: float) -> None:
    """One rule for both: a ring that runs below the margin (1.8, 1.9 L/min) runs on a pump that is too small."""
    robot = with_supply(tray(), free_flow_m3_s=free_L_min / 6e4)
    small = load_pattern(robot, in_order(robot))
    run = pattern_run(small)
    budget = air_budget(small, run)
    assert budget.alive
    assert budget.enough == (budget.smallest_m3_s <= free_L_min / 6e4) == (free_L_min > 1.95)
    assert holds_on(run) == budget.enough
