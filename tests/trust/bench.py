"""Synthetic bench traces: what gauges on a ring of known parts would have logged, with noise."""

from __future__ import annotations

from pathlib import Path

import numpy as np

from gaitlab.ring.waves import RingRun


def logged_csv(
    path: Path,
    run: RingRun,
    *,
    stages: tuple[int, ...] = (1, 2, 3, 4, 5),
    inlets: tuple[str, ...] = (),
    supply: bool = True,
    noise_kPa: float = 0.1,
    rate_hz: float = 100.0,
    periods: float = 6.0,
    seed: int = 0,
) -> Path:
    """A CSV file of these gauges, sampled at `rate_hz` over `periods`, from an arbitrary moment on."""
    rng = np.random.default_rng(seed)
    time_s = np.arange(0.0, periods * run.period_s, 1 / rate_hz)
    phase = (time_s / run.period_s + 0.37) % 1.0
    columns = {f"stage_{k}_kPa": run.output_vacuum_Pa[k - 1] for k in stages}
    columns |= {f"inlet_{i}_kPa": run.waves.vacuum_Pa[run.waves.inlets.index(i)] for i in inlets}
    if supply:
        columns["supply_kPa"] = run.supply_vacuum_Pa
    values = [_at(wave, phase) / 1e3 + rng.normal(0, noise_kPa, len(phase)) for wave in columns.values()]
    lines = ["# made-up bench log", ",".join(["time_s", *columns])]
    lines += [",".join(f"{v:.4f}" for v in row) for row in zip(time_s, *values, strict=True)]
    path.write_text("\n".join(lines) + "\n", encoding="utf-8")
    return path


def _at(wave: np.ndarray, phase: np.ndarray) -> np.ndarray:
    return np.interp(phase * len(wave), np.arange(len(wave) + 1), np.append(wave, wave[0]))
