"""The bench test of a restrictor in all four ways, its uncertainty and what it refuses."""

from __future__ import annotations

import dataclasses
import math

import pytest
from scipy.optimize import brentq

from gaitlab.air.bench import (
    KnownReading,
    MeterReading,
    PumpReading,
    Reading,
    RiseReading,
    resistance,
    rise_time_s,
    scaled,
    uncertainty_shares,
)
from gaitlab.air.duct import as_duct, exact_mass_flow
from gaitlab.air.restrictor import equivalent_square, square_for_flow
from gaitlab.air.section import section_of
from gaitlab.air.supply import pump_mass_flow
from gaitlab.errors import InputError
from gaitlab.robot.circuit import BenchRestrictor, RectDuct, RoundDuct, SquareDuct
from tests.air.parts import GAS, ATMOSPHERE_Pa

L_MIN = 1e-3 / 60.0
PUMP = PumpReading(57e3, 41e3, 7 * L_MIN, "mass")
GAUGE = {"dead_end_Pa": 1e3, "reading_Pa": 1e3}


def reading_on_pump(duct: SquareDuct, free_flow_m3_s: float) -> float:
    """Gauge vacuum at which pump (dead end 57 kPa, linear in mass) and channel agree."""

    def excess(vacuum: float) -> float:
        drawn = pump_mass_flow(vacuum, 57e3, free_flow_m3_s, "mass", GAS)[0]
        return exact_mass_flow(duct, ATMOSPHERE_Pa, ATMOSPHERE_Pa - vacuum, GAS) - drawn

    return float(brentq(excess, 1.0, 57e3 - 1.0))


def test_the_bench_readings_57_41_and_0() -> None:
    # Common practice, no source: dead end −57 kPa, one thin channel open −41 kPa, wide open about 0. A 7 L/min pump
    # and a 0.5 mm channel of 10 mm give that; a 1 mm one reads less, a wide leg next to nothing.
    assert reading_on_pump(SquareDuct(0.5e-3, 10e-3), 7 * L_MIN) == pytest.approx(41e3, abs=300)
    assert reading_on_pump(SquareDuct(0.6e-3, 10e-3), 7 * L_MIN) == pytest.approx(33.5e3, abs=1e3)
    assert reading_on_pump(SquareDuct(1.0e-3, 10e-3), 7 * L_MIN) == pytest.approx(12e3, abs=500)
    assert reading_on_pump(SquareDuct(5e-3, 10e-3), 7 * L_MIN) < 100


@pytest.mark.parametrize(("side_mm", "milligram_s"), [(0.5, 39.4), (0.6, 58.7), (1.0, 175.0)])
def test_flows_at_the_reading_computed_independently(side_mm: float, milligram_s: float) -> None:
    # 101.3 → 60.3 kPa.
    found = exact_mass_flow(SquareDuct(1e-3 * side_mm, 10e-3), 101.3e3, 60.3e3, GAS)
    assert 1e6 * found == pytest.approx(milligram_s, rel=5e-3)


def test_by_the_pump_curve() -> None:
    found = resistance(PUMP, GAS, GAUGE)
    assert found.flow_fraction == pytest.approx(1 - 41 / 57)
    assert 1e6 * found.mass_flow_kg_s == pytest.approx(39.4, rel=2e-3)
    assert found.square.side_m == pytest.approx(0.5e-3, rel=2e-3)


def test_one_kilopascal_of_gauge_noise_is_7_7_percent_of_flow() -> None:
    # Closed form: dm/m = √(1 + (V/V0)²)/(V0 − V) per Pa on both readings.
    found = resistance(PUMP, GAS, GAUGE)
    assert found.relative_uncertainty == pytest.approx(math.hypot(1, 41 / 57) / 16, rel=1e-4)
    assert found.relative_uncertainty == pytest.approx(0.077, abs=5e-4)
    low, high = found.square_range_m
    assert low < found.square.side_m < high


