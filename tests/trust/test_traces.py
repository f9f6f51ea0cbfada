"""Bench traces: what the reader takes and refuses, and what is read off waves whose period and phases are known exactly."""

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from gaitlab.errors import InputError
from gaitlab.trust.trace_csv import BenchTraces, read_traces
from gaitlab.trust.trace_reading import averaged_period, read_rhythm, rise_time, rising_edges

LEGS = ("a", "b", "c")


def written(tmp_path, text: str):
    path = tmp_path / "bench.csv"
    path.write_text(text, encoding="utf-8")
    return path


def rows(count: int, line: str = "{t:.2f},{v:.3f}") -> str:
    return "\n".join(line.format(t=0.1 * i, v=20 + 15 * np.sin(i)) for i in range(count))


def test_all_columns_notes_and_gaps(tmp_path):
    head = "# gauge 7, zeroed\ntime_s, stage_2_kPa, inlet_b_kPa, supply_kPa\n"
    body = "\n".join(
        f"{0.1 * i:.1f}, {10 + i}, , {40}" if i == 5 else f"{0.1 * i:.1f},{10 + i},{5},{40}" for i in range(30)
    )
    traces = read_traces(written(tmp_path, head + body), stages=3, inlets=LEGS)
    assert traces.stages[0][0] == 2 and traces.stages[0][1][3] == 13_000.0
    assert traces.inlets[0][0] == "b" and np.isnan(traces.inlets[0][1][5])
    assert traces.supply_Pa is not None and traces.supply_Pa[0] == 40_000.0


@pytest.mark.parametrize(
    ("text", "says"),
    [
        ("time_s,stage_1_kPa\n" + rows(10), "at least 20 samples"),
        ("t,stage_1_kPa\n" + rows(30), "one named time_s"),
        ("time_s,supply_kPa\n" + rows(30), "at least one stage_K_kPa"),
        ("time_s,stage_4_kPa\n" + rows(30), "stage_1_kPa … stage_3_kPa"),
        ("time_s,stage_1_kPa,inlet_x_kPa\n" + rows(30, "{t:.2f},{v:.3f},1"), "inlet_NAME_kPa of a, b, c"),
        ("time_s,stage_1_kPa,stage_1_kPa\n" + rows(30, "{t:.2f},{v:.3f},1"), "given once"),
        ("time_s,stage_1_kPa\n" + rows(30) + "\n3.1,4,5", "line 32: cells must be 2"),
        ("time_s,stage_1_kPa\n" + rows(30) + "\n3.1,wide", "line 32: stage_1_kPa must be a number"),
        ("time_s,stage_1_kPa\n" + rows(30) + "\n3.1,inf", "must be finite"),
        ("time_s,stage_1_kPa\n" + rows(30) + "\n2.0,5", "line 32: time_s must be later than in the row before"),
        ("time_s,stage_1_kPa\n" + rows(30) + "\n,5", "line 32: time_s must be given in every row"),
        ("time_s,stage_1_kPa\n" + rows(30, "{t:.2f},-{v:.3f}"), "positive below atmosphere"),
        ("time_s,stage_1_kPa\n" + rows(30, "{t:.2f},"), "at least four rows of five"),
    ],
)
def test_what_cannot_be_read_is_told_with_line_and_column(tmp_path, text, says):
    with pytest.raises(InputError, match=says):
        read_traces(written(tmp_path, text), stages=3, inlets=LEGS)


def test_a_file_that_is_none_is_refused(tmp_path):
    with pytest.raises(InputError, match="readable UTF-8 CSV file"):
        read_traces(tmp_path / "absent.csv", stages=3, inlets=LEGS)
    (tmp_path / "binary.csv").write_bytes(b"\xff\xfe\x00\x01" * 50)
    with pytest.raises(InputError, match="readable UTF-8 CSV file"):
        read_traces(tmp_path / "binary.csv", stages=3, inlets=LEGS)


def sines(period_s: float, lags: tuple[float, ...], *, periods: float = 7.3, rate_hz: float = 60.0, noise: float = 0.0):
    """Gauges 20 + 15 sin: the rising edge of lag φ passes the middle at (m + φ) · period."""
    rng = np.random.default_rng(2)
    t = np.arange(0.0, periods * period_s, 1 / rate_hz) + 3.0
    waves = [20e3 + 15e3 * np.sin(2 * np.pi * ((t - 3.0) / period_s - 0.2 - lag)) for lag in lags]
    waves = [w + rng.normal(0, noise, len(t)) for w in waves]
    return BenchTraces(t, tuple(enumerate(waves, start=1)), (), None)


