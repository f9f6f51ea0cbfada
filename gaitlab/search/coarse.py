"""Coarse walks for a search: all tubes as long as their mean, so that wirings share rings; those are solved once in a process."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from functools import lru_cache
from statistics import fmean

from gaitlab.errors import InputError
from gaitlab.gait.coarse_walk import coarse_walks
from gaitlab.gait.records import Walk
from gaitlab.ring.solve import ring_run
from gaitlab.ring.tubing import tube_lengths
from gaitlab.ring.waves import RingRun
from gaitlab.robot.records import Robot
from gaitlab.search.evaluate import REFUSED, Job, failed_walk
from gaitlab.search.settings import WalkSettings
from gaitlab.wiring.wiring import Wiring


def coarse_walks_of(document_json: str, robot: Robot, wirings: Sequence[Wiring]) -> list[Walk]:
    """A coarse walk of each wiring, in order; what a model refuses is the outcome ``refused``."""
    even = _evenly_tubed(robot)
    rings: dict[int, RingRun] = {}
    walks: dict[int, Walk] = {}
    for place, wiring in enumerate(wirings):
        try:
            rings[place] = ring_run(even, wiring, runs=_rings(document_json))
        except InputError as error:
            walks[place] = failed_walk(Job(document_json, wiring, WalkSettings(coarse=True), ""), REFUSED, str(error))
    walks |= zip(rings, coarse_walks(robot, list(rings.values())), strict=True)
    return [walks[place] for place in range(len(wirings))]


def _evenly_tubed(robot: Robot) -> Robot:
    return replace(robot, tubes=replace(robot.tubes, slack=0.0, extra_m=fmean(tube_lengths(robot).values())))


@lru_cache(maxsize=1)
def _rings(document_json: str) -> dict[str, RingRun]:
    """Solved rings of one robot by load pattern, for as long as this process works for it."""
    return {}
