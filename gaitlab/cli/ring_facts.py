"""What `gaitlab ring`, `inverter` and `supply` say, keyed as --json prints it, and the wiring they take when none is given."""

from __future__ import annotations

from typing import Any

import numpy as np

from gaitlab.ring.measures import stage_lags
from gaitlab.ring.sequence import alternate_order
from gaitlab.ring.verdict import OSCILLATES
from gaitlab.ring.waves import RingRun
from gaitlab.robot.fields import KILO
from gaitlab.robot.records import Robot
from gaitlab.wiring.wiring import Source, Wiring, wiring_from_text

MG_PER_KG = 1e6
DEGREES = 360.0


def wiring_or_even(robot: Robot, text: str | None) -> Wiring:
    """The wiring given, or the inlets hung on the outputs one after the other, fixed inlets as the file fixes them."""
    if text is not None:
        return wiring_from_text(text, robot.inlets(), robot.ring.stages)
    fixed: dict[str, Source] = dict(robot.wiring.fixed)
    return Wiring.of({inlet: fixed.get(inlet, k % robot.ring.stages + 1) for k, inlet in enumerate(robot.inlets())})


def ring_facts(run: RingRun) -> dict[str, Any]:
    """One run as `gaitlab ring --json` prints it; failed runs have the same keys, with nothing where nothing repeats."""
    stages = len(run.phase)
    lags = stage_lags(run.phase) * DEGREES
    return {
        "outcome": run.outcome,
        "remedy": run.remedy,
        "period_s": run.period_s,
        "phase": run.phase,
        "stage_lag_deg": float(np.mean(lags)) if np.all(np.isfinite(lags)) else float("nan"),
        "stage_lags_deg": lags,
        "alternate_order": alternate_order(stages),
        "duty": run.duty,
        "peak_vacuum_kPa": run.peak_vacuum_Pa / KILO,
        "least_vacuum_kPa": run.least_vacuum_Pa / KILO,
        "rise_s": run.rise_s,
        "fall_s": run.fall_s,
        "start_up_s": run.start_up_s,
        "supply_vacuum_kPa": {"mean": run.supply_mean_Pa / KILO, "min": run.supply_min_Pa / KILO},
        "air_mg_per_period": run.air_kg_per_period * MG_PER_KG,
        "harmonic": run.harmonic,
        "notes": margin_notes(run),
        "margins": {_edge_name(name): _edge_value(name, value) for name, value in run.details},
    }


def margin_notes(run: RingRun) -> list[str]:
    """What is to say of a ring that runs below its margin; nothing of any other."""
    margin_Pa = dict(run.details).get("high_margin_Pa", 0.0)
    if run.outcome != OSCILLATES or margin_Pa >= 0.0:
        return []
    return [
        f"runs, but below the margin: an output peaks {-margin_Pa / KILO:.3g} kPa under the level where the next valve takes "
        "hold, so the swing is small and a leak stops it; the supply is too weak"
    ]


def _edge_name(name: str) -> str:
    return name.removesuffix("_Pa") + "_kPa" if name.endswith("_Pa") else name


def _edge_value(name: str, value: float) -> float:
    return value / KILO if name.endswith("_Pa") else value


def stage_rows(run: RingRun) -> list[list[object]]:
    """One row for each output: phase, lag behind the stage before, duty, levels, edges."""
    lags = stage_lags(run.phase) * DEGREES
    peak, least = run.peak_vacuum_Pa / KILO, run.least_vacuum_Pa / KILO
    columns = (run.phase, lags, run.duty, peak, least, run.rise_s, run.fall_s)
    return [[k + 1, *values] for k, values in enumerate(zip(*columns, strict=True))]


STAGE_HEADERS = ("output", "phase", "lag deg", "duty", "peak kPa", "least kPa", "rise s", "fall s")
