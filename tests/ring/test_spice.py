"""The whole ring against ngspice, an outside circuit simulator, on an equivalent circuit of behavioural sources."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from gaitlab.ring import measures
from gaitlab.ring.periodic import Settings, nudged, settled
from gaitlab.ring.reading import oscillating_run
from tests.ring.robots import in_order, tray
from tests.ring.spice import iso_circuit, netlist, ngspice

END_S, STEP_S = 9.0, 5e-4


@pytest.mark.circuit
@pytest.mark.slow
def test_period_and_phases_against_ngspice(tmp_path: Path) -> None:
    """From the same start: period within 0.5 %, phases within 0.01, peaks within 0.5 % of the ambient pressure."""
    circuit = iso_circuit(tray(), in_order(tray()))
    start = nudged(circuit, circuit.rest(), 1e-2)
    followed = settled(circuit, start, Settings())
    assert followed.cycle is not None
    ours = oscillating_run(circuit, followed, followed.cycle)

    out = tmp_path / "ring.txt"
    theirs = ngspice(netlist(circuit, start, end_s=END_S, step_s=STEP_S, out=out), tmp_path, out)
    vacuum = circuit.gas.pressure_Pa - theirs.output_Pa
    level = measures.half_swing(vacuum[0][theirs.time_s > 5.0])
    edges = _rises(theirs.time_s, vacuum[0], level)
    period = float(edges[-1] - edges[-2])
    assert period == pytest.approx(ours.period_s, rel=5e-3)

    even = edges[-2] + np.arange(1024) / 1024 * period
    last = np.array([np.interp(even, theirs.time_s, wave) for wave in vacuum])
    apart = np.mod(measures.phases(last) - ours.phase + 0.5, 1.0) - 0.5
    assert np.max(np.abs(apart)) < 0.01
    assert last.max(axis=1) == pytest.approx(ours.peak_vacuum_Pa, abs=500.0)


def _rises(time_s: np.ndarray, wave: np.ndarray, level: float) -> np.ndarray:
    """Times at which a wave rises through a level."""
    k = np.flatnonzero((wave[:-1] < level) & (wave[1:] >= level))
    return time_s[k] + (level - wave[k]) / (wave[k + 1] - wave[k]) * (time_s[k + 1] - time_s[k])
