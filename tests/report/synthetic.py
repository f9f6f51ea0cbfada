"""Made-up but plausible records for the report's tests: a row of legs, a five-stage ring, a walk and its motion."""

from __future__ import annotations

import itertools
import json
import math
from collections.abc import Mapping
from pathlib import Path
from typing import Any

import numpy as np

from gaitlab.gait.records import Part, Trace, Walk, WaveReading
from gaitlab.record_json import record_to_json
from gaitlab.ring.waves import RingRun, Waves
from gaitlab.trust.sensitivity import Sensitivity
from gaitlab.trust.summary import Chance, Quantiles, WiringSummary
from gaitlab.wiring.wiring import Wiring

LEGS = ("a", "b", "c", "d", "e")
PERIOD_S = 0.9
SWING_PA = 42e3
SEGMENTS = 4
SEGMENT_M = 0.008
SIDE_M = np.array((0.0, 0.015, 0.0))


def wave(phase: np.ndarray) -> np.ndarray:
    """A vacuum wave of period one, slow to fill and quick to vent, 0…1, rising through half swing at phase 0."""
    u = np.mod(phase + 0.13, 1.0)
    rise = (1.0 - np.exp(-u / 0.19)) / (1.0 - math.exp(-0.55 / 0.19))
    fall = np.exp(-(u - 0.55) / 0.05)
    return np.where(u < 0.55, rise, fall)


def phases(stages: int = 5) -> np.ndarray:
    """Lags of an equal ring's outputs behind output 1: half a period and 1/(2N) from stage to stage."""
    return np.mod(np.arange(stages) * (0.5 + 0.5 / stages), 1.0)


def ring_run(wiring: Wiring, *, samples: int = 200) -> RingRun:
    """A five-stage ring at work under `wiring`."""
    lags = phases()
    grid = np.arange(samples) / samples
    outputs = 2e3 + SWING_PA * wave(grid[None, :] - lags[:, None])
    rows = np.stack([outputs[source - 1] for _, source in wiring.pairs if isinstance(source, int)])
    five = np.ones(5)
    return RingRun(
        outcome="oscillates",
        remedy="",
        period_s=PERIOD_S,
        phase=lags,
        duty=0.55 * five,
        peak_vacuum_Pa=outputs.max(axis=1),
        least_vacuum_Pa=outputs.min(axis=1),
        rise_s=0.2 * five,
        fall_s=0.06 * five,
        start_up_s=1.4,
        supply_mean_Pa=49e3,
        supply_min_Pa=46e3,
        air_kg_per_period=1.2e-5,
        harmonic=1,
        output_vacuum_Pa=outputs,
        supply_vacuum_Pa=48e3 + 2e3 * np.sin(2 * np.pi * grid),
        waves=Waves(PERIOD_S, tuple(inlet for inlet, _ in wiring.pairs), rows),
    )


def walk(*, travel_m: float = 0.011, period_s: float = PERIOD_S, shift: float = 0.2) -> Walk:
    """A walk with the given travel; the feet stand one after the other, `shift` of a period apart."""
    stance = tuple((leg, ((i * shift % 1.0, i * shift % 1.0 + 0.62),)) for i, leg in enumerate(LEGS))
    return Walk(
        outcome="walked",
        remedy="",
        engine="pybullet",
        step_s=1e-3,
        period_s=period_s,
        travel_m=travel_m,
        travel_scatter_m=3e-4,
        travels_m=(0.8 * travel_m, travel_m, 1.01 * travel_m, travel_m),
        drift_m=1e-4,
        turn_rad=0.002,
        slip=0.21,
        duty_factor=tuple((leg, 0.62) for leg in LEGS),
        stance=stance,
        wave=WaveReading("direct", 5.0, 0.94),
        body_length_m=0.16,
        pitch_rad=0.01,
        height_mean_m=0.04,
        height_min_m=0.038,
        stability_margin_m=0.012,
        air_kg_per_m=1.1e-3,
        simulated_s=4.5,
    )


def _parts() -> tuple[Part, ...]:
    parts = [Part("trunk", "box", (0.16, 0.03, 0.012), (0.0, 0.0, 0.0), None, None)]
    for leg in LEGS:
        for k in range(SEGMENTS):
            parts.append(Part(f"{leg}.{k + 1}", "capsule", (0.006, SEGMENT_M, 0.0), (0.0, 0.0, 0.0), leg, leg))
        for side in (-0.015, 0.015):
            parts.append(Part(f"{leg}.foot", "sphere", (0.004, 0.0, 0.0), (0.0, side, -SEGMENT_M), None, leg))
    return tuple(parts)


def _leg_poses(bend: float, root: np.ndarray) -> tuple[list[np.ndarray], list[np.ndarray], np.ndarray]:
    """Centres and quaternions of a chain that hangs down from `root` and bends forward by `bend` over its length."""
    centres, turns, at = [], [], root.copy()
    for k in range(SEGMENTS):
        angle = bend * (k + 0.5) / SEGMENTS
        down = np.array([math.sin(angle), 0.0, -math.cos(angle)])
        centres.append(at + 0.5 * SEGMENT_M * down)
        turns.append(np.array([0.0, math.sin(-angle / 2), 0.0, math.cos(-angle / 2)]))
        at = at + SEGMENT_M * down
    return centres, turns, at