def test_by_a_flow_meter() -> None:
    flow = exact_mass_flow(SquareDuct(0.6e-3, 10e-3), ATMOSPHERE_Pa, ATMOSPHERE_Pa - 30e3, GAS)
    found = resistance(MeterReading(30e3, flow / 1.185), GAS, {"meter_m3_s": 0.05 * flow / 1.185})
    assert found.square.side_m == pytest.approx(0.6e-3, rel=1e-6)
    assert found.flow_fraction is None
    assert found.shares == (("meter_m3_s", pytest.approx(0.05)),)


@pytest.mark.parametrize("free_L_min", [4.0, 12.0])
def test_by_a_known_restrictor_the_free_flow_cancels(free_L_min: float) -> None:
    known, unknown = SquareDuct(0.5e-3, 10e-3), SquareDuct(0.7e-3, 10e-3)
    readings = [reading_on_pump(duct, free_L_min * L_MIN) for duct in (unknown, known)]
    found = resistance(KnownReading(57e3, readings[0], known, readings[1], "mass"), GAS, GAUGE | {"known_scale": 0.1})
    assert found.square.side_m == pytest.approx(0.7e-3, rel=1e-6)
    # Two restrictors on one pump: m_A/m_B = (57 − g_A)/(57 − g_B).
    ratio = (57e3 - readings[0]) / (57e3 - readings[1])
    assert found.mass_flow_kg_s == pytest.approx(
        ratio * exact_mass_flow(known, ATMOSPHERE_Pa, ATMOSPHERE_Pa - readings[1], GAS), rel=1e-9
    )
    # A size off by 10 % is a flow off by about 22 % (0.5 mm ± 0.05 mm).
    assert dict(found.shares)["known_scale"] == pytest.approx(0.22, abs=0.02)


def test_by_the_rate_of_rise() -> None:
    # 100 mL from −57 to −41 kPa through 0.5 mm takes 0.466 s (computed independently).
    reading = RiseReading(57e3, 41e3, 100e-6, 0.466)
    assert rise_time_s(SquareDuct(0.5e-3, 10e-3), reading, GAS) == pytest.approx(0.466, rel=2e-3)
    found = resistance(reading, GAS, GAUGE | {"volume_m3": 2e-6, "rise_s": 0.01, "polytropic": 0.12})
    assert found.square.side_m == pytest.approx(0.5e-3, rel=2e-3)
    assert found.mass_flow_kg_s == pytest.approx(100e-6 / GAS.RT * 16e3 / 0.466)
    assert [name for name, _ in found.shares] == ["dead_end_Pa", "reading_Pa", "volume_m3", "rise_s", "polytropic"]


def test_laminar_rise_is_the_closed_form() -> None:
    # A channel so thin that all is laminar: g by artanh must be 1/a of the channel.
    tube = SquareDuct(20e-6, 10e-3)
    time_s = rise_time_s(tube, RiseReading(57e3, 41e3, 1e-9, 1.0), GAS)
    found = resistance(RiseReading(57e3, 41e3, 1e-9, time_s), GAS, {})
    assert found.square.side_m == pytest.approx(20e-6, rel=1e-5)
    linear = section_of(tube).laminar_Pa2_s_per_kg(GAS.viscosity_Pa_s(), GAS.RT)
    assert found.laminar_kg_s_Pa2 * linear == pytest.approx(1.0, rel=2e-3)


def test_all_ways_agree_on_one_channel() -> None:
    duct = SquareDuct(0.55e-3, 10e-3)
    vacuum = reading_on_pump(duct, 7 * L_MIN)
    flow = exact_mass_flow(duct, ATMOSPHERE_Pa, ATMOSPHERE_Pa - vacuum, GAS)
    rise = RiseReading(57e3, vacuum, 100e-6, 1.0)
    known = SquareDuct(0.5e-3, 10e-3)
    readings: list[Reading] = [
        PumpReading(57e3, vacuum, 7 * L_MIN, "mass"),
        MeterReading(vacuum, flow / 1.185),
        KnownReading(57e3, vacuum, known, reading_on_pump(known, 7 * L_MIN), "mass"),
        dataclasses.replace(rise, rise_s=rise_time_s(duct, rise, GAS)),
    ]
    sides = [resistance(reading, GAS, {}).square.side_m for reading in readings]
    assert sides == pytest.approx([0.55e-3] * 4, rel=1e-6)


