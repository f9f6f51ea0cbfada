"""Walk after walk in one process: each builds a physics world of its own and must take all of it along again."""

from __future__ import annotations

import gc
from itertools import cycle, islice
from pathlib import Path

import pytest

from gaitlab.gait.walk import walk_waves
from gaitlab.ring.sequence import ideal_waves
from gaitlab.robot.reader import robot_from_document
from gaitlab.wiring.space import WiringSpace
from tests.robot.documents import row5

WALKS = 30  # in each of three rounds
LEFT_BEHIND_MAX_kB = 30 * WALKS  # a world that stays takes some hundred kB


def resident_kB() -> int:
    """Memory of this process that is in use now (Linux)."""
    line = next(x for x in Path("/proc/self/status").read_text().splitlines() if x.startswith("VmRSS"))
    return int(line.split()[1])


@pytest.mark.slow
def test_walks_leave_no_memory_behind() -> None:
    robot = robot_from_document({**row5(), "numerics": {"settle_s": 0.05}})
    wirings = cycle(WiringSpace.of(robot))
    peaks = []
    for _ in range(3):  # the first round fills what libraries keep for good
        seen = []
        for wiring in islice(wirings, WALKS):
            walk_waves(robot, ideal_waves(robot, wiring, "natural", 0.1, 45e3), periods=1)
            gc.collect()
            seen.append(resident_kB())
        peaks.append(max(seen))
    assert peaks[2] - peaks[1] < LEFT_BEHIND_MAX_kB
