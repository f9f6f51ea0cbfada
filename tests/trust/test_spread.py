"""The spread's bookkeeping on an analytic robot: the jobs are real documents, the walks a formula instead of a simulation."""

import dataclasses
import json
import math
from pathlib import Path

import numpy as np
import pytest

from gaitlab.errors import InputError
from gaitlab.robot.reader import read_robot
from gaitlab.robot.records import Tolerance
from gaitlab.search.evaluate import Evaluation, Job, evaluate, failed_walk
from gaitlab.search.workers import InProcess
from gaitlab.trust.robust import failing_quantile, robust_ranking
from gaitlab.trust.spread import Request, spread
from gaitlab.trust.tolerances import tolerances_of
from gaitlab.wiring.wiring import Wiring, wiring_from_text

ROW5 = Path(__file__).parents[2] / "robots" / "tray_row5.toml"
LEGS = ("a", "b", "c", "d", "e")
FORWARD = wiring_from_text("a=1 b=3 c=5 d=2 e=4", LEGS, 5)
OTHER = wiring_from_text("a=2 b=1 c=3 d=4 e=5", LEGS, 5)
THIRD = wiring_from_text("a=1 b=2 c=3 d=4 e=5", LEGS, 5)
TOLERANCES = (
    Tolerance("foot.pad.friction", percent=25.0),
    Tolerance("ring.resistor.square_mm", percent=10.0, each="stage"),
    Tolerance("body.leg.a.at_mm.1", plus_minus=2.0),
)


def walked(job: Job, travel_m: float, *, period_s: float = 0.5, drift_m: float = 0.0):
    return dataclasses.replace(
        failed_walk(job, "walked", ""),
        period_s=period_s,
        travel_m=travel_m,
        travel_scatter_m=1e-4,
        drift_m=drift_m,
        turn_rad=0.0,
        body_length_m=0.16,
        air_kg_per_m=1e-3,
        simulated_s=2.0,
    )


def formula(job: Job) -> Evaluation:
    """Travel rises with friction, period with the first resistor; the second wiring likes slippery floors."""
    document = json.loads(job.document_json)
    friction = document["foot"]["pad"]["friction"]
    width = document["ring"]["stage"][0]["resistor"]["square_mm"] if "stage" in document["ring"] else 0.5
    sign = -1 if job.wiring == OTHER else 1
    lift = 0.012 if job.wiring == OTHER else 0.0
    side = document["body"]["leg"][0]["at_mm"][1]
    travel = lift + sign * 0.01 * friction + 2e-6 * side + (1e-3 if job.wiring == THIRD else 0.0)
    return Evaluation(walked(job, travel, period_s=0.2 / width), 0.0)


def request(*wirings: Wiring, draws: int = 64, seed: int = 1, tolerances=TOLERANCES) -> Request:
    document = read_robot(ROW5).document
    document["ring"]["resistor"] = {"square_mm": 0.5, "length_mm": 10}
    document["foot"]["pad"]["friction"] = 0.6
    return Request(tolerances_of(document, tolerances), wirings, draws, seed)


def test_common_draws_compare_wirings_fairly():
    """Third beats first by 1 mm in every single draw although both spread over 3 mm: that is what common draws are for."""
    found = spread(request(FORWARD, THIRD), InProcess(formula))
    first, third = (w.summary for w in found.wirings)
    assert (first.best.share, third.best.share) == (0.0, 1.0)
    assert first.travel_m.p95 - first.travel_m.p05 == pytest.approx(0.9 * 0.003, rel=0.05)


def test_the_order_of_wirings_changes_nothing():
    one = spread(request(FORWARD, OTHER, THIRD), InProcess(formula))
    two = spread(request(THIRD, FORWARD, OTHER), InProcess(formula))
    assert {w.wiring: w for w in one.wirings} == {w.wiring: w for w in two.wirings}


def test_the_order_in_which_walks_end_changes_nothing():
    class Backwards(InProcess):
        def evaluated(self, jobs):
            return reversed(list(super().evaluated(jobs)))

    plain, backwards = (spread(request(FORWARD, OTHER), pool(formula)) for pool in (InProcess, Backwards))
    assert plain.wirings == backwards.wirings
    assert plain.scores.tobytes() == backwards.scores.tobytes()


