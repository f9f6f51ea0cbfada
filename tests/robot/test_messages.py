"""Each rule of a robot file has one message that says file, line, table, key, rule, value and usual fix."""

from __future__ import annotations

import re
from pathlib import Path
from typing import Any

import pytest

from gaitlab.errors import RobotFileError
from gaitlab.robot.reader import read_robot, robot_from_document
from gaitlab.robot.source import LINE_MAX, SIZE_MAX
from tests.robot.documents import ROW5, row5, row5_with

LEG = ("body", "leg", 1)
BELLOWS = ("bellows", "leg")

# place, value put there (None takes the key away), what the message must hold
BROKEN: list[tuple[tuple[Any, ...], Any, str]] = [
    (("ring", "stages"), None, r"table \[ring\]: stages must be given .*; usual fix: add stages to this table"),
    (("ring", "stages"), 5.0, r"stages must be a whole number, got 5.0; usual fix"),
    (("ring", "stages"), True, "stages must be a whole number, got true"),
    (("ring", "stages"), 0, "stages must be at least 1 and at most 31, got 0"),
    (("ring", "stages"), 10**400, "stages must be a finite number, got 1000"),
    (("ring", "port_mL"), -3, "port_mL must be above 0 and at most 100000, got -3"),
    (("ring", "port_mL"), "0.6", r"port_mL must be a number, got '0.6'; usual fix: a plain number in mL"),
    (("ring", "port_mL"), "0.6 mL", "port_mL must be a number"),
    (("ring", "port_mL"), float("nan"), "port_mL must be a finite number, got nan"),
    (("ring", "port_mL"), float("inf"), "port_mL must be a finite number, got inf"),
    (("ring", "port_mL"), 1e-30, "port_mL must lie between 1e-09 and 1e.09 in size, got 1e-30; usual fix: check the unit"),
    (("ring", "port_mL"), [0.6], r"port_mL must be a number, got \[0.6\]"),
    (("ring", "port_ml"), 0.6, r"port_ml must be a key that this table knows; usual fix: did you mean port_mL\?"),
    (("ring", "resistor", "length_cm"), 1, r"did you mean length_mm\? \(this file gives it in mm\)"),
    (("ring", "resistor", "lenght_mm"), 1, r"did you mean inlet_loss|did you mean length_mm"),
    (("rign",), {}, r"rign must be a key that this table knows; usual fix: did you mean ring or wiring"),
    (("ring", "resistor"), {}, r"resistor must be described by one of: length_mm \+ square_mm \| "),
    (("ring", "resistor"), 3, "resistor must be a table, got 3"),
    (("ring", "resistor", "bore_mm"), 3, "resistor must be described in one way only, got 'square_mm and bore_mm'"),
    (("ring", "resistor"), {"sqare_mm": 0.5, "length_mm": 10}, r"sqare_mm must be a key .*did you mean square_mm"),
    (("ring", "resistor"), {"dead_end_kPa": 50, "reading_kPa": 60, "free_flow_L_min": 9, "law": "mass"},
     "reading_kPa must be below dead_end_kPa, got 60"),
    (("ring", "valve", "hysteresis_kPa"), 40, "hysteresis_kPa must be below threshold_kPa"),
    (("ring", "valve"), {"membrane_mm": 0.5, "span_mm": 8, "gap_mm": 1, "open": {"bore_mm": 1, "length_mm": 6}},
     "valve must give exactly one of youngs_MPa, shore_A, got 'none'"),
    (("ring", "stage"), [{"number": 6}], "number must be a stage of the ring, 1 to 5, got 6"),
    (("ring", "stage"), [{"number": 2}, {"number": 2}], r"table \[ring.stage\] number 2: number must be given once"),
    (("supply", "law"), "masss", "law must be one of mass, volume, got 'masss'"),
    (("supply", "law"), 3, "law must be a text in quotes, got 3"),
    (("supply", "dead_end_vacuum_kPa"), -57, "dead_end_vacuum_kPa must be above 0 and below 101.3, got -57"),
    (("ambient",), {"pressure_kPa": 50}, "dead_end_vacuum_kPa must be below the ambient pressure of 50 kPa, got 57"),
    (("ambient",), {"pressure_kPa": 50, "altitude_m": 5}, "altitude_m must be left out where pressure_kPa is given"),
    (("ambient",), {"altitude_m": 1e5}, "altitude_m must be at least -500 and at most 9000"),
    (("ambient", "temperature_C"), 300, "temperature_C must be above -60 and below 100, got 300"),
    (("supply",), {"table_vacuum_kPa": [0, 5], "table_flow_L_min": [1], "buffer_mL": 1}, "as many entries as table_vacuum"),
    (("supply",), {"table_vacuum_kPa": [0, 0], "table_flow_L_min": [1, 0], "buffer_mL": 1}, "table_vacuum_kPa must rise"),
    (("supply",), {"table_vacuum_kPa": [0, 200], "table_flow_L_min": [1, 0], "buffer_mL": 1}, "stay below the ambient"),
    (("supply",), {"table_vacuum_kPa": [0, 9], "table_flow_L_min": [1, 1], "buffer_mL": 1}, "must fall .* end at 0"),
    (("supply",), {"table_vacuum_kPa": [0, 9], "table_flow_L_min": [2, 1], "buffer_mL": 1}, "must fall .* end at 0"),
    (("supply",), {"table_vacuum_kPa": 5, "table_flow_L_min": [2, 1], "buffer_mL": 1}, "a list of numbers"),
    (("supply",), {"fixed_vacuum_kPa": 90}, None),
    (("supply",), {"dead_mL": 1, "schedule_s": [0, 0], "schedule_mL": [0, 1]}, "schedule_s must rise"),
    (("supply",), {"dead_mL": 1, "schedule_s": [0], "schedule_mL": [0]}, "as many entries as schedule_s, at least 2"),
    ((*BELLOWS, "axial_stiffness_N_m"), None, "axial_stiffness_N_m must be given .*it decides the sign of the travel"),
    ((*BELLOWS, "measured_bend"), None, "measured_bend must be given, or a geometry in its place"),
    ((*BELLOWS, "measured_bend", "bend_stiffness_N_m_rad"), None, "give one of bend_stiffness_N_m_rad, tip_stiffness"),
    ((*BELLOWS, "measured_bend", "blocked_force_N"), 1, "measured_bend must give one of"),
    ((*BELLOWS, "measured_stroke"), {"free_stroke_mm": 5, "at_vacuum_kPa": 50}, 'be left out where action = "bend"'),
    ((*BELLOWS, "solid_bend_deg"), 30, "solid_bend_deg must be at least the measured free_bend_deg"),
    ((*BELLOWS, "swept_mL"), 5, "swept_mL must be at most rest_mL"),
    ((*BELLOWS, "segments"), 0, "segments must be at least 1"),
    ((*BELLOWS, "action"), "twist", "action must be one of bend, contract, got 'twist'"),
    ((*BELLOWS, "geometry"), {"outer_mm": 12, "inner_mm": 8, "wall_mm": 1, "convolutions": 6}, "exactly one of youngs_MPa"),
    ((*BELLOWS, "geometry"), {"outer_mm": 12, "inner_mm": 18, "wall_mm": 1, "convolutions": 6, "shore_A": 30},
     "inner_mm must be below outer_mm"),
    ((*BELLOWS, "geometry"), {"outer_mm": 12, "inner_mm": 8, "wall_mm": 6, "convolutions": 6, "shore_A": 30},
     "wall_mm must be below half of outer_mm"),
    (("body", "block"), [], "block must hold at least one block"),
    (("body", "block", 0, "size_mm"), [1, 2], r"size_mm must have 3 numbers, got \[1, 2\]; usual fix: a vector is"),
    (("body", "block", 0, "size_mm"), [1, "2", 3], r"table \[body.block\] number 1: size_mm item 2 must be a number"),
    ((*LEG, "name"), "a", r"table \[body.leg\] number 2: name must be unique, got 'a'"),
    ((*LEG, "name"), "../etc", "name must be a name of at most 64 letters a-z, digits"),
    ((*LEG, "name"), "b c", "name must be a name"),
    ((*LEG, "name"), "bé", "name must be a name"),
    ((*LEG, "name"), "", "name must be a name"),
    ((*LEG, "name"), "x" * 65, "name must be a name"),
    ((*LEG, "name"), "held", "name must be a name other than open and held"),
    ((*LEG, "name"), None, r"name must be given"),
    ((*LEG, "block"), "trunc", r"block must name a block of this file, got 'trunc'; usual fix: did you mean trunk\?"),
    ((*LEG, "foot"), "paw", r"foot must name a foot of this file, got 'paw'; usual fix: known here: pad|did you mean pad"),
    ((*LEG, "bellows"), "lag", r"bellows must name a bellows of this file, got 'lag'; usual fix: did you mean leg\?"),
    ((*LEG, "bellows"), 4, "bellows must be the name of a bellows type, got 4"),
    ((*LEG, "bellows"), None, r"table \[body.leg\] number 2: bellows must be given, or at least one unit"),
    ((*LEG, "unit"), [{"bellows": "leg", "inlet": "b"}], "bellows must be left out where units are given"),
    (("body", "leg"), [], "leg must give the robot 1 to 40 air inlets in all, got 0"),
    (("body", "leg"), {}, "leg must be a list of tables in square brackets, got a table"),
    (("wiring",), {"tied": [["a"]]}, " item 1 must tie two inlets or more"),
    (("wiring",), {"tied": [["a", "z"]]}, "must name inlets of this file, got 'z'"),
    (("wiring",), {"tied": [["a", "b"], ["b", "c"]]}, "must hold every inlet once in all groups, got 'b'"),
    (("wiring",), {"tied": "a"}, "tied must be a list of lists of texts"),
    (("wiring",), {"tied": [["a", "b"]]}, "inlets_per_output_max must be at least 2, the largest tied group, got 1"),
    (("wiring",), {"fixed": {"z": 1}}, "z must name inlets of this file, got 'z'"),
    (("wiring",), {"fixed": {"a": 6}}, "a must be an output 1 to 5, open or held, got 6"),
    (("wiring",), {"fixed": {"a": "shut"}}, "a must be an output 1 to 5, open or held, got 'shut'"),
    (("wiring",), {"fixed": {"a": 1.5}}, "a must be a whole number or a text, got 1.5"),
    (("wiring",), {"fixed": 3}, "fixed must be a table such as"),
    (("wiring",), {"fixed": {"a": 1, "b": 1}}, "leave at most 1 inlets .* on output 1, got 2"),
    (("wiring",), {"inlets_per_output_max": 2, "tied": [["a", "b"]], "fixed": {"a": 1, "b": 2}}, "the same source"),
    (("wiring",), {"inlets_per_output_max": 2, "tied": [["a", "b"]]}, "every_output_used must be false where 5 outputs"),
    (("wiring",), {"every_output_used": "no"}, "every_output_used must be true or false, got 'no'"),
    (("ring", "stages"), 3, "inlets_per_output_max must be large enough for 5 inlets on 3 outputs"),
    (("tolerance",), [{"key": "ring.port_mL"}], "plus_minus must be given, or percent in its place, but not both"),
    (("tolerance",), [{"key": "ring.prt_mL", "percent": 1}], "key must be the dotted path of a number this file states"),
    (("name",), None, "name must be given"),
    (("name",), "a/b", "name must be a name"),
    (("notes",), ["x" * 1001], " item 1 must be at most 1000 characters long"),
]  # fmt: skip


