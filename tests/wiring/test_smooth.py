"""Smooth waves: reading the outputs as 1, 3, 5, …, 2, 4, … steps evenly by one Nth of a period."""

from __future__ import annotations

import pytest
from wiring.robots import document, pairs, row

from gaitlab.robot.reader import robot_from_document
from gaitlab.wiring.places import inlet_places
from gaitlab.wiring.smooth import SmoothWaves, ideal_phase, output_at, rows, time_step
from gaitlab.wiring.space import WiringSpace
from gaitlab.wiring.wiring import Wiring


@pytest.mark.parametrize("stages", [3, 5, 7, 9, 15])
def test_stage_lag_is_half_a_period_and_half_an_nth(stages: int) -> None:
    for output in range(1, stages):
        lag = (ideal_phase(output + 1, stages) - ideal_phase(output, stages)) % 1.0
        assert lag == pytest.approx(0.5 + 0.5 / stages)


@pytest.mark.parametrize("stages", [3, 5, 7, 9])
def test_output_at_undoes_time_step(stages: int) -> None:
    assert [time_step(output_at(k, stages), stages) for k in range(stages)] == list(range(stages))


def test_a_row_has_two_smooth_waves_each_the_others_reverse() -> None:
    robot = row(5, 5)
    space = WiringSpace.of(robot)
    waves = SmoothWaves.of(robot, space)
    later, earlier = waves.wirings()
    assert later.text() == "a=1 b=3 c=5 d=2 e=4"
    assert (waves.direction(later), waves.direction(earlier)) == (1, -1)
    assert space.reversed(later) == earlier
    assert [waves.direction(w) for w in space].count(0) == 22


def test_a_turn_keeps_a_wave_smooth_and_open_legs_break_it() -> None:
    robot = row(5, 5, allow_open=True, every_output_used=False)
    waves = SmoothWaves.of(robot, WiringSpace.of(robot))
    smooth = Wiring.of({"a": 1, "b": 3, "c": 5, "d": 2, "e": 4})
    assert [waves.direction(smooth.turned(k, 5)) for k in range(5)] == [1] * 5
    assert waves.direction(Wiring.of({**smooth.as_dict(), "c": "open"})) == 0


def test_two_rows_are_smooth_when_both_are() -> None:
    robot = pairs(3, 3, inlets_per_output_max=2)
    waves = SmoothWaves.of(robot, WiringSpace.of(robot))
    assert rows(robot) == (("l1", "l2", "l3"), ("r1", "r2", "r3"))
    assert sorted(waves.direction(w) for w in waves.wirings()) == [-1, -1, 1, 1]
    counter = Wiring.of({"l1": 1, "r1": 1, "l2": 3, "r2": 2, "l3": 2, "r3": 3})
    assert waves.direction(counter) == 0


def test_a_spine_is_a_row_of_its_own_bellows() -> None:
    robot = robot_from_document(document("worm5"))
    (line,) = rows(robot)
    assert line == robot.inlets()


def test_inlets_are_where_their_legs_and_bellows_are() -> None:
    assert inlet_places(row(5, 5)) == ((0.068, 0.0), (0.034, 0.0), (0.0, 0.0), (-0.034, 0.0), (-0.068, 0.0))
    assert inlet_places(pairs(1, 3, every_output_used=False)) == ((0.042, 0.02), (0.042, -0.02))
    worm = inlet_places(robot_from_document(document("worm5")))
    forward = [place[0] for place in worm]
    assert len(worm) == 5 and forward == sorted(forward, reverse=True)
