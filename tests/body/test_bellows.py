"""The law of one bellows: bench numbers in, bench numbers out; drawings against beam, strip and energy arguments."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest
from scipy.integrate import quad
from scipy.optimize import brentq

from gaitlab.body import bellows_geometry as drawing
from gaitlab.body.bellows import FULL_VACUUM_PA, STOP_WIDTH, bellows_law
from gaitlab.errors import InputError
from gaitlab.robot.parts import Bellows, BellowsGeometry, MeasuredBend
from tests.body.rigs import bending, contracting

RUBBER = BellowsGeometry(outer_m=0.02, inner_m=0.014, wall_m=0.001, convolutions=8, shore_A=30, eccentricity_m=0.008)


def drawn(action: str, geometry: BellowsGeometry = RUBBER) -> Bellows:
    """A bellows that only its drawing says anything about."""
    return Bellows("drawn", action, 0.032, 0.006, 4, 4e-6, 1.5e-6, geometry=geometry)


def unmeasured() -> Bellows:
    """A bending bellows of which both stiffnesses are known, but not how far it bends."""
    return replace(bending(), measured_bend=None, bend_stiffness_N_m_rad=0.02)


def test_axial_rate_of_a_metal_bellows_is_that_of_ejma(monkeypatch: pytest.MonkeyPatch) -> None:
    """EJMA: f = 1.7 E D_m t³/(w³ C_f n), C_f = 1 (from memory); our strips give π/(2 (1 − 0.3²)) = 1.73 in place of 1.7."""
    monkeypatch.setattr(drawing, "POISSON_RUBBER", 0.3)
    steel = BellowsGeometry(outer_m=0.06, inner_m=0.048, wall_m=2e-4, convolutions=10, youngs_Pa=193e9)
    ejma = 1.7 * 193e9 * 0.054 * 2e-4**3 / (0.006**3 * 10)
    assert drawing.axial_rate(steel) == pytest.approx(ejma, rel=0.02)


def test_bend_rate_is_an_axial_rate_spread_over_a_ring() -> None:
    """∫ (k/2π) (e + r cos φ)² dφ over the ring of mean radius r, about the spine at eccentricity e."""
    mean, e, rate = drawing.mean_diameter(RUBBER), RUBBER.eccentricity_m, drawing.axial_rate(RUBBER)
    moment, _ = quad(lambda phi: rate / (2 * math.pi) * (e + 0.5 * mean * math.cos(phi)) ** 2, 0, 2 * math.pi)
    assert drawing.bend_rate(RUBBER) == pytest.approx(moment, rel=1e-9)


def test_routes_to_the_bending_stiffness_agree() -> None:
    """Stiffness, tip stiffness 3k/L² and blocked tip force 3kθ/(2L) of one and the same bellows give one law."""
    stiffness, free, length = 0.02, 0.8, 0.032
    base = bending(stiffness=stiffness, free_rad=free)
    tip = replace(base, measured_bend=MeasuredBend(free, 50e3, tip_stiffness_N_m=3 * stiffness / length**2))
    blocked = replace(base, measured_bend=MeasuredBend(free, 50e3, blocked_force_N=1.5 * stiffness * free / length))
    whole = replace(base, measured_bend=MeasuredBend(free, 50e3), bend_stiffness_N_m_rad=stiffness)
    for bellows in (tip, blocked, whole):
        law = bellows_law(bellows)
        assert (law.bend_stiffness, law.gain) == pytest.approx((stiffness, stiffness * free / 50e3))
    assert float(bellows_law(blocked).blocked_force(50e3)) == pytest.approx(1.5 * stiffness * free / length)


def test_measured_deflection_comes_back_at_its_vacuum_and_in_proportion() -> None:
    law = bellows_law(bending(free_rad=0.8))
    assert law.free_deflection([0.0, 25e3, 50e3]) == pytest.approx([0.0, 0.4, 0.8])
    assert law.source == "measured"
    pull = bellows_law(contracting(stroke_m=0.01, axial_N_m=300.0))
    assert float(pull.free_deflection(50e3)) == pytest.approx(0.01)
    assert float(pull.blocked_force(50e3)) == pytest.approx(3.0)
    assert float(pull.moment(50e3)) == 0.0 and float(law.force(50e3)) == 0.0


def test_blocked_force_of_a_drawn_bellows_is_effective_area_times_pressure() -> None:
    """A_e = π D_m²/4 with D_m = 17 mm: 227 mm², 11.3 N at 50 kPa; with the spine the moment is that times e."""
    pull, bend = bellows_law(drawn("contract")), bellows_law(drawn("bend"))
    assert pull.source == bend.source == "geometry"
    area = math.pi / 4 * 0.017**2
    assert float(pull.blocked_force(50e3)) == pytest.approx(area * 50e3)
    assert float(bend.moment(50e3)) == pytest.approx(area * 50e3 * 0.008)


@pytest.mark.parametrize("bellows", [bending(free_rad=1.2), contracting(), drawn("bend"), drawn("contract")])
def test_free_deflection_balances_pull_spring_and_stop(bellows: Bellows) -> None:
    """The closed form against a root finder on k x + stop(x) = pull, at vacuums before and past the solid limit."""
    law = bellows_law(bellows)
    for vacuum in np.linspace(1e3, FULL_VACUUM_PA, 7):
        pull = float(law.actuation(vacuum))
        root = brentq(lambda x, p=pull: law.stiffness * x + float(law.stop(x)) - p, 0.0, 10.0 * law.solid)
        assert float(law.free_deflection(vacuum)) == pytest.approx(root, rel=1e-9)
        assert root < (1.0 + STOP_WIDTH) * law.solid
    assert law.free_deflection(-20e3) == pytest.approx(-law.free_deflection(20e3))


@pytest.mark.parametrize("bellows", [bending(free_rad=1.2), contracting(), drawn("contract")])
def test_volume_derivative_is_the_slope_of_the_volume(bellows: Bellows) -> None:
    law = bellows_law(bellows)
    vacuum = np.linspace(-5e3, 100e3, 40)
    slope = (law.volume(vacuum + 1.0)[0] - law.volume(vacuum - 1.0)[0]) / 2.0
    assert law.volume(vacuum)[1] == pytest.approx(slope, rel=1e-4)
    assert (law.volume(vacuum)[0] > 0).all() and (law.volume(vacuum)[1] < 0).all()


def test_volume_follows_the_shape() -> None:
    """swept_mL is what the bench deflection takes out."""
    law = bellows_law(bending(free_rad=0.8))
    assert float(law.volume(0.0)[0]) == pytest.approx(2.4e-6)
    assert float(law.volume(50e3)[0]) == pytest.approx(1.6e-6)
    assert float(law.volume_at(0.4)) == pytest.approx(2.0e-6)


def test_solid_limit_of_a_drawing_is_where_the_walls_touch() -> None:
    """32 mm less 16 walls of 1 mm leaves 16 mm; over the spine's 8 mm and the radius of 10 mm that is 0.889 rad."""
    assert bellows_law(drawn("contract")).solid == pytest.approx(0.016)
    assert bellows_law(drawn("bend")).solid == pytest.approx(0.016 / 0.018)


