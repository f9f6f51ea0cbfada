"""Line numbers of messages, against places counted by hand."""

from __future__ import annotations

import pytest

from gaitlab.robot.hints import split_unit, suggestion
from gaitlab.robot.lines import line_of

TEXT = '''name = "x"
notes = [
  "[ring]",
  "stages = 9",
]
about = """
[ring]
stages = 3
"""
[ring]  # the circuit
stages = 5
resistor.square_mm = 1
"valve" = { threshold_kPa = 3 }
[[body.leg]]
name = "a"
[[body.leg]]
name = "b # ["
[[body.leg.unit]]
inlet = "b1"
[[body.leg.unit]]
inlet = "b2"
'''


@pytest.mark.parametrize(
    ("place", "line"),
    [
        (("name",), 1),
        (("ring",), 10),
        (("ring", "stages"), 11),
        (("ring", "resistor", "square_mm"), 12),
        (("ring", "valve", "threshold_kPa"), 13),
        (("ring", "port_mL"), 10),
        (("body", "leg", 0, "name"), 15),
        (("body", "leg", 1, "name"), 17),
        (("body", "leg", 1, "unit", 1, "inlet"), 21),
        (("body", "leg", 1, "at_mm", 2), 16),
        (("wiring", "tied"), None),
    ],
)
def test_the_line_of_a_place_or_of_what_holds_it(place: tuple[str | int, ...], line: int | None) -> None:
    assert line_of(TEXT, place) == line


def test_hints_tell_another_unit_from_another_word() -> None:
    assert suggestion("length_in", ["length_mm", "mass_g"]).startswith("did you mean length_mm?")
    assert "(this file gives it in N mm)" in suggestion("tip_stiffness_N_m", ["tip_stiffness_N_mm"])
    assert suggestion("q", ["length_mm", "mass_g"]) == "known here: length_mm, mass_g"
    assert split_unit("law") == ("law", "")
