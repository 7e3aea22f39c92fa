"""The ringing fit: exact on sums of exponentials, and within its own error of the modes by direct integration."""

from dataclasses import replace
from fractions import Fraction

import numpy as np
import pytest

from knell.methods import radial
from knell.methods.original import original_equation
from knell.methods.ringfit import matrix_pencil, ringing, ringing_of, two_loudest
from knell.physics.background import PowerLaw

# Schwarzschild, corners and middle of the default grid (n = 3 … 6, κ = 1/4 … 1, ℓ = 2, 3); all of it in the slow test.
CORNERS = [
    (PowerLaw(3, Fraction(0)), 2, 0.3737 - 0.0890j),
    (PowerLaw(3, Fraction(1, 4)), 2, 0.3804 - 0.0878j),
    (PowerLaw(3, Fraction(1)), 3, 0.6564 - 0.0807j),
    (PowerLaw(6, Fraction(1, 4)), 3, 0.6008 - 0.0911j),
    (PowerLaw(6, Fraction(1)), 2, 0.3762 - 0.0819j),
    (PowerLaw(4, Fraction(3, 4)), 2, 0.3852 - 0.0822j),
]


def test_matrix_pencil_recovers_a_sum_of_exponentials():
    omega = np.array([0.37 - 0.09j, 0.35 - 0.27j, -0.05j])
    t = 1.3 * np.arange(48)
    samples = np.cos(omega[0].real * t) * np.exp(omega[0].imag * t)
    samples = samples + 3 * np.sin(omega[1].real * t) * np.exp(omega[1].imag * t) + 0.1 * np.exp(-0.05 * t)
    found = matrix_pencil(samples, 1.3, 5)
    expected = np.concatenate([omega, -omega[:2].conj()])
    # no noise but rounding, 1e-16, which the Hankel matrix's condition (1e4) amplifies
    assert all(np.min(np.abs(found - w)) < 1e-10 for w in expected)
    assert two_loudest(samples, 1.3, 5)[0] == pytest.approx(omega[1], abs=1e-10)  # three times as loud


def test_a_signal_that_does_not_oscillate_is_an_error():
    samples = np.exp(-0.1 * np.arange(48.0)) + np.exp(-0.3 * np.arange(48.0))
    with pytest.raises(ArithmeticError, match="does not ring"):
        two_loudest(samples, 1.0, 2)


@pytest.mark.parametrize(("background", "ell", "seed"), CORNERS, ids=str)
def test_error_of_the_fundamental_contains_the_mode_and_is_small(background, ell, seed):
    ring = ringing(background, "axial", ell)
    run = radial.solve(background, "axial", ell, seed, 12)
    assert run.status == "ok" and abs(complex(run.frequency) - seed) < 2e-3
    deviation = abs(ring.fundamental.value - complex(run.frequency))
    assert deviation <= ring.fundamental.error <= 1e-5 * abs(run.frequency)


def test_error_of_the_overtone_contains_the_mode():
    background = PowerLaw(3, Fraction(9, 10))
    ring = ringing(background, "axial", 2)
    run = radial.solve(background, "axial", 2, 0.3839 - 0.2423j, 12)
    assert ring.overtone is not None
    assert abs(ring.overtone.value - complex(run.frequency)) <= ring.overtone.error < 0.02 * 0.46


def test_lowest_scalar_rings_too_and_says_how_badly():
    ring = ringing(PowerLaw(3, Fraction(0)), "scalar", 0)
    run = radial.solve(PowerLaw(3, Fraction(0)), "scalar", 0, 0.1105 - 0.1049j, 12)
    assert abs(ring.fundamental.value - complex(run.frequency)) <= ring.fundamental.error < 0.02 * 0.15


def test_a_coefficient_off_by_a_hundredth_of_a_percent_shows():
    equation = original_equation(PowerLaw(4, Fraction(1, 2)), "axial", 2)
    disturbed = replace(equation, mass_weight=equation.mass_weight * (1 + Fraction(1, 10**4)))
    right, wrong = (ringing_of(e).fundamental for e in (equation, disturbed))
    assert abs(right.value - wrong.value) > 3 * (right.error + wrong.error)


@pytest.mark.slow
@pytest.mark.parametrize("exponent", [3, 4, 5, 6])
@pytest.mark.parametrize("ell", [2, 3])
def test_error_contains_the_mode_along_the_default_grid(exponent, ell):
    for coupling in (Fraction(k, 20) for k in range(1, 21)):
        background = PowerLaw(exponent, coupling)
        ring = ringing(background, "axial", ell)
        run = radial.solve(background, "axial", ell, ring.fundamental.value, 12)
        assert run.status == "ok", run.reason
        deviation = abs(ring.fundamental.value - complex(run.frequency))
        assert deviation <= ring.fundamental.error <= 1e-5 * abs(run.frequency), (exponent, coupling, ell)
