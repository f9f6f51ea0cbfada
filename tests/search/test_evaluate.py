"""One real evaluation: repeatable to the bit, blind to turns of the ring, its failures named."""

from __future__ import annotations

import dataclasses
import json

import pytest
from search.fakes import task_of
from wiring.robots import row_document

from gaitlab.search.evaluate import BROKE_DOWN, REFUSED, WORKER_LOST, Evaluation, Guarded, Job, evaluate, failed_walk
from gaitlab.search.run import SearchTask, job_of
from gaitlab.search.settings import WalkSettings
from gaitlab.search.strategies.ask_tell import Ask
from gaitlab.search.workers import local_workers
from gaitlab.wiring.wiring import Wiring

TASK = task_of()
SMOOTH = Wiring.of({"a": 1, "b": 3, "c": 5, "d": 2, "e": 4})


def job(wiring: Wiring = SMOOTH, periods: int | None = 2, task: SearchTask = TASK) -> Job:
    return job_of(task, Ask(wiring, periods))


@pytest.mark.slow
def test_a_walk_repeats_to_the_bit_here_and_in_a_worker() -> None:
    here = evaluate(job()).walk
    workers = local_workers(evaluate, 1)
    ((_, there),) = workers.evaluated([job()])
    workers.close()
    assert repr(there.walk) == repr(here) == repr(evaluate(job()).walk)


@pytest.mark.slow
def test_a_ring_from_the_ledger_gives_the_same_walk_as_one_that_is_solved() -> None:
    """The wiring seen from the tail has the same bellows on the same tubes: one load pattern, one solve."""
    flipped = Wiring(tuple((inlet, source) for inlet, source in zip("abcde", (4, 2, 5, 3, 1), strict=True)))
    first = evaluate(job())
    assert first.ring is not None
    for wiring in (SMOOTH, flipped):
        given, solved = evaluate(dataclasses.replace(job(wiring), ring=first.ring)), evaluate(job(wiring))
        assert repr(given.walk) == repr(solved.walk)
        assert given.ring is None and solved.ring == first.ring


@pytest.mark.slow
def test_turning_the_ring_changes_no_travel() -> None:
    """Every output number moved on by one only shifts time: settled travel within the walks' own scatter or 1 %."""
    walks = [evaluate(job(SMOOTH.turned(steps, 5), None)).walk for steps in (0, 1, 3)]
    assert all(walk.outcome == "walked" for walk in walks)
    for walk in walks[1:]:
        assert walk.travel_m == pytest.approx(walks[0].travel_m, rel=0.01, abs=3 * walk.travel_scatter_m)


@pytest.mark.slow
def test_the_beginning_of_a_settled_walk_is_the_short_walk() -> None:
    short, settled = evaluate(job(periods=2)).walk, evaluate(job(periods=None)).walk
    assert short.travels_m == settled.travels_m[:2]
    assert short.travel_m == settled.travels_m[1]


def test_a_ring_that_does_not_start_is_an_outcome_with_a_remedy() -> None:
    document = row_document(5, 5)
    document["ring"]["valve"]["threshold_kPa"] = 70
    weak = dataclasses.replace(TASK, document=document)
    walk = evaluate(dataclasses.replace(job(), document_json=json.dumps(weak.document))).walk
    assert walk.outcome not in ("walked", BROKE_DOWN, REFUSED)
    assert walk.remedy and walk.simulated_s == 0.0


@pytest.mark.slow
def test_a_kept_ring_that_cannot_be_read_is_solved_anew() -> None:
    first = evaluate(job())
    assert first.ring is not None
    for damaged in (b"junk", b"", first.ring[:300] + b"?" * 9 + first.ring[309:]):
        again = evaluate(dataclasses.replace(job(), ring=damaged))
        assert repr(again.walk) == repr(first.walk)
        assert again.ring == first.ring


def test_what_a_model_refuses_is_named() -> None:
    """Half a second a step leaves no room for a period's shape."""
    walk = evaluate(dataclasses.replace(job(), settings=WalkSettings(step_s=0.5))).walk
    assert walk.outcome == REFUSED and "at least 20 steps" in walk.remedy


def coarse_job(wirings: list[Wiring], task: SearchTask = TASK) -> Job:
    return dataclasses.replace(job_of(task, Ask(wirings[0], coarse=True)), more=tuple(wirings[1:]))


@pytest.mark.slow
def test_coarse_walks_repeat_to_the_bit_here_and_in_a_worker() -> None:
    """Also after the rings have been solved for other wirings: what a process remembers changes nothing."""
    bundle = coarse_job(list(TASK.space)[3:9])
    workers = local_workers(Guarded(evaluate), 1)
    ((_, there),) = workers.evaluated([bundle])
    workers.close()
    evaluate(coarse_job(list(TASK.space)[:3]))
    here = evaluate(bundle)
    assert repr((here.walk, here.more)) == repr((there.walk, there.more))
    assert [walk.outcome for walk in (here.walk, *here.more)] == ["walked"] * 6


def test_turning_the_ring_changes_no_coarse_travel_and_equal_tubes_share_one_ring() -> None:
    turned = evaluate(coarse_job([SMOOTH, SMOOTH.turned(1, 5), SMOOTH.turned(3, 5)]))
    travels = [walk.travel_m for walk in (turned.walk, *turned.more)]
    assert travels == pytest.approx([travels[0]] * 3, rel=0.05)
    assert len({walk.period_s for walk in (turned.walk, *turned.more)}) == 1


def test_a_ring_that_does_not_start_is_an_outcome_of_coarse_walks_too() -> None:
    document = row_document(5, 5)
    document["ring"]["valve"]["threshold_kPa"] = 70
    bundle = dataclasses.replace(coarse_job(list(TASK.space)[:2]), document_json=json.dumps(document))
    done = evaluate(bundle)
    assert {walk.outcome for walk in (done.walk, *done.more)} == {evaluate(job(task=weak(document))).walk.outcome}


def weak(document: dict[str, object]) -> SearchTask:
    return dataclasses.replace(TASK, document=document)


def test_a_bundle_that_breaks_down_is_tried_one_by_one() -> None:
    wirings = list(TASK.space)[:4]

    def evaluated(job: Job) -> Evaluation:
        if job.more or job.wiring == wirings[2]:
            raise ZeroDivisionError("a fault")
        return Evaluation(failed_walk(job, "walked", ""), 1.0)

    done = Guarded(evaluated)(coarse_job(wirings))
    assert [walk.outcome for walk in (done.walk, *done.more)] == ["walked", "walked", BROKE_DOWN, "walked"]


def raising(error: BaseException) -> Guarded:
    def evaluated(job: Job) -> Evaluation:
        raise error

    return Guarded(evaluated)


def test_a_guarded_evaluation_always_ends_as_a_walk() -> None:
    broken = raising(ZeroDivisionError("a fault"))(job()).walk
    assert broken.outcome == BROKE_DOWN and "ZeroDivisionError: a fault" in broken.remedy
    assert raising(MemoryError())(job()).walk.outcome == WORKER_LOST


def test_ctrl_c_goes_through_a_guard() -> None:
    with pytest.raises(KeyboardInterrupt):
        raising(KeyboardInterrupt())(job())