def test_zero_tolerances_give_zero_spread():
    zero = [dataclasses.replace(t, percent=t.percent and 0.0, plus_minus=t.plus_minus and 0.0) for t in TOLERANCES]
    zero = [dataclasses.replace(t, percent=0.0 if t.plus_minus is None else None) for t in zero]
    (w,) = spread(request(FORWARD, tolerances=zero), InProcess(formula)).wirings
    assert w.summary.travel_m.p05 == w.summary.travel_m.p95
    assert w.summary.speed_m_s.p05 == w.summary.speed_m_s.p95
    assert all(s.share == 0.0 for s in w.sensitivities)


def test_the_number_that_decides_comes_first():
    """Friction alone moves the travel (±25 % of 6 mm against ±4 µm of a leg's place)."""
    (w,) = spread(request(FORWARD), InProcess(formula)).wirings
    assert w.sensitivities[0].name == "foot.pad.friction"
    assert w.sensitivities[0].share == pytest.approx(1.0, abs=0.02)
    assert w.sensitivities[0].low > 0.9


def test_speed_interval_is_read_per_draw():
    """Speed = travel · width / 0.2: its interval comes from the draws, not from dividing the intervals."""
    (w,) = spread(request(FORWARD, draws=256), InProcess(formula)).wirings
    rng = np.random.default_rng(0)
    friction, width = 0.6 * rng.uniform(0.75, 1.25, 100_000), rng.uniform(0.9, 1.1, 100_000)
    reference = np.quantile(0.01 * friction * width * 0.5 / 0.2, (0.05, 0.5, 0.95))
    s = w.summary.speed_m_s
    assert (s.p05, s.p50, s.p95) == pytest.approx(reference, rel=0.01)
    assert w.speed is not None and w.speed.body_lengths_s[1] == pytest.approx(s.p50 / 0.16)


def test_failed_draws_are_counted_and_never_win():
    def fragile(job: Job) -> Evaluation:
        friction = json.loads(job.document_json)["foot"]["pad"]["friction"]
        if friction > 0.675:
            return Evaluation(failed_walk(job, "fell_over", "widen the stance"), 0.0)
        if friction < 0.525:
            return Evaluation(failed_walk(job, "too_weak", "a stronger pump"), 0.0)
        return formula(job)

    (w,) = spread(request(FORWARD), InProcess(fragile)).wirings
    assert dict(w.summary.outcomes) == {"walked": 32, "fell_over": 16, "too_weak": 16}
    assert w.summary.ring_fails.share == 0.25
    assert (w.summary.forward.share, w.summary.best.share) == (0.5, 0.5)


def test_draws_that_lost_a_worker_are_left_out_for_every_wiring():
    """Sixteen of 64 draws lose a worker on one wiring: both wirings are judged on the other 48, and no chance counts them."""

    def losing(job: Job) -> Evaluation:
        lost = job.wiring == FORWARD and int(job.key.split()[0]) % 4 == 0
        return Evaluation(failed_walk(job, "worker_lost", ""), 0.0) if lost else formula(job)

    found = spread(request(FORWARD, OTHER), InProcess(losing))
    assert (found.draws, found.lost, found.scores.shape) == (48, 16, (48, 2))
    for w in found.wirings:
        assert w.summary.walks.share == 1.0 and dict(w.summary.outcomes) == {"walked": 48}


def test_a_spread_that_lost_every_worker_says_so():
    with pytest.raises(InputError, match=r"worker was lost.*fewer --workers"):
        spread(request(FORWARD, draws=4), InProcess(lambda job: Evaluation(failed_walk(job, "worker_lost", ""), 0.0)))


def test_nothing_walked_is_still_a_result():
    (w,) = spread(request(FORWARD), InProcess(lambda job: Evaluation(failed_walk(job, "latches", ""), 0.0))).wirings
    assert w.speed is None and w.sensitivities == () and w.summary.ring_fails.share == 1.0
    assert math.isnan(w.summary.travel_m.p50)


def test_seeds_repeat_bytes():
    once, twice = (spread(request(FORWARD, OTHER, seed=5), InProcess(formula)) for _ in range(2))
    assert once.scores.tobytes() == twice.scores.tobytes()
    assert once.wirings == twice.wirings


def test_ctrl_c_leaves_the_draws_that_ended():
    class Interrupted(InProcess):
        def evaluated(self, jobs):
            for count, pair in enumerate(super().evaluated(jobs)):
                if count == 41:
                    raise KeyboardInterrupt
                yield pair

    found = spread(request(FORWARD, OTHER), Interrupted(formula))
    assert (found.draws, found.finished) == (20, False)
    whole = spread(request(FORWARD, OTHER, draws=20), InProcess(formula))
    assert found.scores.tobytes() == whole.scores.tobytes()


