"""Walks made up by formula, so that the search is tested without physics; run in this process or in workers alike."""

from __future__ import annotations

import cmath
import hashlib
import os
import signal
import time
from dataclasses import replace
from itertools import pairwise
from pathlib import Path
from typing import Any

from wiring.robots import row_document

from gaitlab.gait.records import Walk, WaveReading
from gaitlab.robot.reader import robot_from_document
from gaitlab.search.evaluate import Evaluation, Job, evaluate, failed_walk, robot_of
from gaitlab.search.run import SearchTask
from gaitlab.wiring.smooth import ideal_phase

PERIOD_s = 1.5


def task_of(legs: int = 5, stages: int = 5, **limits: Any) -> SearchTask:
    document = row_document(legs, stages, **limits)
    return SearchTask.of(document, robot_from_document(document))


def walk_of(job: Job, travel_m: float, scatter_m: float = 1e-5) -> Walk:
    """A walk that made `travel_m` a period."""
    periods = job.settings.periods or 6
    return replace(
        failed_walk(job, "walked", ""),
        period_s=PERIOD_s,
        travel_m=travel_m,
        travel_scatter_m=scatter_m,
        travels_m=(travel_m,) * periods,
        drift_m=0.001,
        turn_rad=0.01,
        body_length_m=0.16,
        air_kg_per_m=1e-3,
        wave=WaveReading("direct", 4.0, 0.9),
        simulated_s=0.5 + periods * PERIOD_s,
    )


def smooth_landscape(job: Job) -> float:
    """Travel [m] that hangs on phase differences of legs near each other, with a bias that no symmetry keeps."""
    stages = robot_of(job.document_json).ring.stages
    sources = [s for _, s in job.wiring.pairs]
    turns = [cmath.exp(2j * cmath.pi * ideal_phase(s, stages)) if isinstance(s, int) else 0 for s in sources]
    near = sum((b / a * cmath.exp(-0.7j)).real for a, b in pairwise(turns) if a and b)
    far = sum((b / a * cmath.exp(0.4j)).real for a, b in zip(turns, turns[2:], strict=False) if a and b)
    return 1e-3 * (near + 0.6 * far)


def by_formula(job: Job) -> Evaluation:
    return Evaluation(walk_of(job, smooth_landscape(job)), 0.0)


def by_hash(job: Job) -> Evaluation:
    """A rugged landscape; one wiring in thirteen falls over."""
    number = int.from_bytes(hashlib.sha256(job.wiring.text().encode()).digest()[:4], "big")
    if number % 13 == 0:
        return Evaluation(failed_walk(job, "fell_over", "widen the stance"), 0.0)
    return Evaluation(walk_of(job, 1e-6 * (number % 20_000 - 5_000)), 0.0)


def coarse_or_hash(job: Job) -> Evaluation:
    """Real coarse walks, made-up settled ones."""
    return evaluate(job) if job.settings.coarse else by_hash(job)


def slowly(job: Job) -> Evaluation:
    time.sleep(0.02)
    return by_hash(job)


def dies_once(job: Job) -> Evaluation:
    """Kills its own process at the first wiring that asks for it; the flag file says that it has happened."""
    flag = Path(os.environ["GAITLAB_TEST_FLAG"])
    if job.wiring.source("b") == 4 and not flag.exists():
        flag.touch()
        os.kill(os.getpid(), signal.SIGKILL)
    return by_hash(job)


def dies_always(job: Job) -> Evaluation:
    """Kills its own process whenever one wiring comes up."""
    if job.wiring.text() == "a=1 b=4 c=2 d=5 e=3":
        os.kill(os.getpid(), signal.SIGKILL)
    return by_hash(job)


def kills_a_worker_once(job: Job) -> Evaluation:
    """As `dies_once`, and never in the process that started the workers."""
    assert os.environ["GAITLAB_TEST_PARENT"] != str(os.getpid())
    return dies_once(job)


def kills_every_worker(job: Job) -> Evaluation:
    """Kills any worker, never the process that started it."""
    assert os.environ["GAITLAB_TEST_PARENT"] != str(os.getpid())
    os.kill(os.getpid(), signal.SIGKILL)
    return by_hash(job)
