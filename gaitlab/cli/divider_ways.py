"""The four ways to the absolute flow of a bench test, as options of the command line."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import click

from gaitlab.air.bench import KnownReading, MeterReading, PumpReading, Reading, RiseReading
from gaitlab.cli.duct_options import duct_from_sizes
from gaitlab.robot.fields import KILO, MINUTE_LITRE, ML

PERCENT = 0.01
SHARP_INLET = 0.5
# Gas filling a small vessel lies between isothermal (n = 1) and adiabatic (n = 1.4): taken as 1 with this deviation.
POLYTROPIC_ERROR = 0.12

Options = dict[str, Any]
ReadingWithErrors = tuple[Reading, dict[str, float]]


@dataclass(frozen=True)
class Way:
    """One way to the absolute flow: the options it must have, those it may have with their defaults, and its reading."""

    needs: tuple[str, ...]
    defaults: dict[str, float | None]
    reading: Callable[[Options], ReadingWithErrors]


def reading_from(given: Options) -> tuple[str, Reading, dict[str, float]]:
    """The way's name, its reading and its errors [SI]; raises click.UsageError unless the options are one whole way."""
    chosen = [name for name, way in WAYS.items() if given[way.needs[0]] is not None]
    if len(chosen) != 1:
        marks = ", ".join(_spelled(way.needs[0]) for way in WAYS.values())
        raise click.UsageError(f"one absolute flow is needed: give exactly one of {marks}")
    name, way = chosen[0], WAYS[chosen[0]]
    present = {option for option, value in given.items() if value is not None}
    missing = [_spelled(option) for option in way.needs if option not in present]
    foreign = [_spelled(option) for option in sorted(present - {*way.needs, *way.defaults, "reading_kPa"})]
    if missing:
        raise click.UsageError(f"the way by {name} needs {' and '.join(missing)} too")
    if foreign:
        raise click.UsageError(f"the way by {name} makes no use of {' and '.join(foreign)}: leave it out")
    reading, errors = way.reading(way.defaults | {option: given[option] for option in present})
    return name, reading, errors


def _spelled(option: str) -> str:
    return f"--{option.replace('_', '-')}"


def _pump(given: Options) -> ReadingWithErrors:
    free = given["free_flow_L_min"] * MINUTE_LITRE
    reading = PumpReading(given["dead_end_kPa"] * KILO, given["reading_kPa"] * KILO, free, given["curve"])
    return reading, _gauge_errors(given) | {"free_flow_m3_s": given["flow_error_percent"] * PERCENT * free}


def _meter(given: Options) -> ReadingWithErrors:
    flow = given["meter_L_min"] * MINUTE_LITRE
    return MeterReading(given["reading_kPa"] * KILO, flow), {"meter_m3_s": given["flow_error_percent"] * PERCENT * flow}


def _known(given: Options) -> ReadingWithErrors:
    square, bore = given["known_square_mm"], given["known_bore_mm"]
    if (square is None) == (bore is None):
        raise click.UsageError("a known restrictor needs exactly one of --known-square-mm and --known-bore-mm")
    known = duct_from_sizes(square, None, None, bore, given["known_length_mm"], SHARP_INLET)
    vacuums = (given["dead_end_kPa"] * KILO, given["reading_kPa"] * KILO)
    reading = KnownReading(*vacuums, known, given["known_reading_kPa"] * KILO, given["curve"])
    size = square if square is not None else bore
    own = {"known_reading_Pa": given["gauge_error_kPa"] * KILO, "known_scale": given["size_error_mm"] / size}
    return reading, _gauge_errors(given) | own


def _rise(given: Options) -> ReadingWithErrors:
    volume = given["volume_mL"] * ML
    reading = RiseReading(given["dead_end_kPa"] * KILO, given["reading_kPa"] * KILO, volume, given["rise_s"])
    own = {"volume_m3": given["volume_error_percent"] * PERCENT * volume, "rise_s": given["time_error_s"]}
    return reading, _gauge_errors(given) | own | {"polytropic": POLYTROPIC_ERROR}


def _gauge_errors(given: Options) -> dict[str, float]:
    error = given["gauge_error_kPa"] * KILO
    return {"dead_end_Pa": error, "reading_Pa": error}


_GAUGE: dict[str, float | None] = {"gauge_error_kPa": 1.0}
# A way is recognised by its first option. Errors are standard deviations, all chosen by us: a small dial gauge, a
# pump's name plate, a rotameter, a printed channel, a bottle, a stopwatch in the hand.
WAYS = {
    "pump curve": Way(("free_flow_L_min", "dead_end_kPa", "curve"), _GAUGE | {"flow_error_percent": 10.0}, _pump),
    "flow meter": Way(("meter_L_min",), {"flow_error_percent": 5.0}, _meter),
    "known restrictor": Way(
        ("known_reading_kPa", "dead_end_kPa", "curve"),
        _GAUGE | {"size_error_mm": 0.05, "known_length_mm": 10.0, "known_square_mm": None, "known_bore_mm": None},
        _known,
    ),
    "rate of rise": Way(
        ("rise_s", "dead_end_kPa", "volume_mL"), _GAUGE | {"volume_error_percent": 2.0, "time_error_s": 0.1}, _rise
    ),
}
