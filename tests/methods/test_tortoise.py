"""The tortoise coordinate: its derivative, its inverse, and f next to the horizon."""

from fractions import Fraction

import numpy as np
import pytest

from knell.methods.original import original_equation
from knell.methods.tortoise import Tortoise
from knell.physics.background import PowerLaw

BACKGROUNDS = [
    PowerLaw(2, Fraction(0)),
    PowerLaw(6, Fraction(1, 2)),
    PowerLaw(3, Fraction(9999, 10000)),
    PowerLaw(4, Fraction(1)),
    PowerLaw(5, Fraction(-2)),
]


@pytest.mark.parametrize("background", BACKGROUNDS, ids=str)
def test_derivative_is_one_over_f(background):
    equation = original_equation(background, "scalar", 0)
    tortoise = Tortoise.of(equation)
    log_x = np.linspace(-3.0, 4.0, 15)
    step = 1e-3
    stencil = [tortoise.r_star(log_x + k * step) for k in (-2, -1, 1, 2)]
    # fourth-order difference: error step⁴ times the fifth derivative, some 1e-11 of the derivative itself,
    # and rounding of r* (up to 500 for the nearly degenerate horizon) over the step, 1e-10
    derivative = (stencil[0] - 8 * stencil[1] + 8 * stencil[2] - stencil[3]) / (12 * step)
    x = np.exp(log_x)
    np.testing.assert_allclose(derivative * equation.f(tortoise.horizon + x) / x, 1.0, rtol=3e-9)


@pytest.mark.parametrize("background", BACKGROUNDS, ids=str)
def test_inverse(background):
    tortoise = Tortoise.of(original_equation(background, "scalar", 0))
    r_star = np.linspace(-300.0, 300.0, 1001)
    # Newton ends at steps below 1e-11 in ln x, hence r* to 1e-11 times dr*/dln x <= 300, before the last quadratic step
    np.testing.assert_allclose(tortoise.r_star(tortoise.log_x(r_star)), r_star, atol=5e-9)


def test_f_keeps_its_relative_accuracy_next_to_the_horizon():
    equation = original_equation(PowerLaw(4, Fraction(1, 2)), "scalar", 0)
    tortoise = Tortoise.of(equation)
    # f/x → f'(r_h), while 1 - 2m/r has lost every digit at x = 1e-20
    ratio = tortoise.f(np.array([np.log(1e-20), np.log(1e-12)])) / np.array([1e-20, 1e-12])
    np.testing.assert_allclose(ratio, 1 / tortoise.log, rtol=1e-11)