def test_measurement_beats_the_drawing_and_the_drawing_fills_the_gaps() -> None:
    mixed = replace(drawn("bend"), measured_bend=MeasuredBend(0.5, 40e3, bend_stiffness_N_m_rad=0.02))
    law = bellows_law(mixed)
    assert law.source == "measured" and law.bend_stiffness == 0.02
    assert law.axial_stiffness == pytest.approx(drawing.axial_rate(RUBBER))


@pytest.mark.parametrize(
    ("bellows", "words"),
    [
        (unmeasured(), "bellows.bend must be given measured_bend or geometry"),
        (replace(bending(), measured_bend=None), "bellows.bend must be given one of bend_stiffness_N_m_rad, or a geom"),
        (replace(bending(), axial_stiffness_N_m=None), "axial_stiffness_N_m, or a geometry"),
        (replace(bending(), bend_stiffness_N_m_rad=0.01), "bellows.bend must be given one of"),
        (replace(bending(), solid_bend_rad=0.5), "at least the measured free deflection"),
        (replace(contracting(), solid_stroke_m=0.05), "below the length (32 mm)"),
        (replace(bending(), swept_volume_m3=2.3e-6), "below the rest volume (2.4 mL) at full vacuum"),
        (drawn("bend", replace(RUBBER, eccentricity_m=0.0)), "eccentricity_mm must be above 0 mm"),
        (drawn("bend", replace(RUBBER, inner_m=0.03)), "inner_mm must be below outer_mm (20 mm)"),
        (drawn("bend", replace(RUBBER, youngs_Pa=1e6)), "exactly one of youngs_MPa, shore_A and spring_rate_N_mm"),
        (drawn("bend", replace(RUBBER, convolutions=17)), "fewer than fill the length of 32 mm"),
    ],
)
def test_a_law_that_cannot_be_is_refused(bellows: Bellows, words: str) -> None:
    with pytest.raises(InputError, match=words.replace("(", r"\(").replace(")", r"\)")):
        bellows_law(bellows)


def test_doubtful_laws_say_so() -> None:
    assert "no_solid_limit" in bellows_law(replace(bending(), solid_bend_rad=None)).warnings[0]
    assert "axial_from_drawing" in bellows_law(drawn("bend")).warnings[0]
    assert "swept_too_small" in bellows_law(replace(bending(), swept_volume_m3=2e-7)).warnings[0]
    assert bellows_law(bending()).warnings == ()


def test_a_guessed_limit_of_a_contracting_bellows_stays_within_its_length() -> None:
    """Half way from the measured stroke to the whole length, where one and a half strokes would be too much."""
    long = replace(contracting(stroke_m=0.024), solid_stroke_m=None, axial_stiffness_N_m=60.0)
    assert bellows_law(replace(long, swept_volume_m3=1e-6)).solid == pytest.approx(0.028)


def test_a_measured_bend_beats_a_drawing_that_says_it_cannot_be() -> None:
    far = replace(drawn("bend"), measured_bend=MeasuredBend(1.2, 50e3, bend_stiffness_N_m_rad=0.02))
    assert bellows_law(far).solid == pytest.approx(1.2)
