"""Late-time tails: Price's exponents where doubles carry them, and the tail of the degenerate horizon."""

from fractions import Fraction
from math import sqrt

import numpy as np
import pytest

from knell.methods.original import original_equation
from knell.methods.tail import local_exponent, tail, tail_of
from knell.methods.timedomain import Signal
from knell.physics.background import PowerLaw


def test_local_exponent_of_a_power():
    times = np.arange(0, 500, 1.6)
    values = np.concatenate([[0.0], times[1:] ** -4.25])
    exponent, error = local_exponent(Signal(1.6, values, 1e-9 * np.abs(values)), 400.0)
    assert exponent == pytest.approx(4.25, abs=1e-9) and error < 1e-6


@pytest.mark.parametrize(
    "background", [PowerLaw(3, Fraction(0)), PowerLaw(6, Fraction(1, 2)), PowerLaw(4, Fraction(1))], ids=str
)
def test_price_exponent_of_the_lowest_scalar_within_two_percent_at_1000_m(background):
    # R. Price, Phys. Rev. D 5, 2419 (1972): 2ℓ+3, approached from above like 1/t
    late = tail(background, "scalar", 0)
    assert late.time == 1000.0 and late.error < 1e-3
    assert 3 < late.exponent < 3 * 1.02


@pytest.mark.parametrize(("field", "ell"), [("scalar", 1), ("electromagnetic", 1), ("axial", 2)])
def test_price_exponent_of_higher_multipoles(field, ell):
    late = tail(PowerLaw(4, Fraction(1, 2)), field, ell)
    expected = 2 * ell + 3
    # 1/t corrections of half a percent at 500 M, plus what the rounding of doubles leaves (stated)
    assert abs(late.exponent - expected) < 0.005 * expected + late.error
    assert late.error < 0.05 * expected


def test_degenerate_horizon_has_a_tail_of_its_own():
    # V → ℓ'(ℓ'+1)/r*² at the horizon with ℓ'(ℓ'+1) = (ℓ-1)(ℓ+2)/(n/2): U r_h² = (ℓ-1)(ℓ+2) and F₀ r_h² = n/2 there
    effective = sqrt(0.25 + 4 / 3) - 0.5
    late = tail_of(original_equation(PowerLaw(6, Fraction(1)), "axial", 2), 700.0)
    assert abs(late.exponent - (2 * effective + 2)) < late.error < 0.1