def test_uncertainty_against_direct_sampling() -> None:
    # Independent route: the spread of the flow over many drawn readings (small errors, so that it is linear).
    import numpy as np

    errors = {"dead_end_Pa": 100.0, "reading_Pa": 100.0, "free_flow_m3_s": 0.01 * 7 * L_MIN}
    draws = np.random.default_rng(5).normal(size=(4000, 3))
    flows = [
        dataclasses.replace(
            PUMP,
            dead_end_Pa=57e3 + 100.0 * d[0],
            reading_Pa=41e3 + 100.0 * d[1],
            free_flow_m3_s=7 * L_MIN * (1 + 0.01 * d[2]),
        ).mass_flow_kg_s(GAS)
        for d in draws
    ]
    expected = math.sqrt(sum(share**2 for _, share in uncertainty_shares(PUMP, GAS, errors)))
    assert float(np.std(flows) / np.mean(flows)) == pytest.approx(expected, rel=0.04)


def test_a_bench_reading_in_a_circuit_is_its_square_channel() -> None:
    reading = BenchRestrictor(57e3, 41e3, 7 * L_MIN, "mass")
    square = equivalent_square(reading, GAS)
    assert as_duct(reading, GAS) == square
    assert exact_mass_flow(reading, ATMOSPHERE_Pa, 60_325.0, GAS) == exact_mass_flow(
        square, ATMOSPHERE_Pa, 60_325.0, GAS
    )
    drawn = pump_mass_flow(41e3, 57e3, 7 * L_MIN, "mass", GAS)[0]
    assert exact_mass_flow(reading, ATMOSPHERE_Pa, 60_325.0, GAS) == pytest.approx(drawn, rel=1e-9)


def test_scaled_ducts_keep_their_length() -> None:
    assert scaled(RectDuct(1e-3, 2e-3, 9e-3), 2.0) == RectDuct(2e-3, 4e-3, 9e-3)
    assert scaled(RoundDuct(1e-3, 9e-3, 0.05), 2.0) == RoundDuct(2e-3, 9e-3, 0.05)


@pytest.mark.parametrize(
    ("reading", "message"),
    [
        (dataclasses.replace(PUMP, reading_Pa=61e3), "reading_kPa must be below the dead-end vacuum of 57 kPa, got 61"),
        (dataclasses.replace(PUMP, reading_Pa=57e3), "reading_kPa must be below the dead-end vacuum"),
        (dataclasses.replace(PUMP, reading_Pa=-1.0), "reading_kPa must be a gauge vacuum above 0"),
        (
            dataclasses.replace(PUMP, dead_end_Pa=102e3),
            "dead_end_kPa must be a gauge vacuum above 0 and below the ambient",
        ),
        (dataclasses.replace(PUMP, reading_Pa=math.nan), "reading_kPa must be a gauge vacuum"),
        (MeterReading(41e3, 0.0), "meter_m3_s must be finite and above 0"),
        (MeterReading(120e3, 1e-5), "reading_kPa must be a gauge vacuum"),
        (
            KnownReading(57e3, 41e3, SquareDuct(1e-3, 10e-3), 58e3, "mass"),
            "reading_kPa must be below the dead-end vacuum",
        ),
        (RiseReading(57e3, 41e3, -1.0, 1.0), "volume_m3 must be finite and above 0"),
        (RiseReading(57e3, 41e3, 1e-4, math.inf), "rise_s must be finite and above 0"),
        (RiseReading(57e3, 41e3, 1e-4, 1e12), "rise_s must be one that a 10 mm long square channel"),
        (MeterReading(41e3, 50.0), "mass flow .* must be one that a 10 mm long square channel"),
    ],
)
def test_impossible_readings_are_refused(reading: Reading, message: str) -> None:
    with pytest.raises(InputError, match=message):
        resistance(reading, GAS, {})


def test_no_channel_passes_a_negative_flow() -> None:
    with pytest.raises(InputError, match="must be one that a 10 mm long square channel"):
        square_for_flow(-1e-6, ATMOSPHERE_Pa, 60e3, GAS)
