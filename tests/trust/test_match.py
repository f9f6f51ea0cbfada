"""As-built rings recovered from synthetic traces: by an analytic ring quickly, by the real ring's model slowly."""

import dataclasses
import tomllib
from pathlib import Path

import numpy as np
import pytest

from gaitlab.ring.solve import ring_run
from gaitlab.ring.waves import RingRun, Waves
from gaitlab.robot.circuit import (
    BenchRestrictor,
    FixedVacuum,
    IsoPart,
    PumpTable,
    RectDuct,
    RoundDuct,
    SquareDuct,
    Syringe,
)
from gaitlab.robot.reader import read_robot, robot_from_document
from gaitlab.robot.records import Robot
from gaitlab.trust.as_built import (
    AsBuilt,
    StageBuild,
    built_robot,
    conductance_factor,
    opening_text,
    scaled_part,
    scaled_supply,
    stage_parts,
)
from gaitlab.trust.as_built_toml import as_built_toml, flow_part_toml
from gaitlab.trust.diagnosis import cannot_tell, counted_backwards, findings, resting_words
from gaitlab.trust.matching import decided_build, matched
from gaitlab.trust.trace_csv import read_traces
from gaitlab.trust.trace_reading import TraceReading, read_rhythm
from gaitlab.wiring.wiring import Wiring, wiring_from_text
from tests.trust.bench import logged_csv

ROW5 = Path(__file__).parents[2] / "robots" / "tray_row5.toml"
LEGS = ("a", "b", "c", "d", "e")
WIRING = wiring_from_text("a=1 b=3 c=5 d=2 e=4", LEGS, 5)
SAMPLES = 256


@pytest.fixture(scope="module")
def robot() -> Robot:
    return read_robot(ROW5).robot


def formula_ring(robot: Robot, wiring: Wiring) -> RingRun:
    """A made-up ring in closed form: each output an exponential pull and vent, slower with a narrow resistor or more gas.

    It only has to depend on the parts in the ways a ring does; what a fit recovers from it is known exactly.
    """
    n = robot.ring.stages
    parts = [stage_parts(robot, k) for k in range(1, n + 1)]
    opening = np.array([part.side_m / 0.3e-3 for part, _, _ in parts])
    leak = np.array([valve.leak_fraction for _, valve, _ in parts])
    gas = np.array([port_m3 + 2.4e-6 for _, _, port_m3 in parts]) / 3e-6
    pull = 0.12 * gas / opening**2.3
    supply_Pa = 57e3 * (1 - 0.2 * (9.0 / 60e3) / robot.supply.free_flow_m3_s * float(np.mean(opening**2.3)))
    theta = parts[0][1].threshold_Pa / supply_Pa
    lags = 0.05 * gas + pull * np.log(1 / (1 - theta))
    period_s = float(lags.sum())
    starts = np.concatenate([[0.0], np.cumsum(lags)[:-1]]) / period_s
    ceiling = supply_Pa / (1 + 8 * leak / opening**2.3)
    phase = np.arange(SAMPLES) / SAMPLES
    output = np.array(
        [
            _pulse((phase - s) % 1.0, c, p / period_s, 0.06 * g)
            for s, c, p, g in zip(starts, ceiling, pull, gas, strict=True)
        ]
    )
    inlets = np.array([output[wiring.source(leg) - 1] for leg in LEGS])
    blank = np.zeros(n)
    return RingRun(
        outcome="oscillates", remedy="", period_s=period_s, phase=starts, duty=blank, peak_vacuum_Pa=output.max(axis=1),
        least_vacuum_Pa=output.min(axis=1), rise_s=blank, fall_s=blank, start_up_s=0.0, supply_mean_Pa=supply_Pa,
        supply_min_Pa=supply_Pa, air_kg_per_period=0.0, harmonic=1, output_vacuum_Pa=output,
        supply_vacuum_Pa=np.full(SAMPLES, supply_Pa), waves=Waves(period_s, LEGS, inlets),
    )  # fmt: skip


def _pulse(phase: np.ndarray, ceiling: float, pull: float, vent: float) -> np.ndarray:
    up = 1 - np.exp(-phase / pull)
    down = (1 - np.exp(-0.5 / pull)) * np.exp(-(phase - 0.5) / vent)
    return ceiling * np.where(phase < 0.5, up, down)


def off(**stages: StageBuild) -> tuple[StageBuild, ...]:
    return tuple(stages.get(f"stage_{k}", StageBuild()) for k in range(1, 6))


TRUTH = AsBuilt(
    off(
        stage_1=StageBuild(extra_m3=0.5e-6),
        stage_3=StageBuild(opening_factor=0.92),
        stage_4=StageBuild(leak_fraction=0.012),
    ),
    supply_factor=0.85,
)


def reading_of(tmp_path, run: RingRun, **how) -> TraceReading:
    path = logged_csv(tmp_path / "log.csv", run, rate_hz=200 / run.period_s, **how)
    return read_rhythm(read_traces(path, stages=5, inlets=LEGS))


