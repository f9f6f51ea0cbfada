"""The flow parts that several tests of the air side go over, and the gas of the reference figures."""

from __future__ import annotations

from gaitlab.air.gas import Gas
from gaitlab.robot.circuit import BenchRestrictor, FlowPart, IsoPart, RectDuct, RoundDuct, SquareDuct

GAS = Gas(101_325.0, 293.15)
ATMOSPHERE_Pa = 101_325.0

PARTS: dict[str, FlowPart] = {
    "square 0.3": SquareDuct(0.3e-3, 10e-3),
    "square 0.5": SquareDuct(0.5e-3, 10e-3),
    "square 1.0": SquareDuct(1.0e-3, 10e-3),
    "square 1.2 short": SquareDuct(1.2e-3, 6e-3),
    "slot 1 x 0.2": RectDuct(1e-3, 0.2e-3, 10e-3),
    "slot 2 x 0.5": RectDuct(2e-3, 0.5e-3, 30e-3),
    "tube 0.15 x 100": RoundDuct(0.15e-3, 100e-3),
    "tube 0.4 x 50": RoundDuct(0.4e-3, 50e-3),
    "tube 1 x 200": RoundDuct(1e-3, 200e-3),
    "tube 1 x 1000": RoundDuct(1e-3, 1.0),
    "tube 2 x 50": RoundDuct(2e-3, 50e-3),
    "tube 2 x 1000": RoundDuct(2e-3, 1.0),
    "tube 4 x 300 rounded": RoundDuct(4e-3, 300e-3, 0.05),
    "data sheet": IsoPart(2e-10, 0.4),
    "bench reading": BenchRestrictor(57e3, 41e3, 7e-3 / 60.0, "mass"),
}