def trace(wiring: Wiring, *, periods: int = 4, hz: float = 60.0, travel_m: float = 0.011) -> Trace:
    """Motion of a row of bending legs driven by the ring's waves; the trunk glides forward by `travel_m` a period."""
    time = np.arange(round(periods * PERIOD_S * hz)) / hz
    lags = phases()
    unit = np.stack([wave(time / PERIOD_S - lags[wiring.source(leg) - 1]) for leg in LEGS], axis=1)
    position, quaternion, feet = [], [], []
    for k in range(len(time)):
        x = travel_m * time[k] / PERIOD_S
        trunk = np.array([x, 0.0004 * math.sin(time[k]), 0.043])
        centres, turns, tips = [trunk], [np.array([0.0, 0.0, 0.0, 1.0])], []
        for i in range(len(LEGS)):
            root = trunk + np.array([0.068 - 0.034 * i, 0.0, -0.006])
            leg_centres, leg_turns, tip = _leg_poses(0.9 * unit[k, i], root)
            centres += [*leg_centres, tip - SIDE_M, tip + SIDE_M]
            turns += [*leg_turns, leg_turns[-1], leg_turns[-1]]
            tips.append(tip)
        position.append(centres)
        quaternion.append(turns)
        feet.append(tips)
    return Trace(
        parts=_parts(),
        inlets=LEGS,
        feet=LEGS,
        period_s=PERIOD_S,
        time_s=time,
        position_m=np.array(position),
        quaternion=np.array(quaternion),
        vacuum_Pa=2e3 + SWING_PA * unit,
        loaded=unit < 0.6,
        foot_m=np.array(feet),
    )


BEST = Wiring.of({"a": 1, "b": 4, "c": 2, "d": 5, "e": 3})
OTHER = Wiring.of({"a": 1, "b": 3, "c": 5, "d": 2, "e": 4})
ORDERS = [order for order in itertools.permutations(range(1, 6)) if order[0] == 1]


def ranking_rows(count: int = 24) -> list[dict[str, Any]]:
    """Rows of a made-up ranking, best first, each with its reversed wave."""
    rows = []
    for k in range(count):
        wiring = Wiring.of(dict(zip(LEGS, ORDERS[(k + 13) % 24], strict=True)))
        other = (k + 7) % count
        rows.append(
            {
                "wiring": wiring.as_dict(),
                "rank": k + 1,
                "tied_with_best": k < 2,
                "walk": record_to_json(walk(travel_m=0.0112 - 0.0007 * k)),
                "reversed_wiring": wiring.reversed(5).as_dict(),
                "reversed_rank": other + 1,
                "reversed_walk": record_to_json(walk(travel_m=0.0112 - 0.0007 * other - 0.005)),
            }
        )
    return rows


def _summary(p05: float, p50: float, p95: float, *, best: float, forward: float) -> WiringSummary:
    travel = Quantiles(p05, p50, p95)
    speed = Quantiles(p05 / PERIOD_S, p50 / PERIOD_S, p95 / PERIOD_S)
    sure, never = Chance(1.0, 0.96, 1.0), Chance(0.0, 0.0, 0.04)
    shares = (Chance(forward, forward - 0.03, forward), Chance(best, best - 0.1, best + 0.09))
    return WiringSummary(travel, speed, *shares, ring_fails=never, walks=sure, outcomes=(("walked", 64),))


def spread_json() -> dict[str, Any]:
    """Spread of two finalists and four sensitivities, invented."""
    first = _summary(0.0081, 0.0109, 0.0132, best=0.71, forward=1.0)
    second = _summary(0.0066, 0.0101, 0.0125, best=0.29, forward=0.98)
    shares = [
        Sensitivity("foot.pad.friction", 0.41, 0.34, 0.47),
        Sensitivity("ring.resistor.square_mm", 0.28, 0.21, 0.33),
        Sensitivity("bellows.leg.axial_stiffness_N_m", 0.14, 0.09, 0.2),
        Sensitivity("ring.valve.threshold_kPa", 0.07, 0.02, 0.11),
    ]
    return {
        "draws": 64,
        "seed": 1,
        "wirings": [
            {"wiring": BEST.as_dict(), "summary": record_to_json(first)},
            {"wiring": OTHER.as_dict(), "summary": record_to_json(second)},
        ],
        "sensitivities": record_to_json(shares),
    }


def run_json(document: Mapping[str, Any], text: str) -> dict[str, Any]:
    """What a finished search writes as run.json."""
    return {
        "layout": 1,
        "gaitlab": "0.1.0",
        "versions": {"python": "3.11"},
        "created": "2026-03-02T09:30:00Z",
        "command": "gaitlab search robots/tray_row5.toml --out runs/row5",
        "finished": True,
        "robot": {"path": "tray_row5.toml", "text": text, "document": document},
        "search": {
            "strategy": "exhaustive",
            "objective": "travel",
            "raw": 120,
            "distinct": 24,
            "evaluated": 24,
            "failed": {},
            "simulated_s": 160.0,
            "wall_s": 71.0,
            "seed": 0,
        },
        "ranking": ranking_rows(),
        "rings": {"best": record_to_json(ring_run(BEST)), "reversed": record_to_json(ring_run(BEST.reversed(5)))},
        "rechecks": [
            {"name": "half the step", "order_kept": True, "travel_m": 0.0110, "note": ""},
            {"name": "half inertia factor", "order_kept": True, "travel_m": 0.0112, "note": ""},
            {"name": "second engine", "order_kept": False, "travel_m": 0.0099, "note": "ranks 2 and 3 change places"},
        ],
        "spread": spread_json(),
    }


def write_run(folder: Path, document: Mapping[str, Any], text: str) -> Path:
    """A whole run folder with both traces."""
    from gaitlab.gait.trace_file import write_trace

    (folder / "traces").mkdir(parents=True)
    (folder / "run.json").write_text(json.dumps(run_json(document, text)), encoding="utf-8")
    write_trace(folder / "traces" / "best.npz", trace(BEST))
    write_trace(folder / "traces" / "reversed.npz", trace(BEST.reversed(5), travel_m=0.001))
    return folder