def test_known_parts_are_recovered_from_an_analytic_ring(tmp_path, robot):
    reading = reading_of(tmp_path, formula_ring(built_robot(robot, TRUTH), WIRING))
    match = matched(robot, WIRING, reading, solve=formula_ring)
    assert match.outcome == "matched"
    assert [s.opening_factor for s in match.built.stages] == pytest.approx([1, 1, 0.92, 1, 1], abs=0.012)
    assert match.built.stages[3].leak_fraction == pytest.approx(0.012, abs=0.004)
    assert match.built.stages[0].extra_m3 == pytest.approx(0.5e-6, abs=0.12e-6)
    assert match.built.supply_factor == pytest.approx(0.85, abs=0.02)
    assert match.residual_Pa < 300 < match.before_Pa


def test_the_diagnosis_names_what_was_done_to_the_ring(tmp_path, robot):
    reading = reading_of(tmp_path, formula_ring(built_robot(robot, TRUTH), WIRING))
    match = matched(robot, WIRING, reading, solve=formula_ring)
    told = {f.where: f.words for f in findings(robot, WIRING, reading, match)}
    assert "narrow or partly blocked" in told["opening of stage 3"]
    assert "leaks" in told["leak of stage 4"]
    assert "more gas than drawn" in told["volume of stage 1"]
    assert "it sags" in told["supply flow"]
    assert set(told) <= {"opening of stage 3", "leak of stage 4", "volume of stage 1", "supply flow"}


def test_a_sound_ring_gives_no_findings(tmp_path, robot):
    reading = reading_of(tmp_path, formula_ring(robot, WIRING))
    match = matched(robot, WIRING, reading, solve=formula_ring)
    assert findings(robot, WIRING, reading, match) == ()
    assert decided_build(match) == AsBuilt(off())


def test_only_what_stands_out_goes_into_the_file(tmp_path, robot):
    """Stage 3 is narrow and the pump weak: they are written as fitted, what is within one standard error as drawn."""
    match = matched(
        robot, WIRING, reading_of(tmp_path, formula_ring(built_robot(robot, TRUTH), WIRING)), solve=formula_ring
    )
    kept = decided_build(match)
    assert kept.stages[2].opening_factor == match.built.stages[2].opening_factor != 1.0
    assert kept.supply_factor == match.built.supply_factor
    within = [f for f in match.fitted if f.kind == "opening" and abs(f.value - 1.0) < f.error]
    assert within and all(kept.stages[f.stage - 1].opening_factor == 1.0 for f in within)


def test_a_period_error_is_not_in_the_residual(tmp_path, robot):
    """The same shapes at twice the period: nothing left over, as gauges are compared over their own periods."""
    reading = reading_of(tmp_path, formula_ring(robot, WIRING))
    slow = dataclasses.replace(reading, period_s=2 * reading.period_s)
    match = matched(robot, WIRING, slow, solve=formula_ring)
    assert match.before_Pa < 300.0


def test_a_weak_leg_behind_a_sound_ring_points_to_its_tube(tmp_path, robot):
    run = formula_ring(robot, WIRING)
    vacuum = run.waves.vacuum_Pa.copy()
    vacuum[2] *= 0.8
    leaking = dataclasses.replace(run, waves=dataclasses.replace(run.waves, vacuum_Pa=vacuum))
    reading = reading_of(tmp_path, leaking, inlets=("b", "c"))
    match = matched(robot, WIRING, reading, solve=formula_ring)
    told = findings(robot, WIRING, reading, match)
    assert [f.where for f in told] == ["inlet c"]
    assert "below what output 5 would give it" in told[0].words


def test_what_was_not_measured_is_said(tmp_path, robot):
    reading = reading_of(tmp_path, formula_ring(robot, WIRING), stages=(2, 4), supply=False)
    match = matched(robot, WIRING, reading, solve=formula_ring)
    words = " ".join(cannot_tell(match, reading))
    assert "log supply_kPa" in words and "log inlet_NAME_kPa" in words and "clamp the tube" in words
    assert match.built.stages[0].opening_factor == 1.0


def test_a_ring_that_stands_still_cannot_follow(tmp_path, robot):
    def still(robot: Robot, wiring: Wiring) -> RingRun:
        run = formula_ring(robot, wiring)
        flat = np.full((5, 1), 20e3)
        waves = dataclasses.replace(run.waves, vacuum_Pa=flat)
        return dataclasses.replace(run, outcome="settles", output_vacuum_Pa=flat, supply_vacuum_Pa=flat[0], waves=waves)

    match = matched(robot, WIRING, reading_of(tmp_path, formula_ring(robot, WIRING)), solve=still)
    assert match.outcome == "poor_fit"


def test_gauges_counted_the_wrong_way_round_are_noticed(tmp_path, robot):
    run = formula_ring(robot, WIRING)
    mirrored = dataclasses.replace(run, output_vacuum_Pa=run.output_vacuum_Pa[[0, 4, 3, 2, 1]])
    assert counted_backwards(run, reading_of(tmp_path, mirrored))
    assert not counted_backwards(run, reading_of(tmp_path, run))


