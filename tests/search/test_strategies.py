"""Strategies on made-up landscapes: the kernel against its definition, the process against linear algebra, finds against chance."""

from __future__ import annotations

import dataclasses
from collections.abc import Callable
from itertools import combinations

import numpy as np
import pytest
from search.fakes import smooth_landscape, task_of
from wiring.robots import pairs, row

from gaitlab.robot.records import Robot
from gaitlab.search.evaluate import Job
from gaitlab.search.run import SearchTask, job_of
from gaitlab.search.strategies.ask_tell import Ask, Reading, Strategy
from gaitlab.search.strategies.candidates import Candidates
from gaitlab.search.strategies.closing import BEST, Closing
from gaitlab.search.strategies.coarse_look import MOST
from gaitlab.search.strategies.exhaustive import Exhaustive
from gaitlab.search.strategies.gaussian import likely_scale, posterior
from gaitlab.search.strategies.kernel import SHARPNESS, WiringKernel, pair_weights
from gaitlab.search.strategies.process_search import ProcessSearch, default_budget
from gaitlab.search.strategies.race import Race
from gaitlab.search.strategies.random_draws import RandomDraws
from gaitlab.search.strategies.screen_search import LEAST, ScreenSearch
from gaitlab.search.strategies.screen_search import default_budget as screen_budget
from gaitlab.search.strategies.settling import Settling
from gaitlab.wiring.smooth import SmoothWaves, ideal_phase
from gaitlab.wiring.space import WiringSpace
from gaitlab.wiring.wiring import HELD, OPEN, Wiring

Score = Callable[[Ask], float]


def run(strategy: Strategy, score: Score) -> dict[Ask, float]:
    """Plays a strategy against a score; every ask and what it was told."""
    told: dict[Ask, float] = {}
    while asks := strategy.ask():
        readings = [Reading(ask, score(ask), 0.0, "walked") for ask in asks]
        told.update((r.ask, r.score) for r in readings)
        strategy.tell(readings)
    return told


def landscape(task: SearchTask) -> Score:
    return lambda ask: smooth_landscape(job_of(task, ask))


def alike(one: Wiring, other: Wiring, space: WiringSpace) -> float:
    """The kernel as it is defined, pair of legs by pair of legs, for legs at different places."""
    total, weights = 0.0, 0.0
    for i, j in combinations(range(len(one.pairs)), 2):
        sources = [one.pairs[i][1], one.pairs[j][1], other.pairs[i][1], other.pairs[j][1]]
        weight = 1.0 / float(np.sum(np.subtract(space.places[i], space.places[j]) ** 2))
        total += weight * pair_term(sources, space.stages)
        weights += weight
    return float(np.exp(SHARPNESS * (total / weights - 1.0)))


def pair_term(sources: list[int | str], stages: int) -> float:
    a, b, c, d = sources
    if not same_kind(a, c) or not same_kind(b, d):
        return 0.0
    if all(isinstance(s, int) for s in sources):
        p, q, r, s = (ideal_phase(int(x), stages) for x in sources)
        return float(np.cos(2 * np.pi * ((p - q) - (r - s))))
    return 1.0


def same_kind(a: int | str, b: int | str) -> bool:
    return a == b if OPEN in (a, b) or HELD in (a, b) else True


ROBOTS: dict[str, Robot] = {
    "row": row(5, 5),
    "row with open and held": row(4, 5, allow_open=True, allow_held=True, every_output_used=False),
    "pairs": pairs(3, 3, inlets_per_output_max=2),
}


@pytest.mark.parametrize("name", ["row", "row with open and held"])
def test_kernel_is_its_definition(name: str) -> None:
    space = WiringSpace.of(ROBOTS[name])
    wirings = list(space)[:40]
    kernel = WiringKernel(space)
    values = kernel.between(kernel.features(wirings[:7]), kernel.features(wirings))
    wanted = [[alike(a, b, space) for b in wirings] for a in wirings[:7]]
    np.testing.assert_allclose(values, wanted, atol=1e-12)


