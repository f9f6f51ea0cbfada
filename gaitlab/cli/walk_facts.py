"""A walk as commands print it: the keys of --json, and rows for people."""

from __future__ import annotations

import math
from typing import Any

from gaitlab.gait.records import Walk

MILLI = 1e-3


def walk_facts(walk: Walk) -> dict[str, Any]:
    """Measures of a walk keyed as --json prints them, in mm, mm/s, degrees and mg."""
    return {
        "outcome": walk.outcome,
        "travel_mm_per_period": walk.travel_m / MILLI,
        "travel_scatter_mm": walk.travel_scatter_m / MILLI,
        "speed_mm_s": walk.speed_m_s / MILLI,
        "speed_body_lengths_s": walk.speed_m_s / walk.body_length_m,
        "drift_mm_per_period": walk.drift_m / MILLI,
        "turn_deg_per_period": _degrees(walk.turn_rad),
        "slip": walk.slip,
        "duty_factor": dict(walk.duty_factor),
        "stance": {name: [list(stance) for stance in stances] for name, stances in walk.stance},
        "wave": {
            "direction": walk.wave.direction,
            "wavelength_legs": walk.wave.wavelength_legs,
            "coherence": walk.wave.coherence,
        },
        "period_s": walk.period_s,
        "body_pitch_deg": _degrees(walk.pitch_rad),
        "body_height_mm": {"mean": walk.height_mean_m / MILLI, "min": walk.height_min_m / MILLI},
        "stability_margin_mm": walk.stability_margin_m / MILLI,
        "air_mg_per_m": walk.air_kg_per_m * 1e6,
        "travels_mm": [travel / MILLI for travel in walk.travels_m],
        "body_length_mm": walk.body_length_m / MILLI,
        "engine": walk.engine,
        "step_s": walk.step_s,
        "simulated_s": walk.simulated_s,
        "warnings": list(walk.warnings),
    }


def walk_rows(facts: dict[str, Any]) -> list[tuple[str, object]]:
    """Label and value pairs of `walk_facts` for people."""
    wave, height = facts["wave"], facts["body_height_mm"]
    return [
        ("outcome", facts["outcome"]),
        ("period", f"{_text(facts['period_s'], 4)} s"),
        ("travel", f"{_text(facts['travel_mm_per_period'])} ± {_scatter(facts['travel_scatter_mm'])} mm per period"),
        ("speed", f"{_text(facts['speed_mm_s'])} mm/s, {_text(facts['speed_body_lengths_s'], 2)} body lengths/s"),
        ("drift", f"{hundredths(facts['drift_mm_per_period'])} mm per period to the left"),
        ("turn", f"{hundredths(facts['turn_deg_per_period'])}° per period to the left"),
        ("slip", f"{_text(facts['slip'], 2)} times the travel"),
        (
            "wave",
            f"{wave['direction']}, {_text(wave['wavelength_legs'], 2)} legs long, coherence {_text(wave['coherence'], 2)}",
        ),
        ("pitch", f"{_text(facts['body_pitch_deg'], 2)}° nose up"),
        ("height", f"{_text(height['mean'])} mm mean, {_text(height['min'])} mm least"),
        ("stability margin", f"{_text(facts['stability_margin_mm'], 2)} mm at the least"),
        ("air", f"{_text(facts['air_mg_per_m'], 2)} mg per metre"),
        ("engine", f"{facts['engine']}, step {_text(facts['step_s'] * 1e3, 4)} ms"),
    ]


def hundredths(value: float) -> str:
    """To 0.01, a dash for what is not known: more digits of a drift in mm or a turn in degrees are the engine's noise.

    >>> hundredths(-0.0012), hundredths(3.14159), hundredths(float("nan"))
    ('0.00', '3.14', '–')
    """
    return f"{round(value, 2) + 0.0:.2f}" if math.isfinite(value) else "–"


def _scatter(value: float) -> str:
    """A scatter to 0.01; a smaller one is not none."""
    return "under 0.01" if 0.0 <= value < 0.005 else hundredths(value)


def _text(value: float, digits: int = 3) -> str:
    """A number with so many significant digits, a dash where there is none; no exponents below a million."""
    if not math.isfinite(value):
        return "–"
    rounded = float(f"{value:.{digits}g}") + 0.0
    return f"{rounded:.{digits}g}" if abs(rounded) < 10**digits else f"{rounded:.0f}"


def footfall_rows(facts: dict[str, Any]) -> list[list[object]]:
    """Foot, duty factor and stances as rows of a table."""
    return [
        [name, duty, ", ".join(f"{start:.2f}–{end:.2f}" for start, end in facts["stance"][name])]
        for name, duty in facts["duty_factor"].items()
    ]


def _degrees(angle_rad: float) -> float:
    return math.degrees(angle_rad)
