"""High damping: H.-P. Nollert, Phys. Rev. D 47, 5253 (1993), axial Schwarzschild, ``2M = 1``, Leaver's numbering:

    ω = ln3/(4π) - i (n-1/2)/2 + γ₁ (1+i)/√n + O(1/n),     γ₁ = .4850 (ℓ = 2)

Quoted from memory, recomputed. At ℓ = 3 (γ₁ = 1.067) the overtones must be far beyond n = 41, where the
algebraically special frequency is, before the formula holds; they are not followed that far here.
"""

from __future__ import annotations

from collections.abc import Callable
from math import log, pi, sqrt

import numpy as np
import pytest
from mpmath import mpc

from knell.methods import radial
from knell.physics.background import PowerLaw

GAMMA = 0.4850
# The two solutions of the match agree to about one digit more per overtone: digits to spare for each n.
DIGITS = {28: 60, 40: 80, 56: 120}
# Compared with the match over balls here; beyond, the direct integration's own two paths check each other.
MATCHED = (28, 40)


def limit(n: int) -> complex:
    return log(3) / (4 * pi) - 0.5j * (n - 0.5)


def leading_coefficient(found: dict[int, complex], terms: int) -> complex:
    """Of ``1/√n`` in ``ω - limit = Σ c_k n^(-k/2)``, least squares with as many terms as said."""
    powers = np.array([[n ** (-k / 2) for k in range(1, terms + 1)] for n in found], dtype=complex)
    return complex(np.linalg.lstsq(powers, np.array([z - limit(n) for n, z in found.items()]), rcond=None)[0][0])


@pytest.mark.slow
def test_deep_overtones_approach_the_limit(schwarzschild: PowerLaw, digits_of: Callable[..., mpc]) -> None:
    """The coefficient of ``(1+i)/√n`` from n = 28, 40, 56, once with two terms of the series and once with three.

    Their difference, 0.07 in the real and 0.03 in the imaginary part, is the error estimate of the better one: a
    ``γ₁`` wrong by a tenth would not pass.
    """
    found = {}
    for n, digits in DIGITS.items():
        run = radial.solve(schwarzschild, "axial", 2, (limit(n) + GAMMA * (1 + 1j) / sqrt(n)) / 2, digits)
        assert run.status == "ok", run.reason
        if n in MATCHED:
            other = complex(digits_of(schwarzschild, "axial", 2, complex(run.frequency), digits))
            assert abs(other - complex(run.frequency)) < 1e-14
        found[n] = 2 * complex(run.frequency)
    coarse, fine = (leading_coefficient(found, terms) for terms in (2, 3))
    assert abs(fine.real - GAMMA) < abs(fine.real - coarse.real)
    assert abs(fine.imag - GAMMA) < abs(fine.imag - coarse.imag)
    assert abs(coarse - fine) < 0.2 * GAMMA  # the estimate itself must be small enough to say something
