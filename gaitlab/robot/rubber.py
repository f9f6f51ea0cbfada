"""Rubber by its hardness: membranes of valves and walls of bellows alike."""

from __future__ import annotations

from gaitlab.errors import InputError, must


def youngs_from_shore_Pa(shore_A: float) -> float:
    """Young's modulus [Pa] of rubber from Shore A hardness: E = 0.0981 (56 + 7.62336 S)/(0.137505 (254 − 2.54 S)) MPa.

    A. N. Gent, Rubber Chemistry and Technology 31(4) 896 (1958), coefficients from memory. Good to about ±20 % between 20 and 80 Shore A.
    Raises InputError for a hardness that is none.

    >>> round(youngs_from_shore_Pa(30.0) / 1e6, 2)
    1.14
    """
    if not 0.0 < shore_A < 100.0:
        raise InputError(must("shore_A", "above 0 and below 100", shore_A, "read the data sheet of the rubber"))
    return 1e6 * 0.0981 * (56.0 + 7.62336 * shore_A) / (0.137505 * (254.0 - 2.54 * shore_A))
