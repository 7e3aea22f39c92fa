"""The eikonal witness and the large-ℓ expansion, against direct integration."""

from fractions import Fraction
from math import log2, sqrt

import pytest

from knell.methods.eikonal import eikonal
from knell.methods.radial import solve
from knell.physics.background import PowerLaw

SCHWARZSCHILD = PowerLaw(3, Fraction(0))
SPIN = {"scalar": 0, "electromagnetic": 1, "axial": 2}


def dolan_ottewill(spin: int, ell: int, overtone: int) -> complex:
    """S. Dolan, A. Ottewill, Class. Quantum Grav. 26, 225003 (2009), to L⁻³; quoted from memory, recomputed."""
    L, N, b = ell + 0.5, overtone + 0.5, 1 - spin**2
    value = L - 1j * N + (b / 3 - 5 * N**2 / 36 - 115 / 432) / L
    value -= 1j * N * (b / 9 + 235 * N**2 / 3888 - 1415 / 15552) / L**2
    third = -(b**2) / 27 + (204 * N**2 + 211) * b / 3888 + (854160 * N**4 - 1664760 * N**2 - 776939) / 40310784
    return (value + third / L**3) / sqrt(27)


@pytest.mark.parametrize("field", SPIN)
@pytest.mark.parametrize("overtone", [0, 1])
def test_remainder_of_the_large_ell_expansion_falls_like_the_fourth_power(field, overtone):
    remainders = []
    for ell in (10, 20):
        expected = dolan_ottewill(SPIN[field], ell, overtone)
        run = solve(SCHWARZSCHILD, field, ell, expected, 20)
        assert run.status == "ok", run.reason
        remainders.append(abs(complex(run.frequency) - expected))
    # (20.5/10.5)^4 = 14.5; the next order changes the power by about 1/L
    assert log2(remainders[0] / remainders[1]) / log2(20.5 / 10.5) == pytest.approx(4, abs=0.3)


@pytest.mark.parametrize("field", SPIN)
@pytest.mark.parametrize("overtone", [0, 1])
def test_correction_is_the_first_coefficient_of_the_large_ell_expansion(field, overtone):
    estimate = eikonal(SCHWARZSCHILD, field, 7, overtone)
    N, b = overtone + 0.5, 1 - SPIN[field] ** 2
    coefficient = (b / 3 - 5 * N**2 / 36 - 115 / 432) / sqrt(27)
    assert (estimate.corrected - estimate.leading) * 7.5 == pytest.approx(coefficient, abs=1e-12)
    assert estimate.leading == pytest.approx((7.5 - 1j * N) / sqrt(27), abs=1e-12)


@pytest.mark.parametrize("background", [PowerLaw(4, Fraction(1)), PowerLaw(6, Fraction(1, 2))], ids=str)
@pytest.mark.parametrize("field", ["axial", "electromagnetic", "scalar"])
def test_deformed_holes_leave_what_is_stated(background, field):
    left = []
    for ell in (8, 16):
        estimate = eikonal(background, field, ell, 0)
        run = solve(background, field, ell, estimate.corrected, 15)
        assert run.status == "ok", run.reason
        omega = complex(run.frequency)
        left.append(abs(omega - estimate.corrected))
        # the stated remainder is the first term left out; the next is smaller by about 1/L
        assert abs(omega - estimate.leading) == pytest.approx(estimate.remainder, rel=0.5 / ell)
    # (16.5/8.5)² = 3.77, the next order changes the power by about 1/L
    assert log2(left[0] / left[1]) / log2(16.5 / 8.5) == pytest.approx(2, abs=0.25)


def test_a_negative_overtone_is_an_error():
    with pytest.raises(ValueError, match="overtone"):
        eikonal(SCHWARZSCHILD, "axial", 5, -1)
