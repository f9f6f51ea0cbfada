"""What a misspelt key was probably meant to be: close spellings, and the same quantity in another unit."""

from __future__ import annotations

import difflib
from collections.abc import Iterable

# Unit endings of the keys, longest first so that L_min is not read as min.
UNITS = (
    "dm3_s_bar", "N_m_rad", "L_min", "N_mm", "N_m", "kPa", "MPa", "mbar", "mmHg", "inHg", "bar", "psi", "Pa", "hPa",
    "mm", "cm", "um", "in", "m", "mL", "ml", "cm3", "mm3", "L", "uL", "g", "kg", "mg", "ms", "s", "us", "min",
    "deg", "rad", "C", "K", "F", "A",
)  # fmt: skip


def suggestion(unknown: str, known: Iterable[str]) -> str:
    """The usual fix for a key that is not known here; names the unit when only that differs.

    >>> suggestion("length_cm", ["length_mm", "mass_g"])
    'did you mean length_mm? (this file gives it in mm)'
    """
    names = sorted(known)
    stem, _ = split_unit(unknown)
    for name in names:
        name_stem, unit = split_unit(name)
        if unit and stem.lower() == name_stem.lower():
            return f"did you mean {name}? (this file gives it in {unit.replace('_', ' ')})"
    close = difflib.get_close_matches(unknown[:80], names, n=2, cutoff=0.6)
    if close:
        return "did you mean " + " or ".join(close) + "?"
    return "known here: " + ", ".join(names)


def split_unit(key: str) -> tuple[str, str]:
    """Stem and unit of a key, the unit empty when it has none.

    >>> split_unit("free_flow_L_min")
    ('free_flow', 'L_min')
    """
    for unit in UNITS:
        if key.endswith("_" + unit) and len(key) > len(unit) + 1:
            return key[: -len(unit) - 1], unit
    return key, ""
