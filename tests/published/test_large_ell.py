"""Large ℓ: the expansion of Dolan and Ottewill, and the light ring, with remainders that fall as they must.

With ``L = ℓ + 1/2`` the frequency is a series in ``1/L`` of which each power is real or imaginary in turn. So the
remainder's real part and its imaginary part are each a series in ``1/L²`` times one power ``L^-k``, and the local
exponent between two ℓ differs from ``k`` by ``O(L^-2)``: a quarter of it is left when L doubles. Half is demanded,
or a difference below ``L^-2`` itself, which is what is left where the leading coefficient of it happens to be small.
"""

from __future__ import annotations

from collections.abc import Callable
from fractions import Fraction
from math import log, sqrt

import numpy as np
import pytest
from mpmath import mpc

from knell.physics.background import PowerLaw
from knell.physics.landmarks import light_ring

FIELDS = {0: "scalar", 1: "electromagnetic", 2: "axial"}
DEEP_ENOUGH = Fraction(3, 10)  # -Im Mω of the first overtone is about 3/2 λ_c, 0.29 at κ = 0


def dolan_ottewill(spin: int, n: int, ell: int) -> complex:
    """``Mω`` of Schwarzschild up to ``L^-3`` (S. Dolan, A. Ottewill, Class. Quantum Grav. 26, 225003, 2009).

    Quoted from memory; verified by the remainder's fall, which every coefficient must be right for.
    """
    L, N, beta = ell + 0.5, n + 0.5, 1 - spin**2
    first = beta / 3 - 5 * N**2 / 36 - 115 / 432
    second = -1j * N * (beta / 9 + 235 * N**2 / 3888 - 1415 / 15552)
    third = -(beta**2) / 27 + (204 * N**2 + 211) * beta / 3888
    third += (854160 * N**4 - 1664760 * N**2 - 776939) / 40310784
    return (L - 1j * N + first / L + second / L**2 + third / L**3) / sqrt(27)


def falls_as(parts: list[float], power: int, ells: tuple[int, int, int]) -> bool:
    """Whether the values at three ℓ approach ``L^-power``, by their local exponents."""
    L = [ell + 0.5 for ell in ells]
    coarse, fine = (log(abs(parts[i] / parts[i + 1])) / log(L[i + 1] / L[i]) - power for i in (0, 1))
    return abs(fine) < max(abs(coarse) / 2, 1 / (L[1] * L[2]))


@pytest.mark.parametrize("n", [0, 1])
@pytest.mark.parametrize("spin", FIELDS)
def test_remainder_of_the_expansion(
    spin: int, n: int, schwarzschild: PowerLaw, modes: Callable[..., np.ndarray], digits_of: Callable[..., mpc]
) -> None:
    """The remainder falls as ``L^-4`` (imaginary part), the real one as ``L^-5``; the two lower ℓ are found blind."""
    ells = (3, 6, 12)
    remainders = []
    for ell in ells:
        expansion = dolan_ottewill(spin, n, ell)
        blind = ell < ells[-1]
        seed = complex(modes(schwarzschild, FIELDS[spin], ell, DEEP_ENOUGH)[n]) if blind else expansion
        # 16 digits after the subtraction in doubles: the smallest remainder is 7e-10, so 1e-6 of it at worst.
        remainders.append(complex(digits_of(schwarzschild, FIELDS[spin], ell, seed, 18)) - expansion)
    assert falls_as([z.imag for z in remainders], 4, ells)
    assert falls_as([z.real for z in remainders], 5, ells)


def extrapolated(lower: dict[int, complex], ell: int) -> complex:
    """The remainder at ``ell`` from the two largest ℓ below it, as ``a/L + b/L³ + i(c/L² + d/L⁴)``."""
    L = np.array([x + 0.5 for x in sorted(lower)[-2:]])
    values = np.array([lower[x] for x in sorted(lower)[-2:]])
    next_L = ell + 0.5

    def part(known: np.ndarray, power: int) -> float:
        a, b = np.linalg.solve(np.column_stack([L**-power, L ** -(power + 2)]), known)
        return float(a / next_L**power + b / next_L ** (power + 2))

    return complex(part(values.real, 1), part(values.imag, 2))


@pytest.mark.parametrize("n", [0, 1])
@pytest.mark.parametrize(
    ("exponent", "coupling", "field"),
    [
        (2, "1/2", "scalar"),
        (3, "1/2", "axial"),
        (4, "1", "axial"),
        (5, "-2", "scalar"),
        (7, "1/4", "electromagnetic"),
    ],
)
def test_light_ring(
    exponent: int,
    coupling: str,
    field: str,
    n: int,
    modes: Callable[..., np.ndarray],
    next_to: Callable[..., complex],
) -> None:
    """``ω ≈ Ω_c (ℓ+1/2) - iλ_c (n+1/2)`` (V. Cardoso et al., Phys. Rev. D 79, 064016, 2009), any background.

    The remainder falls as ``1/L``: its real part so, its imaginary part as ``1/L²``. Found blind at ℓ = 2 and 3,
    followed to higher ℓ from there.
    """
    background = PowerLaw(exponent, Fraction(coupling))
    ring = light_ring(background)
    remainders: dict[int, complex] = {}
    for ell in (2, 3, 4, 6, 12, 24):
        estimate = ring.frequency * (ell + 0.5) - 1j * ring.exponent * (n + 0.5)
        if ell < 4:
            found = complex(modes(background, field, ell, Fraction(7, 20))[n])
        else:
            found = next_to(background, field, ell, estimate + extrapolated(remainders, ell))
        remainders[ell] = found - estimate
    # Doubles are good to 1e-11; the smallest remainder here is 1e-6, so the exponents are to 1e-4.
    ells = (6, 12, 24)
    assert falls_as([remainders[ell].real for ell in ells], 1, ells)
    assert falls_as([remainders[ell].imag for ell in ells], 2, ells)
