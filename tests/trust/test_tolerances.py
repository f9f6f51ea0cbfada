"""Tolerances resolved against robot documents: which numbers move, which move together, and what is refused."""

from dataclasses import replace
from pathlib import Path

import pytest

from gaitlab.errors import InputError
from gaitlab.robot.reader import read_robot, robot_from_document
from gaitlab.robot.records import Tolerance
from gaitlab.trust.as_built import stage_parts
from gaitlab.trust.build_parts import split_by_chain, split_by_stage
from gaitlab.trust.draws import checked_draws, draws
from gaitlab.trust.tolerances import FROM_FILE, tolerances_of

ROW5 = Path(__file__).parents[2] / "robots" / "tray_row5.toml"


@pytest.fixture
def row5():
    document = read_robot(ROW5).document
    document["ring"]["resistor"] = {"square_mm": 0.5, "length_mm": 10}
    return document


def test_splitting_by_stage_changes_no_part(row5):
    whole = robot_from_document(row5)
    split = robot_from_document(split_by_stage(split_by_stage(row5, "resistor"), "valve"))
    assert [o.stage for o in split.ring.overrides] == [1, 2, 3, 4, 5]
    assert {o.resistor for o in split.ring.overrides} == {whole.ring.resistor}
    assert {o.valve for o in split.ring.overrides} == {whole.ring.valve}


def test_splitting_by_leg_changes_no_bellows(row5):
    whole = robot_from_document(row5)
    document, copies = split_by_chain(row5, "bellows", "leg")
    split = robot_from_document(document)
    assert sorted(copies) == ["a", "b", "c", "d", "e"]
    for leg in split.body.legs:
        own = split.bellows_named(leg.units[0].bellows)
        assert {**vars(own), "name": ""} == {**vars(whole.bellows[0]), "name": ""}


def test_as_built_stage_keeps_its_part(row5):
    row5["ring"]["stage"] = [{"number": 2, "resistor": {"square_mm": 0.62, "length_mm": 10}}]
    t = tolerances_of(row5, [Tolerance("ring.resistor.square_mm", plus_minus=0.01, each="stage")])
    for d in draws(t, 8, seed=0):
        widths = {s["number"]: s["resistor"]["square_mm"] for s in d.document["ring"]["stage"]}
        assert widths[2] == pytest.approx(0.62, abs=0.0101)
        assert widths[1] == pytest.approx(0.5, abs=0.0101)


def test_a_measured_stage_has_no_drawing_to_be_off(row5):
    row5["ring"]["stage"] = [{"number": 2, "resistor": {"sonic_conductance_dm3_s_bar": 0.03, "critical_ratio": 0.4}}]
    t = tolerances_of(row5, [Tolerance("ring.resistor.square_mm", plus_minus=0.01, each="stage")])
    assert [c.name[-1] for c in t.coordinates] == ["1", "3", "4", "5"]


def test_shared_draw_moves_every_stage_and_leg_alike(row5):
    given = [
        Tolerance("ring.resistor.length_mm", percent=10.0),
        Tolerance("ring.resistor.square_mm", plus_minus=0.05, each="stage"),
        Tolerance("bellows.leg.length_mm", percent=3.0),
        Tolerance("bellows.leg.axial_stiffness_N_m", percent=15.0, each="leg"),
    ]
    t = tolerances_of(row5, given)
    assert len(t.coordinates) == 1 + 5 + 1 + 5
    for d in draws(t, 4, seed=0):
        ring = d.document["ring"]
        assert len({ring["resistor"]["length_mm"], *(s["resistor"]["length_mm"] for s in ring["stage"])}) == 1
        assert len({b["length_mm"] for b in d.document["bellows"].values()}) == 1
        assert len({b["axial_stiffness_N_m"] for b in d.document["bellows"].values()}) == 5


def test_feet_per_leg(row5):
    t = tolerances_of(row5, [Tolerance("foot.pad.friction", percent=25.0, each="leg")])
    (draw,) = draws(t, 1, seed=0)
    robot = robot_from_document(draw.document)
    assert len({robot.foot_named(leg.foot).friction for leg in robot.body.legs}) == 5