@pytest.mark.parametrize("name", ROBOTS)
def test_kernel_sees_no_difference_between_equals_and_is_positive(name: str) -> None:
    space = WiringSpace.of(ROBOTS[name])
    kernel = WiringKernel(space)
    for wiring in list(space)[::5]:
        images = kernel.features(space.orbit(wiring))
        assert images.shape[0] == (1 if space.mirror is None else 2)
        np.testing.assert_allclose(kernel.between(images, images), 1.0, atol=1e-12)
    features = kernel.features(list(space)[:60])
    values = kernel.between(features, features)
    np.testing.assert_allclose(values, values.T, atol=1e-12)
    assert np.linalg.eigvalsh(values).min() > -1e-10


def test_pairs_weigh_the_inverse_square_of_their_distance() -> None:
    """Three legs 1 and 2 apart: shares 36, 4 and 9 of 49; two inlets at one place count as near as the nearest others."""
    np.testing.assert_allclose(pair_weights(np.array([[0.0, 0.0], [1.0, 0.0], [3.0, 0.0]])) * 49, [36, 4, 9])
    np.testing.assert_allclose(pair_weights(np.array([[0.0, 0.0], [0.0, 0.0], [0.0, 2.0]])) * 3, [1, 1, 1])
    np.testing.assert_allclose(pair_weights(np.zeros((3, 2))) * 3, [1, 1, 1])


def test_process_is_the_textbook_formula() -> None:
    """Conditional normal distribution by plain matrix inversion."""
    rng = np.random.default_rng(1)
    places = rng.normal(size=(9, 2))
    whole = np.exp(-np.sum((places[:, None] - places[None]) ** 2, axis=-1))
    readings = rng.normal(size=6) + 3.0
    scale = likely_scale(whole[:6, :6], readings, noise=0.01)
    mean, deviation = posterior(whole[:6, :6], readings, scale, noise=0.01).predicted(whole[6:, :6])
    inverse = np.linalg.inv(whole[:6, :6] + 0.01 * np.eye(6))
    middle = np.mean(readings)
    spread = np.sqrt((readings - middle) @ inverse @ (readings - middle) / 6)
    wanted = middle + whole[6:, :6] @ inverse @ (readings - middle)
    variance = spread**2 * (1.0 - np.diag(whole[6:, :6] @ inverse @ whole[:6, 6:]))
    np.testing.assert_allclose(mean, wanted, rtol=1e-9)
    np.testing.assert_allclose(deviation, np.sqrt(variance), rtol=1e-9)


def test_process_of_equal_readings_expects_the_same_everywhere() -> None:
    readings = np.full(3, 2.5)
    mean, _ = posterior(np.eye(3), readings, likely_scale(np.eye(3), readings)).predicted(np.zeros((2, 3)))
    np.testing.assert_array_equal(mean, 2.5)


@pytest.mark.parametrize("seed", range(5))
def test_process_search_finds_the_best_of_720_with_70_walks(seed: int) -> None:
    task = task_of(7, 7)
    best = max(landscape(task)(Ask(wiring)) for wiring in task.space)
    told = run(ProcessSearch(task.space, (), 70, seed), landscape(task))
    assert len(told) <= 70
    assert max(score for ask, score in told.items() if ask.settled) == best


def test_process_search_beats_chance_where_the_space_cannot_be_listed() -> None:
    task = task_of(9, 9)
    drawn = max(run(RandomDraws(task.space, 80, 1), landscape(task)).values())
    found = max(run(ProcessSearch(task.space, (), 80, 1), landscape(task)).values())
    assert found > drawn


def test_process_search_bears_failed_walks() -> None:
    task = task_of(5, 5)

    def often_nan(ask: Ask) -> float:
        return float("nan") if ask.wiring.source("b") in (2, 3) else landscape(task)(ask)

    told = run(ProcessSearch(task.space, (), 24, 1), often_nan)
    assert np.isfinite(max(score for ask, score in told.items() if ask.settled))
    assert all(np.isnan(v) for v in run(ProcessSearch(task.space, (), 24, 1), lambda ask: float("nan")).values())


def coarsely(exact: Score, error: float) -> Score:
    """Coarse walks that are too long by a third, offset, and off by an error that has nothing to do with the wiring's kin."""

    def score(ask: Ask) -> float:
        if not ask.coarse:
            return exact(ask)
        value = exact(Ask(ask.wiring))
        return 1.3 * value + 1e-3 + error * float(np.sin(1e7 * value))

    return score


