"""The double-null evolution: an exact solution, the order of the scheme, the honesty of its error, causality."""

from dataclasses import replace
from fractions import Fraction
from itertools import pairwise
from math import erf, pi, sqrt

import numpy as np
import pytest

from knell.methods.original import original_equation
from knell.methods.timedomain import Pulse, evolve, march, potential_on, potential_peak
from knell.physics.background import PowerLaw

PULSE = Pulse(centre=3.0, width=1.5, observer=12.0)
EQUATION = original_equation(PowerLaw(4, Fraction(1, 2)), "axial", 2)


def test_free_waves_travel_without_change():
    free = replace(EQUATION, angular=Fraction(0), mass_weight=Fraction(0), slope_weight=Fraction(0))
    signal = evolve(free, PULSE, 20.0, 0.1)
    # d'Alembert: half the integral of the initial rate over [r*-t, r*+t]
    half = PULSE.width * sqrt(pi / 2) / 2
    ends = [(PULSE.observer - PULSE.centre + sign * signal.times) / (PULSE.width * sqrt(2)) for sign in (-1, 1)]
    exact = half * np.array([erf(late) - erf(early) for early, late in zip(*ends, strict=True)])
    # left after the extrapolation: h⁶ times the sixth derivative of the pulse over 7!, about 1e-9
    np.testing.assert_allclose(signal.values, exact, atol=1e-8)


@pytest.mark.parametrize("background", [PowerLaw(4, Fraction(1, 2)), PowerLaw(3, Fraction(1))], ids=str)
def test_one_lattice_is_of_second_order_and_the_extrapolated_error_is_honest(background):
    equation = original_equation(background, "axial", 2)
    exact = evolve(equation, PULSE, 40.0, 0.05).values[::4]  # every 0.4 M, its own error far below the ones compared
    coarse, fine = (np.max(np.abs(march(equation, PULSE, 40.0, h)[:: round(0.2 / h)] - exact)) for h in (0.2, 0.1))
    assert coarse / fine == pytest.approx(4, rel=0.05)  # the next order changes the ratio by h², about 1 %
    signal = evolve(equation, PULSE, 40.0, 0.2)
    assert np.max(np.abs(signal.values - exact)) < np.max(signal.error) < 0.01 * fine


def test_extrapolation_is_of_sixth_order():
    runs = [evolve(EQUATION, PULSE, 40.0, h).values[:: round(0.4 / h)] for h in (0.4, 0.2, 0.1)]
    changes = [np.max(np.abs(a - b)) for a, b in pairwise(runs)]
    # 2⁶ = 64; fourth order would give 16, and the next order changes the ratio by some h² ω² ~ 10 %
    assert 45 < changes[0] / changes[1] < 80


def test_nothing_arrives_before_light_does():
    # the observer is 9 M away; at 1 M the pulse, 5.3 widths off, is below exp(-14) of its height
    assert np.max(np.abs(march(EQUATION, PULSE, 1.0, 0.05))) < 1e-6


def test_an_unstable_step_is_an_error():
    steep = original_equation(PowerLaw(3, Fraction(0)), "scalar", 40)
    assert potential_peak(steep)[1] * 0.5**2 > 4
    with pytest.raises(ValueError, match="unstable"):
        evolve(steep, PULSE, 10.0, 0.5)


def test_potential_peak_lies_on_the_potential():
    place, height = potential_peak(EQUATION)
    grid = potential_on(EQUATION, np.linspace(place - 5, place + 5, 2001))
    # the peak is found on a grid of 1 % in r - r_h, and is flat: height to (1 %)²
    assert height == pytest.approx(np.max(grid), rel=1e-4)
    assert abs(np.argmax(grid) - 1000) < 20  # 0.1 M