@pytest.mark.parametrize(("place", "value", "message"), BROKEN, ids=range(len(BROKEN)))
def test_each_broken_rule_is_told(place: tuple[Any, ...], value: Any, message: str | None) -> None:
    document = row5_with(place, value)
    if message is None:
        robot_from_document(document)
        return
    with pytest.raises(RobotFileError) as caught:
        robot_from_document(document, source="crawler.toml")
    assert re.search(message, str(caught.value)), str(caught.value)
    assert str(caught.value).startswith("crawler.toml")
    assert "\n" not in str(caught.value)


def test_spines_must_make_a_tree() -> None:
    block = {"size_mm": [20, 20, 10], "mass_g": 20}
    spine = {"front_at_mm": [-10, 0, 0], "rear_at_mm": [10, 0, 0], "bellows": "leg"}
    document = row5()
    document["wiring"] = {"inlets_per_output_max": 3}

    def refused(spines: list[tuple[str, str]]) -> str:
        document["body"]["block"] = [row5()["body"]["block"][0], *({"name": n, **block} for n in ("m", "n"))]
        document["body"]["spine"] = [
            {"name": f"s{i}", "front": front, "rear": rear, **spine} for i, (front, rear) in enumerate(spines)
        ]
        with pytest.raises(RobotFileError) as caught:
            robot_from_document(document)
        return str(caught.value)

    assert "rear must be another block than front, got 'm'" in refused([("m", "m")])
    assert "rear must be the rear of one spine only" in refused([("trunk", "m"), ("n", "m")])
    assert "no spine leads to n" in refused([("trunk", "m")])
    assert "tree without loops, but these blocks are on one: m, n" in refused([("m", "n"), ("n", "m")])
    assert "on one: trunk, m, n" in refused([("m", "n"), ("n", "trunk"), ("trunk", "m")])