@pytest.mark.parametrize(
    ("bad", "says"),
    [
        (lambda: request(FORWARD, OTHER, FORWARD), "wiring must be given once"),
        (lambda: request(), "wirings must be at least one"),
        (lambda: request(FORWARD, draws=0), "draws must be a whole number of at least 1"),
        (lambda: request(FORWARD, seed="x"), "seed must be a whole number"),
        (
            lambda: request(FORWARD, tolerances=[Tolerance("foot.pad.friction", plus_minus=0.7)]),
            r"draw \d+: foot\.pad\.friction",
        ),
    ],
)
def test_bad_requests_are_refused_before_any_walk(bad, says):
    def never(job: Job) -> Evaluation:
        raise AssertionError("walked")

    with pytest.raises(InputError, match=says):
        spread(bad(), InProcess(never))


def test_robust_ranking_by_median_and_by_a_cautious_quantile():
    """Two analytic wirings: one better in the middle, the other in its worst tenth."""

    def bold_and_steady(job: Job) -> Evaluation:
        friction = json.loads(job.document_json)["foot"]["pad"]["friction"]
        return Evaluation(walked(job, 0.010 + 0.1 * (friction - 0.6) if job.wiring == FORWARD else 0.008), 0.0)

    found = spread(request(OTHER, FORWARD), InProcess(bold_and_steady))
    assert [r.spread.wiring for r in robust_ranking(found)] == [FORWARD, OTHER]
    cautious = robust_ranking(found, quantile=0.1)
    assert [r.spread.wiring for r in cautious] == [OTHER, FORWARD]
    assert cautious[0].quantile_score == 0.008
    assert [r.rank for r in cautious] == [1, 2]


def test_a_wiring_that_fails_too_often_ranks_last():
    assert failing_quantile(np.array([1.0, math.nan, 3.0, 2.0]), 0.1) == -math.inf
    assert failing_quantile(np.array([1.0, math.nan, 3.0, 2.0]), 0.5) == 1.0


@pytest.mark.parametrize("quantile", [-0.1, 1.5, math.nan])
def test_a_quantile_is_a_share(quantile):
    with pytest.raises(InputError, match="quantile must be from 0 to 1"):
        robust_ranking(spread(request(FORWARD, draws=4), InProcess(formula)), quantile=quantile)


def mirrored(document: dict) -> dict:
    """The robot's mirror image: y and heading of every mounting turned, everything else as it was."""

    def turned(part: dict) -> dict:
        x, y, z = part["at_mm"]
        return {**part, "at_mm": [x, -y, z], "heading_deg": -part.get("heading_deg", 0)}

    return {**document, "body": {**document["body"], "leg": [turned(leg) for leg in document["body"]["leg"]]}}


@pytest.mark.slow
def test_a_mirrored_robot_gives_the_mirrored_spread():
    """Real walks of a crooked robot and of its mirror image on the same draws: equal travel, opposite drift and turn."""
    document = read_robot(ROW5).document
    document["body"]["leg"][0]["at_mm"][1] = 4
    document["body"]["leg"][1]["heading_deg"] = 25
    document["body"]["leg"][3]["heading_deg"] = 15
    given = [
        Tolerance("foot.pad.friction", percent=20.0),
        Tolerance("ring.valve.threshold_kPa", percent=10.0, each="stage"),
    ]
    walks = []
    for robot in (document, mirrored(document)):
        kept = []

        def watched(job: Job, kept: list = kept) -> Evaluation:
            done = evaluate(job)
            kept.append(done.walk)
            return done

        found = spread(Request(tolerances_of(robot, given), (FORWARD,), 2, 4), InProcess(watched))
        walks.append((found, kept))
    (one, plain), (two, mirror) = walks
    assert one.scores == pytest.approx(two.scores, rel=0.02)
    for a, b in zip(plain, mirror, strict=True):
        assert b.drift_m == pytest.approx(-a.drift_m, abs=0.02 * abs(a.travel_m))
        assert b.turn_rad == pytest.approx(-a.turn_rad, abs=2e-3)
    assert abs(plain[0].drift_m) > 0.02 * abs(plain[0].travel_m)
