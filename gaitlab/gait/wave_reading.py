"""Which wave travels along the legs, read from the footfalls by circular regression."""

from __future__ import annotations

import numpy as np

from gaitlab.gait.motion import FloatArray
from gaitlab.gait.records import WaveReading

# Below this mean resultant length no wave is named (chosen by us). Of the 24 orders of five evenly spaced phases six pass
# it: the smooth waves of one and of two turns and their nearest kin; of the 720 orders of seven, 11 %.
COHERENCE_MIN = 0.85
MARK_MIN = 0.2  # a swing less marked than this has no phase worth reading (chosen by us)
# Slopes this close to 0 or to half a turn per leg have no direction: all legs together, or neighbours in antiphase.
STANDING_BAND = 0.06  # turns per leg (chosen by us)
_SLOPES = np.linspace(-0.5, 0.5, 1001)


def wave_reading(phase: FloatArray, mark: FloatArray, along_m: FloatArray, row: FloatArray) -> WaveReading:
    """The travelling wave over legs at `along_m` (forward +), given the `phase` of their swings in turns.

    Model: φ = φ0(row) + κ · s with s the place along the body in legs, counted towards the tail; κ in [−½, ½] turns per
    leg maximises the mean resultant length R = Σ_rows |Σ e^(2πi(φ − κ s))| / n (circular-linear regression; Fisher &
    Lee 1992, Biometrics 48, in the form of the mean resultant). Rows (left, right; equal numbers in `row`) share κ and have
    their own φ0. R is the coherence. κ < 0: later towards the head, swing runs tail → head: direct; κ > 0: retrograde;
    wavelength 1/|κ| legs. Feet whose `mark` is too small do not count. Nothing is read unless one row has feet at three
    places: a slope and an offset fit any two, so rows of one or two feet each would always cohere.
    """
    use = mark >= MARK_MIN
    places = _places(along_m)
    if max(len(np.unique(np.round(places[use & (row == r)], 6))) for r in np.unique(row)) < 3:
        return WaveReading("none", float("nan"), 0.0)
    resultant = _resultants(phase[use], places[use], row[use])
    best = int(np.argmax(resultant))
    return _reading(float(_SLOPES[best]), float(resultant[best]))


def _places(along_m: FloatArray) -> FloatArray:
    """Distance behind the foremost leg in mean leg pitches (legs abreast share a place)."""
    stations = np.unique(np.round(along_m, 6))
    pitch = (stations[-1] - stations[0]) / max(len(stations) - 1, 1)
    return np.asarray((stations[-1] - along_m) / (pitch if pitch > 0.0 else 1.0), dtype=np.float64)


def _resultants(phase: FloatArray, places: FloatArray, row: FloatArray) -> FloatArray:
    terms = np.exp(2j * np.pi * (phase[None, :] - _SLOPES[:, None] * places[None, :]))
    sums = [np.abs(terms[:, row == r].sum(axis=1)) for r in np.unique(row)]
    return np.asarray(np.sum(sums, axis=0) / len(phase), dtype=np.float64)


def _reading(slope: float, coherence: float) -> WaveReading:
    wavelength = 1.0 / abs(slope) if slope != 0.0 else float("inf")
    if coherence < COHERENCE_MIN:
        return WaveReading("none", float("nan"), coherence)
    if abs(slope) < STANDING_BAND or abs(slope) > 0.5 - STANDING_BAND:
        return WaveReading("standing", wavelength, coherence)
    return WaveReading("retrograde" if slope > 0.0 else "direct", wavelength, coherence)
