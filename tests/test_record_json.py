"""Records survive the way through JSON text; leans on equality of the record with itself."""

from __future__ import annotations

import json
import math

import numpy as np
import pytest

from gaitlab.errors import InputError
from gaitlab.gait.records import Part, Walk, WaveReading
from gaitlab.record_json import record_from_json, record_to_json
from gaitlab.ring.waves import RingRun, Waves


def _walk() -> Walk:
    return Walk(
        outcome="walked",
        remedy="",
        engine="pybullet",
        step_s=1e-3,
        period_s=0.7,
        travel_m=0.011,
        travel_scatter_m=2e-4,
        travels_m=(0.009, 0.0112),
        drift_m=-1e-4,
        turn_rad=0.0,
        slip=0.2,
        duty_factor=(("a", 0.6), ("b", 0.55)),
        stance=(("a", ((0.1, 0.7),)), ("b", ((0.4, 0.95), (0.97, 0.99)))),
        wave=WaveReading("direct", 5.0, 0.9),
        body_length_m=0.16,
        pitch_rad=0.01,
        height_mean_m=0.03,
        height_min_m=0.028,
        stability_margin_m=0.004,
        air_kg_per_m=2e-3,
        simulated_s=7.0,
    )


def _through_text(value: object) -> object:
    return json.loads(json.dumps(record_to_json(value), allow_nan=False))


def test_a_walk_comes_back_equal() -> None:
    walk = _walk()
    assert record_from_json(Walk, _through_text(walk)) == walk


def test_not_finite_becomes_null_and_nan() -> None:
    reading = WaveReading("none", math.nan, math.inf)
    data = _through_text(reading)
    assert data == {"direction": "none", "wavelength_legs": None, "coherence": None}
    back = record_from_json(WaveReading, data)
    assert math.isnan(back.wavelength_legs) and math.isnan(back.coherence)


def test_a_ring_run_keeps_shapes_and_digits() -> None:
    rows = np.linspace(0.0, 5e4, 30).reshape(3, 10) / 3.0
    one = np.array([0.1, 0.2, 0.3])
    ring = RingRun(
        "oscillates", "", 0.7, one, one, one, one, one, one, 1.0, 5e4, 4e4, 1e-5, 1, rows, rows[0],
        Waves(0.7, ("a", "b", "c"), rows), (("gain", 3.0),),
    )  # fmt: skip
    back = record_from_json(RingRun, _through_text(ring))
    np.testing.assert_array_equal(back.waves.vacuum_Pa, rows)
    assert back.waves.vacuum_Pa.dtype == np.float64
    assert back.details == (("gain", 3.0),)


def test_optional_text_comes_back_as_none() -> None:
    part = Part("trunk", "box", (1.0, 2.0, 3.0), (0.0, 0.0, 0.0), None, None)
    assert record_from_json(Part, _through_text(part)) == part


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"step_s": "1 ms"}, r"record.step_s must be of type float, got '1 ms'"),
        ({"outcome": 3}, r"record.outcome must be of type str"),
        ({"wave": []}, r"record.wave must be a JSON object"),
        ({"travels_m": 4.0}, r"record.travels_m must be a list"),
        ({"duty_factor": [["a"]]}, r"record.duty_factor\[0\] must be a list of 2"),
    ],
)
def test_a_wrong_value_names_its_field(change: dict, message: str) -> None:
    with pytest.raises(InputError, match=message):
        record_from_json(Walk, record_to_json(_walk()) | change)


def test_a_missing_field_is_named_and_an_unknown_one_passed_over() -> None:
    data = record_to_json(_walk())
    assert record_from_json(Walk, data | {"later_field": 1}) == _walk()
    del data["slip"]
    with pytest.raises(InputError, match="missing slip"):
        record_from_json(Walk, data)


def test_uneven_rows_are_no_array() -> None:
    with pytest.raises(InputError, match="vacuum_Pa must be a list of numbers of even shape"):
        record_from_json(Waves, {"period_s": 1.0, "inlets": ["a"], "vacuum_Pa": [[1, 2], [3]]})
