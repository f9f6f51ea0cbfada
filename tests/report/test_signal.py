"""The running edge; leans on the ideal ring, where every edge follows the one before by 1/(2N) of a period."""

from __future__ import annotations

import dataclasses
import math

import numpy as np
import pytest

from gaitlab.report.signal import signal_path
from tests.report import synthetic


def _even_ring(stages: int):
    ring = synthetic.ring_run(synthetic.BEST)
    return dataclasses.replace(ring, phase=synthetic.phases(stages), duty=np.full(stages, 0.5))


@pytest.mark.parametrize("stages", [3, 5, 7, 9])
def test_edges_of_an_even_ring_are_evenly_spaced(stages: int) -> None:
    path = signal_path(_even_ring(stages))
    assert path is not None
    np.testing.assert_allclose(np.diff(path.phase), 1 / (2 * stages), atol=1e-12)
    assert path.phase[-1] - path.phase[0] == pytest.approx(1.0)
    assert list(path.stage) == [k % stages for k in range(2 * stages + 1)]


def test_the_signal_goes_round_twice_a_period_and_changes_its_kind() -> None:
    path = signal_path(_even_ring(5))
    assert path is not None
    assert path.at(0.0) == (0.0, True)
    assert path.at(0.5)[0] == pytest.approx(0.0)
    assert path.at(0.5)[1] is False
    assert path.at(0.05)[0] == pytest.approx(0.5)
    assert path.at(7.05)[0] == pytest.approx(0.5)


def test_a_ring_at_rest_has_no_signal() -> None:
    ring = dataclasses.replace(synthetic.ring_run(synthetic.BEST), period_s=math.nan)
    assert signal_path(ring) is None
