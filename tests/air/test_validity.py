"""Named warnings where the models leave their ground."""

from __future__ import annotations

import dataclasses

import pytest

from gaitlab.air.validity import circuit_warnings, duct_warnings, knudsen_number
from gaitlab.robot.circuit import IsoPart, RectDuct, Ring, RoundDuct, SquareDuct, StageOverride, Valve, ValveGeometry
from tests.air.parts import GAS


def names(texts: tuple[str, ...]) -> list[str]:
    """The warnings' names."""
    return [text.split(":")[0] for text in texts]


def test_knudsen_number_of_the_common_channel() -> None:
    # 0.5 mm at 44 kPa: 3.0e-4 (computed independently), slip of 0.24 %: not worth a warning.
    assert knudsen_number(SquareDuct(0.5e-3, 10e-3), 44e3, GAS) == pytest.approx(3.0e-4, rel=0.02)
    assert duct_warnings(SquareDuct(0.5e-3, 10e-3), 44e3, GAS) == ()


def test_thin_gas_is_named() -> None:
    assert names(duct_warnings(SquareDuct(10e-6, 10e-3), 44e3, GAS, roughness_m=0.0)) == ["knudsen"]
    assert names(duct_warnings(SquareDuct(20e-6, 10e-3), 44e3, GAS, roughness_m=0.0)) == []


def test_holes_are_named() -> None:
    assert names(duct_warnings(RoundDuct(2e-3, 1.9e-3), 44e3, GAS)) == ["aspect_ratio"]
    assert names(duct_warnings(RoundDuct(2e-3, 2.1e-3), 44e3, GAS)) == []


def test_rough_walls_are_named() -> None:
    assert names(duct_warnings(RectDuct(1e-3, 0.2e-3, 10e-3), 44e3, GAS, roughness_m=20e-6)) == ["wall_roughness"]
    assert names(duct_warnings(RectDuct(1e-3, 0.2e-3, 10e-3), 44e3, GAS, roughness_m=15e-6)) == []


def test_a_ring_names_the_part_too() -> None:
    valve = Valve(16e3, 6e3, 0.15, SquareDuct(1.2e-3, 6e-3))
    ring = Ring(5, SquareDuct(0.5e-3, 10e-3), valve, 0.6e-6, 0.05e-6)
    assert circuit_warnings(ring, GAS, 44e3) == ()
    hole = dataclasses.replace(ring, resistor=SquareDuct(0.5e-3, 0.3e-3))
    assert [text[:28] for text in circuit_warnings(hole, GAS, 44e3)] == ["ring.resistor: aspect_ratio:"]
    drawn = ValveGeometry(0.5e-3, 8e-3, 0.1e-3, IsoPart(2e-9, 0.4), shore_A=30.0)
    own = StageOverride(2, resistor=SquareDuct(0.5e-3, 0.3e-3), valve=drawn)
    found = circuit_warnings(dataclasses.replace(ring, overrides=(own,)), GAS, 44e3)
    assert [":".join(text.split(":")[:2]) for text in found] == [
        "ring.stage 2 resistor: aspect_ratio",
        "ring.stage 2 valve: estimate",
        "ring.stage 2 valve: shallow_gap",
    ]
