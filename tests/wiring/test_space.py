"""Counts against brute force, published numbers of permutations, and the laws of symmetry classes."""

from __future__ import annotations

import dataclasses
import math
from collections import Counter

import numpy as np
import pytest
from wiring.brute_force import allowed, classes
from wiring.robots import document, pairs, row

from gaitlab.errors import InputError
from gaitlab.robot.reader import robot_from_document
from gaitlab.robot.records import Robot, WiringLimits
from gaitlab.wiring.space import WiringSpace
from gaitlab.wiring.wiring import Wiring

CASES: dict[str, Robot] = {
    "row": row(5, 5),
    "fewer legs than outputs": row(3, 5, every_output_used=False),
    "two inlets an output": row(4, 3, inlets_per_output_max=2),
    "open allowed": row(4, 3, inlets_per_output_max=2, allow_open=True, every_output_used=False),
    "open and held": row(4, 3, allow_open=True, allow_held=True, every_output_used=False),
    "one fixed": row(5, 5, fixed={"c": 2}),
    "fixed to atmosphere": row(4, 3, fixed={"b": "open"}),
    "fixed to the supply, tied": row(5, 3, inlets_per_output_max=2, tied=[["a", "e"]], fixed={"e": "held"}),
    "tied": row(5, 3, inlets_per_output_max=3, tied=[["a", "b"]]),
    "two ties of unequal size": row(6, 3, inlets_per_output_max=3, tied=[["a", "b"], ["c", "e", "f"]]),
    "pairs": pairs(3, 3, inlets_per_output_max=2),
    "pairs, loose": pairs(3, 3, inlets_per_output_max=4, every_output_used=False),
    "pairs on five": pairs(2, 5, every_output_used=False, allow_open=True),
    "pairs, one fixed": pairs(3, 3, inlets_per_output_max=2, fixed={"l1": 1}),
    "pairs, two fixed": pairs(3, 3, inlets_per_output_max=3, fixed={"l1": 1, "r2": 2}),
    "pairs, crosswise fixed": pairs(2, 5, every_output_used=False, fixed={"l1": 1, "r1": 3}),
    "pairs, one side tied": pairs(3, 3, inlets_per_output_max=4, tied=[["l1", "l2"]]),
    "pairs, tied across": pairs(3, 3, inlets_per_output_max=2, tied=[["l1", "r1"]]),
    "pairs, fixed open": pairs(2, 3, inlets_per_output_max=2, fixed={"l1": "open"}),
    "pairs, all still": pairs(2, 3, allow_open=True, allow_held=True, every_output_used=False),
}


def unequal(robot: Robot) -> Robot:
    """The same robot with one stage built with another port volume: turning the ring is no symmetry any more."""
    from gaitlab.robot.circuit import StageOverride

    ring = dataclasses.replace(robot.ring, overrides=(StageOverride(stage=2, port_m3=1e-6),))
    return dataclasses.replace(robot, ring=ring)


ALL = {**CASES, **{f"{name}, unequal stages": unequal(robot) for name, robot in CASES.items()}}


@pytest.mark.parametrize("name", ALL)
def test_counts_agree_with_brute_force(name: str) -> None:
    robot = ALL[name]
    space = WiringSpace.of(robot)
    assert space.turns is (robot.ring.overrides == ())
    assert space.raw == len(allowed(robot))
    assert space.distinct == len(classes(robot, space.turns, space.mirror))


@pytest.mark.parametrize("name", ALL)
def test_iteration_gives_one_of_each_class(name: str) -> None:
    robot = ALL[name]
    space = WiringSpace.of(robot)
    listed = [tuple(s for _, s in w.pairs) for w in space]
    found = classes(robot, space.turns, space.mirror)
    assert len(listed) == len(set(listed)) == len(found)
    assert all(len(equals & set(listed)) == 1 for equals in found)


@pytest.mark.parametrize("name", ALL)
def test_canonical_and_orbit_are_those_of_the_class(name: str) -> None:
    robot = ALL[name]
    space = WiringSpace.of(robot)
    for equals in classes(robot, space.turns, space.mirror)[:40]:
        wirings = [Wiring(tuple(zip(space.inlets, s, strict=True))) for s in equals]
        assert len({space.canonical(w) for w in wirings}) == 1
        assert set(space.orbit(wirings[0])) == set(wirings)
        assert space.canonical(wirings[0]) in wirings
        assert all(space.allows(w) for w in wirings)


@pytest.mark.parametrize("name", ALL)
def test_neighbours_are_allowed_distinct_and_mutual(name: str) -> None:
    space = WiringSpace.of(ALL[name])
    here = next(iter(space))
    around = space.neighbours(here)
    assert here not in around and len(set(around)) == len(around)
    assert all(space.allows(w) and space.canonical(w) == w for w in around)
    if not space.constraints.fixed and not space.constraints.ties:  # else the mirror image has other free inlets
        assert all(here in space.neighbours(w) for w in around)