def test_a_resting_ring_points_to_the_stage_that_does_not_follow(robot):
    low, high = 3e3, 45e3
    blocked = _resting({1: low, 2: high, 3: low, 4: high, 5: low})
    (words,) = resting_words(robot, blocked)
    assert words.startswith("stage 1 (input 3.0 kPa, output 3.0 kPa) should pull vacuum and does not: resistor blocked")
    stuck = _resting({1: high, 2: low, 3: high, 4: low, 5: high})
    (words,) = resting_words(robot, stuck)
    assert "stage 1 (input 45.0 kPa, output 45.0 kPa) should vent and does not: its valve does not open" in words
    assert "no single stage stands out" in resting_words(robot, _resting({2: high}))[0]


def _resting(levels: dict[int, float]) -> TraceReading:
    nan = float("nan")
    return TraceReading("rests", "", nan, nan, 0, 0, (), (), None, tuple(levels.items()))


@pytest.mark.slow
def test_an_as_built_override_is_recovered_through_the_real_ring(tmp_path, robot):
    """The traces come from the ring solved tightly with stage 3 narrow and a weak pump, the fit solves it loosely."""
    truth = AsBuilt(off(stage_3=StageBuild(opening_factor=0.92)), supply_factor=0.85)
    reading = reading_of(tmp_path, ring_run(built_robot(robot, truth), WIRING), stages=(3,))
    match = matched(robot, WIRING, reading)
    assert match.built.stages[2].opening_factor == pytest.approx(0.92, abs=0.015)
    assert match.built.supply_factor == pytest.approx(0.85, abs=0.03)
    assert "opening of stage 3" in {f.where for f in findings(robot, WIRING, reading, match)}


def test_nothing_off_is_the_robot_itself(robot):
    """The untouched as-built robot differs only in that every stage names its own parts."""
    same = built_robot(robot, AsBuilt(off()))
    assert dataclasses.replace(same, ring=robot.ring) == robot
    assert {stage_parts(same, k) for k in range(1, 6)} == {stage_parts(robot, 1)}


def test_conductance_factor_is_the_exact_models(robot):
    """±0.05 mm on a 0.5 mm square channel is ±22 % of flow (reference model of compressible duct flow)."""
    square = dataclasses.replace(robot.ring, resistor=SquareDuct(0.5e-3, 10e-3), overrides=())
    as_drawn = dataclasses.replace(robot, ring=square)
    for factor, flow in ((0.9, 0.79), (1.1, 1.23)):
        assert conductance_factor(as_drawn, 1, StageBuild(opening_factor=factor)) == pytest.approx(flow, abs=0.02)


PARTS = (
    SquareDuct(0.5e-3, 10e-3),
    RectDuct(0.6e-3, 0.4e-3, 12e-3, 0.4),
    RoundDuct(0.4e-3, 50e-3),
    IsoPart(0.02e-8, 0.4),
    BenchRestrictor(57e3, 41e3, 7e-3 / 60, "mass"),
)


@pytest.mark.parametrize("part", PARTS, ids=lambda p: type(p).__name__)
def test_parts_scale_and_say_so(part):
    assert scaled_part(part, 1.0) == part
    assert scaled_part(scaled_part(part, 1.1), 1 / 1.1) != scaled_part(part, 1.1)
    assert "meant" in opening_text(part, 0.9)


@pytest.mark.parametrize("part", PARTS, ids=lambda p: type(p).__name__)
def test_parts_as_toml_read_back_as_themselves(part):
    document = read_robot(ROW5).document
    document["ring"]["resistor"] = tomllib.loads(f"part = {flow_part_toml(part)}")["part"]
    back = robot_from_document(document).ring.resistor
    assert type(back) is type(part)
    for field in dataclasses.fields(part):
        meant = getattr(part, field.name)
        assert getattr(back, field.name) == (meant if isinstance(meant, str) else pytest.approx(meant, rel=1e-3))


def test_the_toml_puts_the_as_built_ring_into_the_file(robot):
    document = read_robot(ROW5).document
    document["ring"]["stage"] = tomllib.loads(as_built_toml(robot, TRUTH))["ring"]["stage"]
    back, meant = robot_from_document(document), built_robot(robot, TRUTH)
    for stage in range(1, 6):
        (one, one_valve, one_port), (two, two_valve, two_port) = stage_parts(back, stage), stage_parts(meant, stage)
        assert one.side_m == pytest.approx(two.side_m, rel=1e-3)
        assert one_valve.leak_fraction == pytest.approx(two_valve.leak_fraction, rel=0.01)
        assert one_port == pytest.approx(two_port, rel=1e-3)


def test_supplies_scale():
    table = PumpTable((0.0, 30e3), (1e-4, 0.0), 1e-5)
    assert scaled_supply(table, 0.5).table_flow_m3_s == (0.5e-4, 0.0)
    assert scaled_supply(FixedVacuum(50e3), 0.9).vacuum_Pa == pytest.approx(45e3)
    syringe = Syringe(1e-5, (0.0, 1.0), (0.0, 1e-5))
    assert scaled_supply(syringe, 0.5) == syringe
