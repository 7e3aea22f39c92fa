"""The drawn potentials against closed forms of Schwarzschild and against their own definition."""

from __future__ import annotations

from fractions import Fraction

import numpy as np
import pytest

from knell.physics.background import PowerLaw
from knell.physics.landmarks import light_ring
from knell.readout.potentials import peak, potential

SCHWARZSCHILD = PowerLaw(2, Fraction(0))


@pytest.mark.parametrize(("field", "spin"), [("axial", 2), ("electromagnetic", 1), ("scalar", 0)])
@pytest.mark.parametrize("ell", [2, 5])
def test_schwarzschild(field: str, spin: int, ell: int) -> None:
    """``V = (1 - 2/r)(ℓ(ℓ+1)/r² + 2(1-s²)/r³)``, M = 1 (s = 2: T. Regge, J. A. Wheeler, Phys. Rev. 108, 1063, 1957)."""
    r = np.linspace(2.0, 20.0, 50)
    expected = (1 - 2 / r) * (ell * (ell + 1) / r**2 + 2 * (1 - spin**2) / r**3)
    # A dozen operations on numbers of order ten.
    assert potential(SCHWARZSCHILD, field, ell, r) == pytest.approx(expected, abs=1e-14)


def test_the_peak_of_the_regge_wheeler_potential() -> None:
    """``r_p/M = (3/2λ)(λ - β + sqrt(λ² + 14λβ/9 + β²))``, ``λ = ℓ(ℓ+1)``, ``β = 1-s²``; from V' = 0."""
    lam, beta = 6.0, -3.0
    expected = 3 / (2 * lam) * (lam - beta + np.sqrt(lam**2 + 14 * lam * beta / 9 + beta**2))
    radius, height = peak(SCHWARZSCHILD, "axial", 2)
    # The roots of a quartic with simple, well-separated roots.
    assert radius == pytest.approx(expected, rel=1e-12)
    assert height == pytest.approx(float(potential(SCHWARZSCHILD, "axial", 2, expected)), rel=1e-13)


@pytest.mark.parametrize("coupling", ["1/2", "1", "-1"])
@pytest.mark.parametrize("exponent", [3, 6])
def test_no_neighbour_is_higher_than_the_peak(exponent: int, coupling: str) -> None:
    background = PowerLaw(exponent, Fraction(coupling))
    radius, height = peak(background, "axial", 2)
    around = potential(background, "axial", 2, radius * np.linspace(0.9, 1.1, 41))
    assert np.all(around <= height * (1 + 1e-14))
    assert np.argmax(around) == 20


def test_the_peak_meets_the_light_ring_as_ell_grows() -> None:
    """The distance falls as ``1/ℓ²``: V = (f u²)(ℓ(ℓ+1) + O(1))."""
    background = PowerLaw(4, Fraction(9, 10))
    ring = light_ring(background).radius
    distances = [abs(peak(background, "axial", ell)[0] - ring) * ell * (ell + 1) for ell in (20, 40, 80)]
    # The next order is 1/ℓ⁴, so the products differ by about 1/400 of themselves.
    assert distances == pytest.approx([distances[-1]] * 3, rel=0.02)
