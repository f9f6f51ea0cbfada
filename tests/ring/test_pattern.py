"""Load patterns: tube lengths from the drawing, turned copies equal, nothing else equal."""

from __future__ import annotations

import itertools
import math
from dataclasses import replace

import pytest

from gaitlab.ring.circuit import circuit_of, output_volumes
from gaitlab.ring.pattern import counted_pattern, load_pattern, placed_pattern
from gaitlab.ring.tubing import block_places, inlet_places, tube_lengths
from gaitlab.robot.circuit import StageOverride
from gaitlab.robot.parts import Block, Spine, Unit
from gaitlab.wiring.wiring import Wiring, wiring_from_text
from tests.ring.robots import in_order, tray, unloaded, with_ring


def test_tube_lengths_by_pythagoras() -> None:
    """Straight distance from (0, 0, 12) mm to the leg's root, times 1.3, plus 15 mm."""
    lengths = tube_lengths(tray())
    assert lengths["c"] == pytest.approx(1.3 * 0.018 + 0.015, abs=1e-6)
    assert lengths["a"] == pytest.approx(1.3 * math.hypot(0.068, 0.018) + 0.015, abs=1e-6)
    assert lengths["a"] == lengths["e"] and lengths["b"] == lengths["d"]


def test_a_spine_runs_backwards_and_carries_its_block() -> None:
    """Rear block: front joint, minus the spine's length along x, minus the rear joint's offset; inlets along the spine."""
    robot = tray()
    body = replace(
        robot.body,
        blocks=(*robot.body.blocks, Block("rear", (0.02, 0.02, 0.02), 0.01)),
        spines=(
            Spine(
                "s",
                "trunk",
                "rear",
                (-0.08, 0.0, 0.0),
                (0.01, 0.0, 0.0),
                "down",
                (Unit("leg", "s1"), Unit("leg", "s2")),
            ),
        ),
    )
    robot = replace(robot, body=body)
    assert block_places(robot)["rear"] == pytest.approx([-0.08 - 0.064 - 0.01, 0.0, 0.0])
    places = inlet_places(robot)
    assert places["s1"] == pytest.approx([-0.08, 0.0, 0.0])
    assert places["s2"] == pytest.approx([-0.112, 0.0, 0.0])


def test_output_volume_by_hand() -> None:
    """Port 0.6 mL, control chamber of the next valve 0.05 mL, bore 2 mm times the tube's length."""
    pattern = counted_pattern(tray(), in_order(tray()))[0]
    bore = math.pi * 1e-6 * tube_lengths(tray())["a"]
    assert output_volumes(pattern)[0] == pytest.approx(0.65e-6 + bore, rel=1e-9)
    assert circuit_of(tray(), in_order(tray())).network.volume_m3[0] == pytest.approx(0.65e-6 + bore, rel=1e-9)


def test_turned_wirings_are_one_pattern() -> None:
    """Turning every output on by k changes nothing but the count: one pattern, one key, for every wiring of five legs."""
    for order in itertools.islice(itertools.permutations(range(1, 6)), 0, 120, 7):
        wiring = Wiring.of(dict(zip("abcde", order, strict=True)))
        for steps in range(1, 5):
            assert load_pattern(tray(), wiring.turned(steps, 5)) == load_pattern(tray(), wiring)
        assert load_pattern(tray(), wiring.turned(2, 5)).key() == load_pattern(tray(), wiring).key()


def test_patterns_of_all_wirings_by_brute_force() -> None:
    """120 wirings of lengths (L, M, S, M, L) round a ring: as many patterns as cyclic words of {L, L, M, M, S}: 5!/(2! 2!)/5 = 6."""
    orders = itertools.permutations(range(1, 6))
    keys = {load_pattern(tray(), Wiring.of(dict(zip("abcde", order, strict=True)))).key() for order in orders}
    assert len(keys) == 6


def test_unequal_stages_are_not_turned_into_one_another() -> None:
    """With one stage as built different, turned wirings load that stage differently."""
    robot = with_ring(tray(), overrides=(StageOverride(2, port_m3=1e-6),))
    wiring = in_order(robot)
    assert load_pattern(robot, wiring) != load_pattern(robot, wiring.turned(1, 5))
    assert sorted(s.port_m3 for s in load_pattern(robot, wiring).stages)[-1] == 1e-6


def test_placement_finds_the_way_back() -> None:
    """Stage k of the pattern is output k + turn of the robot: the inlets on it say so."""
    wiring = wiring_from_text("a=2 b=5 c=1 d=4 e=held", tray().inlets(), 5)
    pattern, placement = placed_pattern(tray(), wiring)
    for k, inlets in enumerate(placement.inlets):
        output = (k + placement.turn) % 5 + 1
        assert inlets == wiring.inlets_on(output)
        assert len(pattern.stages[k].loads) == len(inlets)
    assert placement.held == ("e",) and len(pattern.held) == 1


def test_held_bellows_hang_on_the_manifold() -> None:
    """Their volume and their tube's add to the buffer; open ones add nothing."""
    held = Wiring.of(dict.fromkeys(tray().inlets(), "held"))
    bore = sum(math.pi * 1e-6 * length for length in tube_lengths(tray()).values())
    more = circuit_of(tray(), held).manifold.volume_m3 - circuit_of(tray(), unloaded(tray())).manifold.volume_m3
    assert more == pytest.approx(5 * 2.4e-6 + bore, rel=1e-9)
