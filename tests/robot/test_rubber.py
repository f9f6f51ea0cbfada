"""Rubber's modulus from its hardness, against values worked out by hand from Gent (1958)."""

import math

import pytest

from gaitlab.errors import InputError
from gaitlab.robot.rubber import youngs_from_shore_Pa


@pytest.mark.parametrize(("shore", "megapascal"), [(30.0, 1.14), (50.0, 2.46), (70.0, 5.54)])
def test_gent_hardness_to_modulus(shore: float, megapascal: float) -> None:
    # Gent 1958, evaluated by hand: S = 50 gives 0.0981 · 437.168/(0.137505 · 127) = 2.456 MPa.
    assert youngs_from_shore_Pa(shore) / 1e6 == pytest.approx(megapascal, rel=6e-3)


@pytest.mark.parametrize("shore", [0.0, 100.0, -5.0, math.nan])
def test_hardness_outside_its_scale_is_refused(shore: float) -> None:
    with pytest.raises(InputError, match="shore_A must be above 0 and below 100"):
        youngs_from_shore_Pa(shore)