def test_published_counts_of_permutations() -> None:
    """N!/N for N outputs on N legs."""
    for legs in (5, 7, 9, 11):
        space = WiringSpace.of(row(legs, legs))
        assert (space.raw, space.distinct) == (math.factorial(legs), math.factorial(legs - 1))


def test_ten_legs_on_five_stages_in_closed_form() -> None:
    """10!/2!⁵ ways to give five outputs two legs each, a fifth of them distinct."""
    space = WiringSpace.of(row(10, 5, inlets_per_output_max=2))
    assert space.raw == math.factorial(10) // 2**5
    assert space.distinct == space.raw // 5


def test_huge_space_is_counted_at_once() -> None:
    """Surjections of 24 inlets onto 15 outputs by inclusion and exclusion."""
    onto = sum((-1) ** k * math.comb(15, k) * (15 - k) ** 24 for k in range(16))
    assert WiringSpace.of(row(24, 15, inlets_per_output_max=24)).raw == onto


def test_hexapod_by_burnside() -> None:
    """90 wirings; unmoved by all three turns' identity 90, by the mirror 6: (90 + 6)/6 = 16."""
    space = WiringSpace.of(pairs(3, 3, inlets_per_output_max=2))
    assert (space.raw, space.distinct) == (90, (90 + math.factorial(3)) // 6)


def test_drawn_wirings_cover_the_space_evenly() -> None:
    """A χ² of 90 equally likely wirings stays below its 99.9 % point of 135 (89 degrees of freedom)."""
    robot = pairs(3, 3, inlets_per_output_max=2)
    space = dataclasses.replace(WiringSpace.of(robot), turns=False, mirror=None)
    rng = np.random.default_rng(7)
    seen = Counter(space.sampled(rng) for _ in range(4500))
    assert len(seen) == 90
    assert sum((n - 50) ** 2 / 50 for n in seen.values()) < 135


@pytest.mark.parametrize("name", CASES)
def test_drawn_wirings_are_allowed_and_repeat_with_the_seed(name: str) -> None:
    space = WiringSpace.of(CASES[name])
    first = [space.sampled(np.random.default_rng(3)) for _ in range(2)]
    assert first[0] == first[1]
    assert all(space.allows(space.sampled(np.random.default_rng(s))) for s in range(20))


def test_mirrored_hexapod_swaps_left_and_right() -> None:
    space = WiringSpace.of(pairs(3, 3, inlets_per_output_max=2))
    assert space.mirror == (1, 0, 3, 2, 5, 4)


def test_lopsided_robot_has_no_mirror() -> None:
    data = document("hex6_ring3")
    data["body"]["payload"][0]["at_mm"] = [0, 5, 10]
    assert WiringSpace.of(robot_from_document(data)).mirror is None
    data = document("hex6_ring3")
    data["tubes"]["manifold_mm"] = [0, 3, 12]
    assert WiringSpace.of(robot_from_document(data)).mirror is None
    data = document("hex6_ring3")
    data["body"]["leg"][1]["at_mm"] = [42, -21, -6]
    assert WiringSpace.of(robot_from_document(data)).mirror is None


def test_reversed_wave_is_its_own_reverse_up_to_symmetry() -> None:
    for name in ("row", "pairs", "one fixed"):
        space = WiringSpace.of(CASES[name])
        for wiring in space:
            backwards = space.reversed(wiring)
            assert backwards is not None and space.reversed(backwards) == wiring


def test_reverse_outside_the_limits_is_none() -> None:
    """With two inlets fixed on outputs 1 and 2 the reversed wave would need 1 and 5."""
    space = WiringSpace.of(row(5, 5, fixed={"a": 1, "b": 2}))
    assert all(space.reversed(wiring) is None for wiring in space)


@pytest.mark.parametrize(
    ("limits", "words"),
    [
        (
            WiringLimits(fixed=tuple((c, 1) for c in "abcdef")),
            "at most 5 inlets on outputs .5 outputs of 1 each., got 6",
        ),
        (WiringLimits(), "5 outputs of 1 each, each output used, no inlet on open or held.*6 inlets"),
        (WiringLimits(inlets_per_output_max=2, tied=(("a", "b", "c"),)), "largest of 3"),
        (WiringLimits(2, tied=(("a", "b"),), fixed=(("a", 1), ("b", 2))), "same source for inlets tied together"),
    ],
)
def test_limits_that_leave_nothing_say_the_rule_and_the_numbers(limits: WiringLimits, words: str) -> None:
    robot = dataclasses.replace(row(6, 5, inlets_per_output_max=2), wiring=limits)
    with pytest.raises(InputError, match=words):
        WiringSpace.of(robot)


def test_even_ring_is_refused() -> None:
    robot = row(4, 5, every_output_used=False)
    even = dataclasses.replace(robot, ring=dataclasses.replace(robot.ring, stages=4))
    with pytest.raises(InputError, match=r"ring\.stages must be odd"):
        WiringSpace.of(even)


def test_wiring_of_another_robot_is_refused() -> None:
    with pytest.raises(InputError, match="of the inlets a, b"):
        WiringSpace.of(row(5, 5)).canonical(Wiring.of({"x": 1}))