@pytest.mark.parametrize("noise", [0.0, 300.0])
def test_period_and_phases_of_sines(noise):
    """Closed form: period, lags and levels of the sines themselves."""
    reading = read_rhythm(sines(0.83, (0.0, 0.61, 0.2), noise=noise))
    assert reading.outcome == "oscillates"
    assert reading.period_s == pytest.approx(0.83, rel=2e-3)
    assert [g.phase for _, g in reading.stages] == pytest.approx([0.0, 0.61, 0.2], abs=3e-3)
    assert [g.peak_Pa for _, g in reading.stages] == pytest.approx([35e3] * 3, rel=0.01)
    assert [g.least_Pa for _, g in reading.stages] == pytest.approx([5e3] * 3, abs=400)


def test_rise_time_of_a_sine():
    """A sine climbs from 10 % to 90 % of its swing in 2 asin(0.8)/(2π) of a period."""
    wave = 20e3 - 15e3 * np.cos(2 * np.pi * np.arange(480) / 480)
    assert rise_time(wave) == pytest.approx(2 * np.arcsin(0.8) / (2 * np.pi), rel=1e-3)


def test_noise_on_an_edge_makes_no_second_edge():
    t = np.linspace(0, 4, 4001)
    v = 20e3 + 15e3 * np.sin(2 * np.pi * t) + 1.2e3 * np.sin(2 * np.pi * 37 * t)
    assert len(rising_edges(t, v)) == 4 or len(rising_edges(t, v)) == 3
    assert np.diff(rising_edges(t, v)) == pytest.approx(1.0, abs=0.03)


def test_a_flat_line_has_no_edges():
    t = np.linspace(0, 4, 401)
    assert len(rising_edges(t, 30e3 + 200 * np.sin(t))) == 0


def test_averaged_period_of_a_known_wave():
    t = np.linspace(0, 10, 5001)
    mean = averaged_period(t, 1e4 * (t % 1.0), np.arange(0.0, 9.5))
    assert mean[1:] == pytest.approx(1e4 * np.arange(1, 48) / 48, abs=60)


def test_too_short_and_resting_are_outcomes():
    assert read_rhythm(sines(0.8, (0.0, 0.4), periods=1.6)).outcome == "too_short"
    t = np.linspace(0, 5, 200)
    still = BenchTraces(t, ((1, np.full(200, 40e3)), (2, np.full(200, 3e3))), (), None)
    reading = read_rhythm(still)
    assert reading.outcome == "rests"
    assert dict(reading.levels_Pa) == {1: 40e3, 2: 3e3}


CELLS = st.one_of(
    st.floats(allow_nan=True).map(str), st.sampled_from(["", "#", "1,5", "time_s", "é", '"', "0x1", "1e400", "-0"])
)
NAMES = st.sampled_from(
    ["time_s", "stage_1_kPa", "stage_2_kPa", "inlet_a_kPa", "supply_kPa", "stage_0_kPa", "inlet__kPa", ""]
)


@settings(max_examples=150, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(st.lists(NAMES, min_size=1, max_size=5), st.lists(st.lists(CELLS, min_size=1, max_size=5), max_size=40))
def test_whatever_is_in_the_file_it_is_read_or_refused(tmp_path, names, table):
    text = "\n".join([",".join(names), *(",".join(row) for row in table)])
    try:
        traces = read_traces(written(tmp_path, text), stages=3, inlets=LEGS)
    except InputError as error:
        assert "must be" in str(error)
    else:
        assert np.all(np.diff(traces.time_s) > 0)
        assert read_rhythm(traces).outcome in ("oscillates", "rests", "too_short")


@settings(max_examples=60, deadline=None)
@given(st.floats(0.2, 3.0), st.floats(0.05, 0.95), st.floats(3e3, 25e3), st.floats(0.0, 400.0), st.integers(0, 1000))
def test_any_swing_gives_its_period_back(period_s, lag, swing_Pa, noise_Pa, seed):
    """Sines of any period, lag and swing, with noise up to a good part of the swing's guard."""
    rng = np.random.default_rng(seed)
    t = np.arange(0.0, 8.2 * period_s, period_s / 60)
    waves = [30e3 + swing_Pa / 2 * np.sin(2 * np.pi * (t / period_s - 0.3 - x)) for x in (0.0, lag)]
    noisy = [w + rng.normal(0, min(noise_Pa, 0.03 * swing_Pa), len(t)) for w in waves]
    reading = read_rhythm(BenchTraces(t, ((1, noisy[0]), (3, noisy[1])), (), None))
    assert reading.outcome == "oscillates"
    assert reading.period_s == pytest.approx(period_s, rel=0.01)
    assert abs((dict(reading.stages)[3].phase - lag + 0.5) % 1.0 - 0.5) < 0.015
