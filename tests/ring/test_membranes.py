"""The ring's folded valve law against the general one it is a case of."""

from __future__ import annotations

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from gaitlab.air.valve import ValveBank, conductance_share, opening_target
from gaitlab.ring.membranes import Membranes
from gaitlab.robot.circuit import IsoPart, Valve

AMBIENT = 101_325.0
vacuums = st.floats(-500.0, 60e3)


@settings(deadline=None, max_examples=150)
@given(vacuums, vacuums, st.floats(0.0, 1.0), st.floats(0.0, 1.2), st.floats(0.0, 8e3), st.floats(1e-4, 0.2))
def test_same_as_the_general_law(
    control: float, output: float, place: float, sealing: float, hysteresis: float, leak: float
) -> None:
    """Target share and its three derivatives, with atmosphere on side a, over the whole range."""
    valve = Valve(18e3, 6e3, sealing, IsoPart(1e-10, 0.4), leak_fraction=leak, hysteresis_Pa=hysteresis)
    bank, membranes = ValveBank.of([valve]), Membranes.of([valve], AMBIENT)
    one = np.array
    target, slopes = opening_target(one([control]), one([0.0]), one([output]), one([place]), bank)
    share = conductance_share(one([place]), bank)
    found = membranes.target(one([AMBIENT - control]), one([AMBIENT - output]), share)
    lifted = 1.0 - leak
    general = (
        conductance_share(target, bank),
        -lifted * slopes.by_control,
        -lifted * slopes.by_b,
        slopes.by_opening,
    )
    for ours, theirs, size in zip(found, general, (1.0, 1e-3, 1e-3, 1.0), strict=True):
        assert abs(ours[0] - theirs[0]) < 1e-7 * size
    assert membranes.share(one([AMBIENT - control]), one([AMBIENT - output]), share)[0] == found[0][0]
