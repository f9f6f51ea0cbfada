"""Wirings side by side, each with its reversed wave: one walk of each, and common draws for how sure the choice is."""

from __future__ import annotations

import json
from collections.abc import Callable, Sequence
from dataclasses import dataclass

from gaitlab.errors import InputError, must
from gaitlab.gait.records import Walk
from gaitlab.robot.records import Robot
from gaitlab.search.evaluate import Evaluation, Job
from gaitlab.search.settings import WalkSettings
from gaitlab.search.workers import Workers
from gaitlab.trust.direction import Advice, advice
from gaitlab.trust.places import Document
from gaitlab.trust.spread import Request, Spread, spread
from gaitlab.trust.tolerances import tolerances_of
from gaitlab.wiring.wiring import Wiring


@dataclass(frozen=True)
class Pair:
    """One wiring and the same with its wave reversed: a walk of each, the advice which way to build it, wall times [s]."""

    wiring: Wiring
    walk: Walk
    backward: Wiring
    backward_walk: Walk
    advice: Advice
    wall_s: float
    backward_wall_s: float


@dataclass(frozen=True)
class Comparison:
    """All pairs in the order asked for, the spread they were judged on (None without draws), and what to mind."""

    pairs: tuple[Pair, ...]
    spread: Spread | None
    notes: tuple[str, ...]


def compare(
    robot: Robot,
    document: Document,
    wirings: Sequence[Wiring],
    workers: Workers,
    *,
    draws: int,
    seed: int,
    settings: WalkSettings = WalkSettings(),
    tell: Callable[[int], None] = lambda done: None,
) -> Comparison:
    """Walks each wiring and its reverse once, and, with `draws` above 0, over that many common builds.

    Raises InputError for a wiring that is given twice.
    """
    _check_once(wirings)
    every = distinct(robot, wirings)
    walks = _walks(document, every, settings, workers, tell)
    found = None
    if draws:
        request = Request(tolerances_of(document, robot.tolerances), every, draws, seed, settings)
        found = spread(request, workers, tell=tell)
    pairs = tuple(_pair(robot, w, every, walks, found) for w in wirings)
    return Comparison(pairs, found, _notes(robot))


def distinct(robot: Robot, wirings: Sequence[Wiring]) -> tuple[Wiring, ...]:
    """The wirings and their reverses, each once."""
    both = [v for w in wirings for v in (w, w.reversed(robot.ring.stages))]
    return tuple(dict.fromkeys(both))


def _check_once(wirings: Sequence[Wiring]) -> None:
    texts = [w.text() for w in wirings]
    double = next((t for t in texts if texts.count(t) > 1), None)
    if double is not None:
        raise InputError(must("wiring", "given once", double, "leave out the second; the reverse is walked anyway"))


def _walks(
    document: Document, wirings: Sequence[Wiring], settings: WalkSettings, workers: Workers, tell: Callable[[int], None]
) -> dict[Wiring, Evaluation]:
    text = json.dumps(document)
    walks: dict[Wiring, Evaluation] = {}
    for job, evaluation in workers.evaluated(Job(text, w, settings, w.text()) for w in wirings):
        walks[job.wiring] = evaluation
        tell(1)
    return walks


def _pair(
    robot: Robot, wiring: Wiring, every: tuple[Wiring, ...], walks: dict[Wiring, Evaluation], found: Spread | None
) -> Pair:
    backward = wiring.reversed(robot.ring.stages)
    scores = None if found is None else found.scores[:, [every.index(wiring), every.index(backward)]]
    there, back = walks[wiring], walks[backward]
    told = advice(there.walk, back.walk, scores=scores)
    return Pair(wiring, there.walk, backward, back.walk, told, there.wall_s, back.wall_s)


def _notes(robot: Robot) -> tuple[str, ...]:
    found = [
        "for an evenly spaced wave along a row, turning the ring block end for end reverses it: no tube is changed"
    ]
    if robot.ring.overrides:
        found.append(
            "the stages of this ring are not equal: its reversed wave is the same wiring counted the other way round, "
            "not the exact mirror in time"
        )
    return tuple(found)
