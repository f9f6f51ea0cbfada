"""Rechecks and advice on direction: read from made-up walks whose right answer is known by hand."""

import dataclasses
import json
import math
from pathlib import Path

import numpy as np
import pytest

from gaitlab.robot.reader import read_robot
from gaitlab.search.evaluate import Evaluation, Job, evaluate, failed_walk
from gaitlab.search.settings import WalkSettings
from gaitlab.search.workers import InProcess
from gaitlab.trust.direction import AS_GIVEN, EITHER, REVERSED, advice
from gaitlab.trust.recheck import judged, recheck_settings, rechecks, verdict
from gaitlab.wiring.wiring import Wiring, wiring_from_text

ROW5 = Path(__file__).parents[2] / "robots" / "tray_row5.toml"


def walk_of(travel_mm: float, scatter_mm: float = 0.05, outcome: str = "walked"):
    job = Job("", Wiring(()), WalkSettings(), "")
    blank = failed_walk(job, outcome, "")
    return dataclasses.replace(blank, travel_m=travel_mm * 1e-3, travel_scatter_m=scatter_mm * 1e-3, period_s=0.5)


FALLEN = failed_walk(Job("", Wiring(()), WalkSettings(), ""), "fell_over", "")


def test_order_kept_and_largest_change():
    before = [walk_of(10), walk_of(9), walk_of(8)]
    r = judged("half step", before, [walk_of(11.8), walk_of(9.5), walk_of(8.1)])
    assert (r.order_kept, r.travel_m) == (True, pytest.approx(0.0118))
    assert r.change == pytest.approx(0.18)


def test_a_swap_of_clear_places_breaks_the_order():
    assert judged("x", [walk_of(10), walk_of(9)], [walk_of(9), walk_of(10)]).order_kept is False


def test_tied_wirings_may_swap():
    before = [walk_of(10, 0.8), walk_of(9.5, 0.8), walk_of(2)]
    assert judged("x", before, [walk_of(9), walk_of(10), walk_of(2)]).order_kept is True


def test_finalists_that_are_all_tied_have_no_order_to_keep():
    r = judged("x", [walk_of(10, 0.8), walk_of(9.5, 0.8)], [walk_of(9), walk_of(10)])
    assert (r.order_kept, r.note) == (None, "all tied")
    assert verdict([r]) == "finalists all tied, no order to keep; a finalist's travel moved by up to 10 %"


def test_a_recheck_that_could_not_be_made_tells_nothing_of_the_order():
    refused = failed_walk(Job("", Wiring(()), WalkSettings(), ""), "refused", "a shorter step")
    r = judged("x", [walk_of(10), walk_of(9)], [walk_of(10), refused])
    assert (r.order_kept, r.note) == (None, "1 of 2 did not walk (refused)")


def test_a_finalist_that_falls_breaks_the_order_and_is_named():
    r = judged("x", [walk_of(10), walk_of(9)], [walk_of(10), FALLEN])
    assert r.order_kept is False
    assert r.note == "1 of 2 did not walk (fell_over)"


def test_one_finalist_has_no_order():
    assert judged("x", [walk_of(10)], [walk_of(9)]).order_kept is None


def test_the_reports_line():
    before = [walk_of(10), walk_of(9)]
    found = [judged(str(k), before, [walk_of(10 + k * 0.45), walk_of(9)]) for k in range(1, 5)]
    assert verdict(found) == "order kept in 4 of 4 rechecks; a finalist's travel moved by up to 18 %"
    assert verdict([judged("x", [walk_of(10)], [FALLEN])]) == "no order to keep; no travel to compare"


def test_every_recheck_walks_every_finalist_with_its_own_settings():
    robot = read_robot(ROW5).robot
    wirings = [Wiring((("a", k),)) for k in (1, 2)]
    seen: list[tuple[Wiring, WalkSettings]] = []

    def watched(job: Job) -> Evaluation:
        seen.append((job.wiring, job.settings))
        return Evaluation(walk_of(10 if job.wiring == wirings[0] else 9), 0.0)

    finalists = [(wirings[0], walk_of(10)), (wirings[1], walk_of(9))]
    found = rechecks(robot, "{}", finalists, settings=WalkSettings(), objective="travel", workers=InProcess(watched))
    assert [r.name for r in found] == [
        "half step",
        "half inertia factor",
        "start moved by 1 mm",
        "second engine, mujoco",
    ]
    assert len(seen) == 8
    assert seen[0][1].step_s == robot.numerics.step_s / 2
    assert seen[2][1].inertia_factor == robot.numerics.inertia_factor / 2
    assert {s.nudge_m for _, s in seen} == {0.0, 1e-3}
    assert verdict(found) == "order kept in 4 of 4 rechecks; a finalist's travel moved by up to 0 %"


