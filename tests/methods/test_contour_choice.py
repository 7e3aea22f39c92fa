"""The choice of contours: the rule against what AIM does on them."""

from __future__ import annotations

from fractions import Fraction

import numpy as np
import pytest

from knell.methods.contour import obstacle
from knell.methods.contour_choice import TILT_STEP, choose, expected
from knell.physics.background import PowerLaw
from knell.physics.equation import equation_floats

FUNDAMENTAL = 0.37367 - 0.08896j


def sigma_of(equation, omega):
    return 1j * omega / equation.mass


@pytest.mark.parametrize("coupling", [0, Fraction(1, 2), Fraction(9, 10), Fraction(99, 100), 1])
@pytest.mark.parametrize("exponent", [2, 3, 6, 9])
def test_two_tilts_that_satisfy_the_condition(exponent, coupling):
    equation = equation_floats(PowerLaw(exponent, Fraction(coupling)), "axial", 2)
    choice = choose(equation, sigma_of(equation, FUNDAMENTAL), 200)
    assert choice.reason == ""
    assert obstacle(equation, choice.main) == obstacle(equation, choice.tilted) == ""
    assert abs(choice.main.tilt - choice.tilted.tilt) > 0.99 * TILT_STEP
    assert choice.expected > 6


def test_refusal_says_why():
    equation = equation_floats(PowerLaw(6, Fraction(9, 10)), "axial", 2)
    choice = choose(equation, sigma_of(equation, 0.2 - 1.4j), 20)
    assert choice.main is None and choice.tilted is None
    assert "depth 20" in choice.reason


def test_the_extremal_end_wants_both_ends_turned_the_same_way():
    extremal = equation_floats(PowerLaw(4, Fraction(1)), "axial", 2)
    contour = choose(extremal, sigma_of(extremal, 0.2430264 - 0.6155881j), 100).main
    assert np.angle(contour.far) < 0 and np.angle(contour.near) < 0
    schwarzschild = equation_floats(PowerLaw(4, Fraction(0)), "axial", 2)
    damped = choose(schwarzschild, sigma_of(schwarzschild, 0.2075146 - 0.9468449j), 100).main
    assert np.angle(damped.far) < np.angle(damped.near)


def test_digits_expected_of_the_real_path_grow_as_the_square_root_of_the_depth():
    equation = equation_floats(PowerLaw(4, Fraction(1)), "axial", 2)
    k = s = np.array([1 + 0j])
    digits = [float(expected(equation, sigma_of(equation, FUNDAMENTAL), N, k, s).digits[0]) for N in (100, 400)]
    # All singular points but two irregular ones are far: the exponents are exactly ∝ √N.
    assert digits[1] == pytest.approx(2 * digits[0], rel=1e-12)


def test_more_damped_modes_want_more_tilt():
    equation = equation_floats(PowerLaw(4, Fraction(0)), "axial", 2)
    k = np.exp(-1j * np.radians(np.arange(0, 60, 2)))
    best = [
        np.argmax(expected(equation, sigma_of(equation, omega), 4000, k, np.ones_like(k)).digits)
        for omega in (1 - 0.01j, 0.5 - 0.5j, 0.01 - 1j)
    ]
    assert best[0] <= best[1] <= best[2]
