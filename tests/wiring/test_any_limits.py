"""Counts, listing and canonical forms under limits made up at random, against brute force."""

from __future__ import annotations

import dataclasses

from hypothesis import given, settings
from hypothesis import strategies as st
from wiring.brute_force import allowed, classes
from wiring.robots import pairs, row

from gaitlab.errors import InputError
from gaitlab.robot.records import Robot, WiringLimits
from gaitlab.wiring.space import WiringSpace
from gaitlab.wiring.wiring import Wiring

BODIES = (row(4, 3, inlets_per_output_max=4), pairs(2, 3, inlets_per_output_max=4), row(3, 5, every_output_used=False))


@st.composite
def robots(draw: st.DrawFn) -> Robot:
    """One of the bodies under limits of every kind at once."""
    body = draw(st.sampled_from(BODIES))
    inlets = body.inlets()
    sources = st.sampled_from([*range(1, body.ring.stages + 1), "open", "held"])
    tie = draw(st.lists(st.sampled_from(inlets), unique=True, max_size=3))
    limits = WiringLimits(
        inlets_per_output_max=draw(st.integers(1, 4)),
        every_output_used=draw(st.booleans()),
        allow_open=draw(st.booleans()),
        allow_held=draw(st.booleans()),
        tied=(tuple(tie),) if len(tie) > 1 else (),
        fixed=tuple(sorted(draw(st.dictionaries(st.sampled_from(inlets), sources, max_size=2)).items())),
    )
    return dataclasses.replace(body, wiring=limits)


@settings(max_examples=120, deadline=None, derandomize=True)
@given(robots())
def test_space_agrees_with_brute_force(robot: Robot) -> None:
    """An empty space is refused; otherwise raw, distinct, one representative of each class and its whole orbit agree."""
    every = allowed(robot)
    try:
        space = WiringSpace.of(robot)
    except InputError:
        assert not every
        return
    found = classes(robot, space.turns, space.mirror)
    listed = {tuple(source for _, source in wiring.pairs) for wiring in space}
    assert (space.raw, space.distinct, len(listed)) == (len(every), len(found), len(found))
    assert all(len(equals & listed) == 1 for equals in found)
    for equals in found[:5]:
        wiring = Wiring(tuple(zip(space.inlets, min(equals, key=str), strict=True)))
        assert {tuple(s for _, s in w.pairs) for w in space.orbit(wiring)} == equals