def written(path: Path, data: bytes) -> Path:
    path.write_bytes(data)
    return path


def message_of(path: Path) -> str:
    with pytest.raises(RobotFileError) as caught:
        read_robot(path)
    return str(caught.value)


def test_a_message_names_file_and_line(tmp_path: Path) -> None:
    path = written(tmp_path / "r.toml", ROW5.replace("port_mL = 0.6", "port_mL = -1").encode())
    line = ROW5.split("\n").index(next(x for x in ROW5.split("\n") if x.startswith("port_mL"))) + 1
    assert message_of(path).startswith(f"{path}, line {line}, table [ring]: port_mL must be above 0")


def test_a_line_inside_the_third_leg_is_found(tmp_path: Path) -> None:
    lines = ROW5.split("\n")
    third = [i for i, x in enumerate(lines) if x == "[[body.leg]]"][2]
    at = next(i for i in range(third, len(lines)) if lines[i].startswith("foot ="))
    lines[at] = 'foot = "paw"'
    path = written(tmp_path / "r.toml", "\n".join(lines).encode())
    assert f"line {at + 1}, table [body.leg] number 3: foot must name a foot" in message_of(path)


def test_windows_line_ends_and_a_byte_order_mark_are_read(tmp_path: Path) -> None:
    data = b"\xef\xbb\xbf" + ROW5.replace("\n", "\r\n").encode()
    assert read_robot(written(tmp_path / "r.toml", data)).robot.name == "tray_row5"