def test_defaults_say_where_they_come_from(row5):
    listed = tolerances_of(row5).listed
    assert {item.tolerance.key for item in listed} >= {"ring.resistor.square_mm", "ground.friction_factor"}
    assert all(
        i.source.startswith("default: ") and ("chosen by us" in i.source or "no source" in i.source) for i in listed
    )


def test_a_files_own_list_stands_alone(row5):
    (item,) = tolerances_of(row5, [Tolerance("tubes.bore_mm", plus_minus=0.1)]).listed
    assert (item.source, item.nominal) == (FROM_FILE, 2.0)


@pytest.mark.parametrize(
    ("tolerance", "says"),
    [
        (Tolerance("ring.resistor.sqare_mm", percent=5.0), "close: ring.resistor.square_mm"),
        (Tolerance("ring.valve", percent=5.0), "dotted path of a number"),
        (Tolerance("tubes.bore_mm"), "exactly one of plus_minus and percent"),
        (Tolerance("tubes.bore_mm", plus_minus=0.1, percent=5.0), "exactly one of plus_minus and percent"),
        (Tolerance("tubes.bore_mm", percent=5.0, each="stage"), "ring.resistor, ring.valve"),
        (Tolerance("ring.port_mL", percent=5.0, each="leg"), "a bellows type, a foot type or body.leg"),
        (Tolerance("body.leg.e.at_mm.0", "lognormal", percent=5.0), "on a number above 0"),
        (Tolerance("body.leg.e.at_mm", plus_minus=1.0), "in percent where the key is a whole list"),
    ],
)
def test_bad_tolerances_say_what_is_wrong(row5, tolerance, says):
    with pytest.raises(InputError, match=says):
        tolerances_of(row5, [tolerance])


def test_a_key_given_twice_is_refused(row5):
    twice = [Tolerance("tubes.bore_mm", percent=5.0), Tolerance("tubes.bore_mm", percent=9.0)]
    with pytest.raises(InputError, match=r"tolerance of tubes\.bore_mm must be given once"):
        tolerances_of(row5, twice)


def test_unused_type_cannot_vary_by_leg(row5):
    row5["foot"]["spare"] = dict(row5["foot"]["pad"])
    with pytest.raises(InputError, match="that some leg uses"):
        tolerances_of(row5, [Tolerance("foot.spare.friction", percent=5.0, each="leg")])


@pytest.mark.parametrize("path", sorted(ROW5.parent.glob("*.toml")), ids=lambda p: p.stem)
def test_every_robot_can_be_drawn(path):
    """Contract over all shipped robots: their tolerances (or the defaults) resolve, and eight builds of each read."""
    file = read_robot(path)
    t = tolerances_of(file.document, file.robot.tolerances)
    assert len(t.coordinates) >= len(t.listed) > 5
    for draw in checked_draws(t, 8, seed=0):
        built = robot_from_document(draw.document)
        assert built.inlets() == file.robot.inlets()
        assert built != file.robot


@pytest.mark.parametrize("path", sorted(ROW5.parent.glob("*.toml")), ids=lambda p: p.stem)
def test_splitting_leaves_every_robot_the_same_to_ring_and_body(path):
    """The split document, undrawn, has the same parts at every stage and on every chain."""
    file = read_robot(path)
    split = robot_from_document(tolerances_of(file.document).document)
    assert split.supply == file.robot.supply and split.inlets() == file.robot.inlets()
    for stage in range(1, file.robot.ring.stages + 1):
        assert stage_parts(split, stage) == stage_parts(file.robot, stage)
    for one, two in zip(split.chains(), file.robot.chains(), strict=True):
        for a, b in zip(one.units, two.units, strict=True):
            own, meant = split.bellows_named(a.bellows), file.robot.bellows_named(b.bellows)
            assert replace(own, name="") == replace(meant, name="")
