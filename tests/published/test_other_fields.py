"""Schwarzschild fundamentals of other fields and orders, ``Mω``.

E. Berti, V. Cardoso, A. Starinets, Class. Quantum Grav. 26, 163001 (2009). Values quoted from memory, recomputed.
"""

from __future__ import annotations

from collections.abc import Callable
from fractions import Fraction

import numpy as np
import pytest
from mpmath import mpc

from knell.physics.background import PowerLaw

FUNDAMENTALS = [
    ("axial", 4, 0.80918, 0.09416, 5),
    ("scalar", 0, 0.1105, 0.1049, 4),
    ("scalar", 1, 0.2929, 0.0977, 4),
    ("scalar", 2, 0.4836, 0.0968, 4),
    ("electromagnetic", 1, 0.2483, 0.0925, 4),
    ("electromagnetic", 2, 0.4576, 0.0950, 4),
]
# The search's last Newton steps are 1e-12 and below.
DOUBLES = 1e-10


@pytest.mark.parametrize(("field", "ell", "re", "minus_im", "decimals"), FUNDAMENTALS)
def test_fundamental(
    field: str,
    ell: int,
    re: float,
    minus_im: float,
    decimals: int,
    schwarzschild: PowerLaw,
    modes: Callable[..., np.ndarray],
    digits_of: Callable[..., mpc],
) -> None:
    """All printed digits: within half a unit of the last decimal."""
    found = complex(modes(schwarzschild, field, ell, Fraction(1, 5))[0])
    exact = complex(digits_of(schwarzschild, field, ell, found, 20))
    assert abs(found - exact) < DOUBLES
    assert round(exact.real, decimals) == re
    assert round(-exact.imag, decimals) == minus_im