def settled_of(told: dict[Ask, float]) -> dict[Ask, float]:
    return {ask: score for ask, score in told.items() if ask.settled}


@pytest.mark.parametrize("error", [0.0, 3e-4, 1e-3])
def test_screening_finds_the_best_of_720_with_14_settled_walks(error: float) -> None:
    """The best of the landscape, 4.1 mm, is 1.3 mm above the next."""
    task = task_of(7, 7)
    told = run(ScreenSearch(task.space, (), None, 1), coarsely(landscape(task), error))
    settled = settled_of(told)
    assert len(told) - len(settled) == 720 and LEAST <= len(settled) <= screen_budget(task.space) == 14
    assert max(settled.values()) == max(landscape(task)(Ask(wiring)) for wiring in task.space)


def test_screening_stops_soon_where_coarse_walks_are_right_and_goes_on_where_they_are_not() -> None:
    """On a landscape with a flat top: the better coarse walks tell the wirings apart, the sooner the rest is out of reach."""
    task = task_of(7, 7)
    exact = landscape(task)

    def flat(ask: Ask) -> float:
        return float(1e-3 * np.tanh(exact(ask) / 3e-3))

    numbers = [
        len(settled_of(run(ScreenSearch(task.space, (), 60, 1), coarsely(flat, error)))) for error in (0.0, 1e-4, 1e-3)
    ]
    assert LEAST <= numbers[0] <= numbers[1] < numbers[2]


def test_screening_looks_at_a_part_of_a_space_that_cannot_be_listed_and_beats_chance() -> None:
    task = task_of(9, 9)
    told = run(ScreenSearch(task.space, (), 20, 1), coarsely(landscape(task), 1e-4))
    coarse = [ask.wiring for ask in told if ask.coarse]
    assert len(coarse) == len(set(coarse)) == MOST
    drawn = max(run(RandomDraws(task.space, 400, 1), landscape(task)).values())
    assert max(settled_of(told).values()) > drawn


def test_screening_bears_failed_walks_of_both_kinds() -> None:
    task = task_of(5, 5)

    def often_nan(ask: Ask) -> float:
        failed = (2, 3) if ask.coarse else (3, 4)
        return float("nan") if ask.wiring.source("b") in failed else landscape(task)(ask)

    told = run(ScreenSearch(task.space, (), 24, 1), often_nan)
    assert np.isfinite(max(settled_of(told).values()))
    assert len(run(ScreenSearch(task.space, (), 24, 1), lambda ask: float("nan"))) == 48


def test_screening_ties_both_kinds_together_as_the_process_with_a_line_would() -> None:
    """Expected settled scores against the conditional normal distribution, by plain matrix inversion."""
    space = task_of(5, 5).space
    wirings = list(space)
    rng = np.random.default_rng(2)
    coarse = dict(zip(wirings, rng.normal(size=24), strict=True))
    search = ScreenSearch(space, (), None, 1)
    search.tell([Reading(Ask(w, coarse=True), score, 0.0, "walked") for w, score in coarse.items()])
    walked = {w: 1.2 * coarse[w] + 0.3 + 0.1 * rng.normal() for w in wirings[:6]}
    mean, deviation = search._expected_of(wirings[6:], walked)
    along = (np.array(list(coarse.values())) - np.mean(list(coarse.values()))) / np.std(list(coarse.values()))
    kernel = WiringKernel(space)
    features = kernel.features(wirings)
    whole = kernel.between(features, features) + 1.0 + np.outer(along, along)
    error = np.array([walked[w] - coarse[w] for w in wirings[:6]])
    inverse = np.linalg.inv(whole[:6, :6] + 0.2 * np.eye(6))
    spread = error @ inverse @ error / 6
    np.testing.assert_allclose(mean, [coarse[w] for w in wirings[6:]] + whole[6:, :6] @ inverse @ error, rtol=1e-9)
    left = np.diag(whole)[6:] + 0.2 - np.diag(whole[6:, :6] @ inverse @ whole[:6, 6:])
    np.testing.assert_allclose(deviation, np.sqrt(spread * left), rtol=1e-9)


