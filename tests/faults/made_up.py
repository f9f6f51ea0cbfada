"""Walks made up by formula, some of them with a fault of their own, for searches that are hurt on purpose."""

from __future__ import annotations

import hashlib
import os
import time
from dataclasses import replace

from gaitlab.gait.records import WaveReading
from gaitlab.search.evaluate import Evaluation, Job, failed_walk

WALK_S = 0.015  # as long as one made-up walk takes


def made_up(job: Job) -> Evaluation:
    """A walk whose travel is read off the wiring's hash; every eleventh one falls over."""
    time.sleep(WALK_S)
    number = int.from_bytes(hashlib.sha256(job.wiring.text().encode()).digest()[:4], "big")
    if number % 11 == 0:
        return Evaluation(failed_walk(job, "fell_over", "widen the stance"), WALK_S)
    travel_m = 1e-6 * (number % 20_000 - 5_000)
    walked = replace(
        failed_walk(job, "walked", ""),
        period_s=1.5, travel_m=travel_m, travel_scatter_m=1e-5, travels_m=(travel_m,) * 6, drift_m=1e-3, turn_rad=0.01,
        slip=0.1, body_length_m=0.16, air_kg_per_m=1e-3, wave=WaveReading("direct", 4.0, 0.9), simulated_s=9.5,
    )  # fmt: skip
    return Evaluation(walked, WALK_S)


def starved(job: Job) -> Evaluation:
    """Runs out of memory at one wiring in seven, the first time it comes up (a file in the temporary folder remembers)."""
    number = int.from_bytes(hashlib.sha256(job.wiring.text().encode()).digest()[4:8], "big")
    flag = f"{os.environ['GAITLAB_TEST_HEARD']}.{number}"
    if number % 7 == 0 and not os.path.exists(flag):
        open(flag, "w").close()
        raise MemoryError
    return made_up(job)


def blown_up(job: Job) -> Evaluation:
    """Physics that went wrong quietly: a travel that is no number, infinite, or of astronomic size, said to be a walk."""
    done = made_up(job)
    number = int.from_bytes(hashlib.sha256(job.wiring.text().encode()).digest()[8:12], "big")
    if number % 5 == 0 and done.walk.outcome == "walked":
        travel_m = (float("nan"), float("inf"), float("-inf"))[number % 3]
        return replace(done, walk=replace(done.walk, travel_m=travel_m))
    return done


KINDS = {"": made_up, "starved": starved, "blown_up": blown_up}
