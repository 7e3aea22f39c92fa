"""What an observer quotes of the fundamental ℓ = 2 mode: E. Berti, V. Cardoso, A. Starinets,
Class. Quantum Grav. 26, 163001 (2009), with the constants of IAU 2015 resolution B3. Quoted from memory, recomputed.
"""

from __future__ import annotations

from collections.abc import Callable
from fractions import Fraction
from math import pi

import numpy as np
import pytest

from knell.physics.background import PowerLaw

SOLAR_MASS_PARAMETER = 1.3271244e20  # GM☉, m³/s²
LIGHT_SPEED = 299792458.0  # m/s


@pytest.fixture(scope="module")
def fundamental(schwarzschild: PowerLaw, modes: Callable[..., np.ndarray]) -> complex:
    return complex(modes(schwarzschild, "axial", 2, Fraction(1, 5))[0])


def test_frequency_and_damping_time_of_one_solar_mass(fundamental: complex) -> None:
    """``f = 12.0743 kHz``, ``τ = 55.366 µs``: all printed digits."""
    second = SOLAR_MASS_PARAMETER / LIGHT_SPEED**3  # GM☉/c³
    assert round(fundamental.real / (2 * pi * second) / 1e3, 4) == 12.0743
    assert round(-second / fundamental.imag * 1e6, 3) == 55.366


def test_quality_factor(fundamental: complex) -> None:
    """``Q = Re ω / (2 |Im ω|) = 2.1002``, whatever the mass."""
    assert round(fundamental.real / (2 * abs(fundamental.imag)), 4) == 2.1002