def test_an_order_that_hangs_on_the_inertia_factor_is_found_out():
    robot = read_robot(ROW5).robot
    wirings = [Wiring((("a", k),)) for k in (1, 2)]

    def hanging(job: Job) -> Evaluation:
        light = job.settings.inertia_factor == 30.0
        return Evaluation(
            walk_of(8 if light and job.wiring == wirings[0] else 10 if job.wiring == wirings[0] else 9), 0.0
        )

    finalists = [(wirings[0], walk_of(10)), (wirings[1], walk_of(9))]
    found = rechecks(robot, "{}", finalists, settings=WalkSettings(), objective="travel", workers=InProcess(hanging))
    assert [r.name for r in found if not r.order_kept] == ["half inertia factor"]
    assert verdict(found) == "order kept in 3 of 4 rechecks; a finalist's travel moved by up to 20 %"


def test_without_an_inertia_factor_there_is_none_to_halve():
    robot = read_robot(ROW5).robot
    assert "half inertia factor" not in dict(recheck_settings(robot, WalkSettings(inertia_factor=1.0)))
    assert dict(recheck_settings(robot, WalkSettings(inertia_factor=1.5)))["half inertia factor"].inertia_factor == 1.0


def test_other_numerics_change_a_real_walk():
    """Two periods of the row of five: half the step and half the inertia factor each move its travel, so each can tell."""
    file = read_robot(ROW5)
    wiring = wiring_from_text("a=1 b=3 c=5 d=2 e=4", file.robot.inlets(), 5)
    base = WalkSettings(periods=2)
    asked = {"base": base, **{n: s for n, s in recheck_settings(file.robot, base) if n.startswith("half")}}
    text = json.dumps(file.document)
    travel = {name: evaluate(Job(text, wiring, how, name)).walk.travel_m for name, how in asked.items()}
    assert len(travel) == 3
    for name in ("half step", "half inertia factor"):
        assert 1e-4 < abs(travel[name] / travel["base"] - 1.0) < 0.5


def test_the_second_engine_is_the_other_one():
    robot = read_robot(ROW5).robot
    assert recheck_settings(robot, WalkSettings(engine="mujoco"))[-1][1].engine == "pybullet"


def test_direction_from_one_walk_each_is_never_sure():
    a = advice(walk_of(15.4), walk_of(1.5))
    assert (a.choose, a.sure) == (AS_GIVEN, "likely")
    assert "walks on the spot" in a.words
    assert advice(walk_of(10), walk_of(8)).choose == EITHER
    assert advice(walk_of(2), walk_of(9)).choose == REVERSED


def test_direction_from_draws():
    scores = np.column_stack([np.linspace(5, 9, 64), np.linspace(1, 2, 64)])
    a = advice(walk_of(7), walk_of(1.5), scores=scores)
    assert (a.choose, a.sure) == (AS_GIVEN, "sure")
    assert a.words.startswith("Run the wave as given: sure (as given it is the better one in 100 % of 64 draws")
    assert advice(walk_of(1.5), walk_of(7), scores=scores[:, ::-1]).choose == REVERSED


def test_an_even_match_is_not_decided():
    rng = np.random.default_rng(3)
    a = advice(walk_of(5), walk_of(5.1), scores=rng.normal(size=(64, 2)))
    assert a.choose == EITHER and a.words.startswith("No direction is clearly better")


def test_a_reverse_that_falls_is_said():
    assert "does not walk (fell_over)" in advice(walk_of(5), FALLEN).words
    won = advice(walk_of(5), FALLEN, scores=np.array([[5.0, math.nan]] * 32))
    assert (won.choose, won.sure) == (AS_GIVEN, "sure")


def test_backwards_is_said():
    assert "tail first" in advice(walk_of(-2), walk_of(-9)).words


def test_no_draw_walked_falls_back_on_the_walks():
    assert advice(walk_of(9), walk_of(2), scores=np.full((8, 2), math.nan)).choose == AS_GIVEN
