"""Walks against invariants: mirror, time shift, slope, payload, repetition, and the two engines against each other."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from gaitlab.errors import InputError
from gaitlab.gait.walk import walk
from gaitlab.ring.waves import RingRun, Waves
from gaitlab.wiring.wiring import wiring_from_text
from tests.gait.walks import BEST, HEX6, ROW5, ideal_walk, mirrored, on_slope, with_payload

ENGINES = ("pybullet", "mujoco")
UNEVEN = "l1=1 r1=1 l2=2 r2=3 l3=2 r3=3"  # a gait that drifts and turns


@pytest.mark.parametrize("engine", ENGINES)
def test_a_mirrored_robot_walks_the_mirrored_path(engine: str) -> None:
    plain, _ = ideal_walk(HEX6, UNEVEN, periods=3, engine=engine)
    image, _ = ideal_walk(mirrored(HEX6), UNEVEN, periods=3, engine=engine)
    assert abs(plain.turn_rad) > 0.01
    assert image.travel_m == pytest.approx(plain.travel_m, abs=3e-4)
    assert image.drift_m == pytest.approx(-plain.drift_m, abs=3e-4)
    assert image.turn_rad == pytest.approx(-plain.turn_rad, abs=6e-3)


@pytest.mark.parametrize("engine", ENGINES)
def test_the_start_phase_does_not_change_the_settled_gait(engine: str) -> None:
    plain, _ = ideal_walk(ROW5, BEST["tray_row5"], engine=engine)
    later, _ = ideal_walk(ROW5, BEST["tray_row5"], engine=engine, start_phase=0.37)
    assert later.travel_m == pytest.approx(plain.travel_m, rel=0.01)
    assert later.wave.direction == plain.wave.direction
    for (name, duty), (_, again) in zip(plain.duty_factor, later.duty_factor, strict=True):
        # A sliding foot hops in MuJoCo, and a hop may be read as a short swing.
        assert again == pytest.approx(duty, abs=0.03 if engine == "pybullet" else 0.12), name
    (start, _), *_ = dict(plain.stance)["a"]
    (shifted, _), *_ = dict(later.stance)["a"]
    assert abs((shifted - start + 0.5) % 1.0 - 0.5) < 0.03, "stances are told in phases of the wave"


@pytest.mark.parametrize("engine", ENGINES)
def test_uphill_is_slower_and_downhill_faster(engine: str) -> None:
    travels = [
        ideal_walk(on_slope(ROW5, math.radians(deg)), BEST["tray_row5"], engine=engine, periods=2)[0].travel_m
        for deg in (-5, 0, 5)
    ]
    assert travels[0] > travels[1] > travels[2]


@pytest.mark.parametrize("engine", ENGINES)
def test_past_the_friction_angle_it_slides_down_like_a_block(engine: str) -> None:
    # atan 0.6 = 31°. A block slides g (sin α − μ cos α) t²/2; the walk is read from 0.5 s (settling) to 1.1 s.
    holds, slides = (
        ideal_walk(on_slope(ROW5, math.radians(deg)), BEST["tray_row5"], periods=1, engine=engine)[0]
        for deg in (29, 39)
    )
    acceleration = 9.80665 * (math.sin(math.radians(39)) - 0.6 * math.cos(math.radians(39)))
    assert abs(holds.travel_m) < 0.05
    assert slides.travel_m == pytest.approx(-0.5 * acceleration * (1.1**2 - 0.5**2), rel=0.05)


def test_a_payload_presses_the_body_down_and_changes_the_travel() -> None:
    light, _ = ideal_walk(ROW5, BEST["tray_row5"], periods=3)
    heavy, _ = ideal_walk(with_payload(ROW5, 0.040), BEST["tray_row5"], periods=3)
    assert heavy.height_mean_m < light.height_mean_m - 1e-4
    assert abs(heavy.travel_m - light.travel_m) > 10 * light.travel_scatter_m


@pytest.mark.parametrize("engine", ENGINES)
def test_a_walk_repeats_to_the_bit(engine: str) -> None:
    first, again = (ideal_walk(ROW5, BEST["tray_row5"], periods=2, engine=engine, trace_hz=20) for _ in range(2))
    assert repr(first[0]) == repr(again[0])
    assert first[1] is not None and again[1] is not None
    np.testing.assert_array_equal(first[1].position_m, again[1].position_m)


def test_engines_agree_on_a_distance_within_its_trust() -> None:
    # A distance is good to 20–30 % (body of the README); the order of these two gaits is not in doubt.
    for wiring in (BEST["tray_row5"], "a=1 b=2 c=3 d=4 e=5"):
        bullet, mujoco = (ideal_walk(ROW5, wiring, engine=engine, period_s=0.8)[0] for engine in ENGINES)
        assert mujoco.travel_m == pytest.approx(bullet.travel_m, rel=0.2)


def test_tracing_does_not_touch_the_walk_and_holds_what_drove_it() -> None:
    plain, none = ideal_walk(ROW5, BEST["tray_row5"], periods=1)
    traced, trace = ideal_walk(ROW5, BEST["tray_row5"], periods=1, trace_hz=50)
    assert none is None and trace is not None
    assert repr(plain) == repr(traced)
    assert trace.position_m.shape == (len(trace.time_s), len(trace.parts), 3)
    assert trace.time_s[0] == 0.0 and trace.time_s[-1] <= 0.6 + 1e-9
    phase = trace.time_s[:, None] / 0.6
    lag = np.array([0.0, 0.2, 0.4, 0.6, 0.8])  # alternate: outputs 1, 3, 5, 2, 4 in time order, wired to a, b, c, d, e
    expected = 25e3 * (1 + np.sin(2 * np.pi * (phase - lag)))
    np.testing.assert_allclose(trace.vacuum_Pa, expected, atol=25e3 * 2 * np.pi / 600)
    np.testing.assert_allclose(np.linalg.norm(trace.quaternion, axis=2), 1.0, atol=1e-6)


def test_a_fixed_number_of_periods_reads_the_last_of_them() -> None:
    one, _ = ideal_walk(ROW5, BEST["tray_row5"], periods=1)
    two, _ = ideal_walk(ROW5, BEST["tray_row5"], periods=2)
    five, _ = ideal_walk(ROW5, BEST["tray_row5"], periods=5)
    assert (one.travel_m, two.travel_m) == (one.travels_m[0], two.travels_m[1])
    assert five.travel_m == pytest.approx(float(np.mean(five.travels_m[2:])))
    assert two.travels_m == five.travels_m[:2]
    assert math.isnan(two.travel_scatter_m) and five.travel_scatter_m < 1e-3
    assert two.simulated_s == pytest.approx(ROW5.numerics.settle_s + 2 * 0.6)


def test_a_walk_that_may_not_scatter_is_never_settled_but_measured() -> None:
    strict = replace(ROW5, numerics=replace(ROW5.numerics, periods_max=3))
    walked, _ = ideal_walk(strict, BEST["tray_row5"])
    assert walked.outcome == "never_settled" and walked.remedy
    assert len(walked.travels_m) == 3 and math.isfinite(walked.travel_m)


def resting_ring(outcome: str) -> RingRun:
    rest = np.zeros((5, 1))
    none = np.full(5, np.nan)
    return RingRun(
        outcome=outcome,
        remedy="a stronger pump",
        period_s=math.nan,
        phase=none,
        duty=none,
        peak_vacuum_Pa=np.zeros(5),
        least_vacuum_Pa=np.zeros(5),
        rise_s=none,
        fall_s=none,
        start_up_s=math.nan,
        supply_mean_Pa=0.0,
        supply_min_Pa=0.0,
        air_kg_per_period=math.nan,
        harmonic=0,
        output_vacuum_Pa=rest,
        supply_vacuum_Pa=np.zeros(1),
        waves=Waves(math.nan, ROW5.inlets(), rest),
    )


def test_a_ring_that_rests_hands_on_its_outcome_and_remedy() -> None:
    wiring = wiring_from_text(BEST["tray_row5"], ROW5.inlets(), 5)
    walked, trace = walk(ROW5, wiring, resting_ring("too_weak"))
    assert (walked.outcome, walked.remedy, trace) == ("too_weak", "a stronger pump", None)
    assert math.isnan(walked.travel_m) and walked.simulated_s == 0.0


def test_wirings_and_engines_that_do_not_fit_are_refused() -> None:
    wrong = wiring_from_text("a=1 b=2", ("a", "b"), 5)
    with pytest.raises(InputError, match="missing c, d, e"):
        walk(ROW5, wrong, resting_ring("too_weak"))
    with pytest.raises(InputError, match="engine must be one of pybullet, mujoco, got 'other'"):
        ideal_walk(ROW5, BEST["tray_row5"], engine="other", periods=1)