def test_race_settles_only_those_that_may_still_win() -> None:
    """Short walks off by at most 0.5 µm: the best of 720 is found with few settled walks."""
    task = task_of(7, 7)
    exact = landscape(task)

    def noisy(ask: Ask) -> float:
        return exact(ask) + (5e-7 * np.sin(1e6 * exact(ask)) if ask.periods else 0.0)

    told = run(Race(task.space, None, 1), noisy)
    settled = {ask: score for ask, score in told.items() if ask.settled}
    assert max(settled.values()) == max(exact(Ask(wiring)) for wiring in task.space)
    assert len(told) - len(settled) == 720 and len(settled) <= 20


def test_race_with_a_budget_runs_a_part_of_the_space() -> None:
    task = task_of(7, 7)
    told = run(Race(task.space, 60, 1), landscape(task))
    assert 40 <= len(told) <= 60


def test_settling_stops_when_the_rest_is_out_of_reach() -> None:
    wirings = list(task_of(5, 5).space)
    settling = Settling(24)
    settling.tell([Reading(Ask(w, 2), 1.0 - 0.1 * i, 0.0, "walked") for i, w in enumerate(wirings)])
    asked = []
    while asks := settling.ask():
        asked += asks
        settling.tell([Reading(a, 1.0 - 0.1 * wirings.index(a.wiring) + 0.01, 0.0, "walked") for a in asks])
    assert [ask.wiring for ask in asked] == wirings[:4]
    assert settling.error() == pytest.approx(0.01)


def test_settling_goes_on_past_failures() -> None:
    wirings = list(task_of(5, 5).space)
    settling = Settling(6)
    settling.tell([Reading(Ask(w, 2), 1.0, 0.0, "walked") for w in wirings])
    asked = 0
    while asks := settling.ask():
        asked += len(asks)
        settling.tell([Reading(ask, float("nan"), float("nan"), "fell_over") for ask in asks])
    assert asked == 6


def test_closing_walks_the_smooth_waves_and_the_reverse_of_the_best() -> None:
    task = task_of(7, 7)
    smooth = SmoothWaves.of(task.robot, task.space).wirings()
    told = run(Closing(ProcessSearch(task.space, (), 40, 1), task.space, smooth), landscape(task))
    settled = {ask.wiring: score for ask, score in told.items() if ask.settled}
    assert set(smooth) <= set(settled)
    best = sorted(settled, key=lambda w: -settled[w])[:1]
    assert all(task.space.reversed(wiring) in settled for wiring in best)
    assert len(told) <= 40 + len(smooth) + BEST


def test_exhaustive_lists_the_space_and_a_budget_cuts_it() -> None:
    task = task_of(5, 5)
    assert [ask.wiring for ask in run(Exhaustive(task.space), lambda ask: 0.0)] == list(task.space)
    assert len(run(Exhaustive(task.space, 7), lambda ask: 0.0)) == 7


def test_random_draws_differ_and_use_up_a_small_space() -> None:
    task = task_of(5, 5)
    assert {ask.wiring for ask in run(RandomDraws(task.space, 100, 1), lambda ask: 0.0)} == set(task.space)


def test_candidates_of_a_large_space_are_near_the_best_and_at_random() -> None:
    space = WiringSpace.of(row(11, 11))
    candidates = Candidates(space, np.random.default_rng(1))
    best = candidates.drawn(3)
    pool = candidates.near(best)
    assert set(space.neighbours(best[0])) <= set(pool)
    assert len(pool) > len({w for b in best for w in space.neighbours(b)})
    candidates.mark(pool)
    assert not set(candidates.near(best)) & set(pool)


def test_screening_settles_one_in_fifty_within_bounds() -> None:
    assert [screen_budget(WiringSpace.of(row(n, n))) for n in (3, 5, 7, 9)] == [2, 8, 14, 60]


def test_default_budget_is_a_seventh_within_bounds() -> None:
    assert default_budget(WiringSpace.of(row(7, 7))) == 103
    assert default_budget(WiringSpace.of(row(5, 5))) == 24
    assert default_budget(WiringSpace.of(row(9, 9))) == 400


def test_no_strategy_hears_of_the_order_of_evaluation() -> None:
    """A reading names its ask: nothing in it tells when it came."""
    assert {f.name for f in dataclasses.fields(Reading)} == {"ask", "score", "scatter", "outcome"}
    assert {f.name for f in dataclasses.fields(Job)} == {"document_json", "wiring", "settings", "key", "ring", "more"}
