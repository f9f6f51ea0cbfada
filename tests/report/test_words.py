"""What sheet and page say of the rechecks."""

from __future__ import annotations

import dataclasses
from pathlib import Path

from gaitlab.report.run_folder import read_run
from gaitlab.report.words import rechecks_text


def test_rechecks_of_tied_finalists_claim_no_order(run_folder: Path) -> None:
    """Two of three kept is counted; where all are tied there is nothing to count."""
    run = read_run(run_folder)
    assert rechecks_text(run).startswith(
        "Order kept in 2 of 3 rechecks (half the step, half inertia factor, second engine)"
    )
    told = tuple(dataclasses.replace(r, order_kept=None, note="all tied") for r in run.rechecks)
    assert rechecks_text(dataclasses.replace(run, rechecks=told)).startswith(
        "Finalists all tied: no order to keep (rechecks:"
    )


def test_rechecks_name_whose_travel_moved(run_folder: Path) -> None:
    """11.2 mm in the search, 9.9 mm in the second engine: 12 %."""
    assert rechecks_text(read_run(run_folder)).endswith("; the best wiring's travel moved by up to 12 %.")