@pytest.mark.parametrize(
    ("data", "message"),
    [
        (b"", "name must be given"),
        (b"\x00", "must be TOML"),
        (ROW5.encode("utf-16"), "text must be UTF-8, got 'byte 0xff'"),
        (b"# caf\xe9\n" + ROW5.encode(), "line 1: text must be UTF-8, got 'byte 0xe9'"),
        (b"a = 1\na = 2\n", "must be TOML, got: Cannot overwrite a value"),
        (b"[ring\n", "line 1, column 6: must be TOML"),
        (b"a = " + b"[" * 1500, "must be at most 12 levels|must be TOML"),
        (b"a = " + b"[" * 20 + b"]" * 20, "nesting must be at most 12 levels"),
        (b"a." * 50 + b"a = 1", "nesting must be at most 12 levels"),
        (b"a = " + b"9" * 1900, "must be a key that this table knows|must be TOML"),
        (b"a = 1979-05-27T07:32:00Z", "a must be a key that this table knows"),
        (b"#" * (LINE_MAX + 1), f"line must be at most {LINE_MAX} characters"),
        (b"#\n" * (SIZE_MAX // 2 + 1), f"file must be at most {SIZE_MAX} bytes"),
        (b'name = "a\\u001b[31m"\n' , r"name must be a|must be given"),
    ],
    ids=range(14),
)  # fmt: skip
def test_bytes_that_are_no_robot_file(tmp_path: Path, data: bytes, message: str) -> None:
    text = message_of(written(tmp_path / "r.toml", data))
    assert re.search(message, text), text
    assert "\x1b" not in text


def test_what_is_no_readable_file(tmp_path: Path) -> None:
    assert "a robot file (TOML), got 'a folder'" in message_of(tmp_path)
    assert "no such file or directory" in message_of(tmp_path / "none.toml")
    assert "a device or pipe" in message_of(Path("/dev/zero"))
    assert "usual fix" in message_of(Path("a\0b"))
    loop = tmp_path / "loop.toml"
    loop.symlink_to(loop)
    assert "usual fix" in message_of(loop)


def test_a_huge_file_is_refused_before_it_is_read(tmp_path: Path) -> None:
    path = tmp_path / "huge.toml"
    with path.open("wb") as file:
        file.truncate(10**11)  # a hole: takes no room on disk
    assert f"file must be at most {SIZE_MAX} bytes, got 100000000000" in message_of(path)


@pytest.mark.parametrize(
    ("place", "value", "message"),
    [
        (("body", "block", 0, "size_mm"), [160, 0, 12], "size_mm must be at least 0.1 mm each way, got 0.0"),
        (("body", "block", 0, "size_mm"), [160, 30, -12], "size_mm must be at least 0.1 mm each way, got -12.0"),
        ((*LEG, "at_mm"), [0, 0, 1e9], "at_mm item 3 must lie within 10000 mm, got 1000000000.0"),
    ],
)
def test_sizes_and_places_of_a_body_on_a_bench(place: tuple[Any, ...], value: Any, message: str) -> None:
    with pytest.raises(RobotFileError, match=message):
        robot_from_document(row5_with(place, value))


def test_a_short_way_of_writing_is_told_as_it_was_written(tmp_path: Path) -> None:
    lines = ROW5.split("\n")
    at = [i for i, x in enumerate(lines) if x.startswith("bellows =")][2]
    lines[at] = 'bellows = "lag"'
    path = written(tmp_path / "r.toml", "\n".join(lines).encode())
    assert f"line {at + 1}, table [body.leg] number 3: bellows must name a bellows of this file" in message_of(path)
    document = row5_with((*LEG, "name"), "block d")
    with pytest.raises(RobotFileError, match=r"table \[body.leg\] number 2: name must be a name"):
        robot_from_document(document)


def test_only_a_bending_bellows_has_another_side() -> None:
    pulling = {
        **row5()["bellows"]["leg"], "action": "contract", "bend_stiffness_N_m_rad": 0.05,
        "measured_stroke": {"free_stroke_mm": 5, "at_vacuum_kPa": 50},
    }  # fmt: skip
    del pulling["measured_bend"], pulling["solid_bend_deg"]
    document = row5_with(("bellows", "pull"), pulling)
    leg = document["body"]["leg"][0]
    del leg["bellows"]
    leg["unit"] = [{"bellows": "pull", "inlet": "a", "opposed_inlet": "a2"}]
    document["wiring"] = {"inlets_per_output_max": 2}
    with pytest.raises(
        RobotFileError, match='opposed_inlet must be left out where the bellows has action = "contract"'
    ):
        robot_from_document(document)
