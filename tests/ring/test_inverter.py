"""One inverter at rest: levels against hand-made balances, gain against the table, a snap against its own equation."""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy.optimize import brentq

from gaitlab.air.duct import exact_mass_flow
from gaitlab.air.gas import Gas
from gaitlab.ring.inverter import gain_needed, inverter_curve
from gaitlab.ring.working import working_vacuum
from gaitlab.robot.circuit import FixedVacuum, RoundDuct, SquareDuct, Valve
from tests.ring.robots import tray, with_supply

GAS = Gas()
RESISTOR = SquareDuct(0.3e-3, 10e-3)
VALVE = Valve(18e3, 6e3, 0.0, SquareDuct(0.45e-3, 6e-3), hysteresis_Pa=0.0)


def test_levels_by_the_exact_duct_model() -> None:
    """Full control: resistor in series with the open valve, both by the exact model; within the fast form's 2 %."""
    curve = inverter_curve(RESISTOR, VALVE, 48e3, GAS)
    ambient = GAS.pressure_Pa

    def excess(output: float) -> float:
        return exact_mass_flow(VALVE.open, ambient, output, GAS) - exact_mass_flow(
            RESISTOR, output, ambient - 48e3, GAS
        )

    low = ambient - brentq(excess, ambient - 30e3, ambient - 100.0)
    assert curve.low_Pa == pytest.approx(low, rel=0.05)
    assert curve.high_Pa == pytest.approx(48e3, rel=0.01)
    assert np.all(np.diff(curve.rising_Pa) <= 1.0)


def test_without_sealing_and_hysteresis_there_is_one_curve() -> None:
    """Up and down agree, and the switch lies inside the opening span."""
    curve = inverter_curve(RESISTOR, VALVE, 48e3, GAS)
    assert curve.rising_Pa == pytest.approx(curve.falling_Pa, abs=1.0)
    assert 18e3 < curve.switch_in_Pa < 24e3
    assert curve.switch_in_Pa == pytest.approx(curve.switch_out_Pa, abs=1.0)


def test_hysteresis_parts_the_switch_points() -> None:
    """A valve that closes 6 kPa below its opening point lets go later than it takes hold."""
    valve = Valve(18e3, 2e3, 0.0, VALVE.open, hysteresis_Pa=6e3)
    curve = inverter_curve(RESISTOR, valve, 48e3, GAS)
    assert 3e3 < curve.switch_in_Pa - curve.switch_out_Pa < 6e3


def test_gain_of_a_soft_valve_by_differences() -> None:
    """The steepest step is the derivative of the balanced curve: target slope times the slope of output with opening."""
    valve = Valve(10e3, 30e3, 0.0, VALVE.open, hysteresis_Pa=0.0)
    curve = inverter_curve(RESISTOR, valve, 48e3, GAS)
    slopes = -np.diff(curve.rising_Pa) / np.diff(curve.control_Pa)
    assert curve.gain_max == pytest.approx(float(slopes.max()))
    assert 1.0 < curve.gain_max < 50.0


def test_logic_low_of_two_laminar_tubes() -> None:
    """A divider of long thin tubes on 87 kPa: m ∝ (p_u² − p_d²)/L, so low is 20 kPa where the lengths are as 1.754 to 1.

    (81.3² − 14.3²)/(101.3² − 81.3²) = 1.754. With constant resistances it would take 67/20 = 3.35, the figure worked out
    from Jensen et al. 2007 (J. Microelectromech. Syst. 16(6) 1378): the linear circuit analogy is not the model here.
    """
    high, middle, low = 101.325, 81.325, 14.325
    ratio = (middle**2 - low**2) / (high**2 - middle**2)
    valve = Valve(18e3, 6e3, 0.0, RoundDuct(0.1e-3, 0.5, 0.0))
    curve = inverter_curve(RoundDuct(0.1e-3, 0.5 * ratio, 0.0), valve, 87e3, GAS)
    assert ratio == pytest.approx(1.754, abs=1e-3)
    assert curve.low_Pa == pytest.approx(20e3, rel=0.02)


@pytest.mark.parametrize(("stages", "gain"), [(3, 2.0), (5, 1.236068)])
def test_gain_needed(stages: int, gain: float) -> None:
    """sec(π/N), to the printed digits."""
    assert gain_needed(stages) == pytest.approx(gain, abs=1e-6)
    assert math.isinf(gain_needed(2)) and math.isinf(gain_needed(1))


def test_working_vacuum() -> None:
    """A house line keeps its vacuum; a pump gives some up, the more the smaller it is."""
    assert working_vacuum(with_supply(tray(), FixedVacuum(45e3))) == pytest.approx(45e3, abs=2.0)
    small = working_vacuum(with_supply(tray(), free_flow_m3_s=3e-3 / 60.0))
    assert 20e3 < small < working_vacuum(tray()) < 60e3
