"""The algebraically special frequency ``Mω = -i (ℓ-1)ℓ(ℓ+1)(ℓ+2)/12`` (S. Chandrasekhar, 1984): -2i, -10i, -30i, …

The Regge-Wheeler equation has no quasinormal mode there (A. Maassen van den Brink, gr-qc/0001032): it is to be
flagged, never required. What it has is a horizon series without logarithm, and that is exact in rationals.
"""

from __future__ import annotations

from collections.abc import Callable
from fractions import Fraction

import numpy as np
import pytest

from knell.physics.background import PowerLaw
from knell.physics.equation import local, regularised


def obstruction(ell: int, order: int) -> Fraction:
    """Right side of the horizon recurrence at ``m = order``, where ``m (m - 2σ)`` vanishes for ``σ = order/2``.

    ``φ = Σ a_m x^m`` in ``(pφ')' + 2σKφ' + (σK' - σ²Q - W)φ = 0``. If it is not zero, the series needs a logarithm.
    """
    at = local(regularised([Fraction(1), Fraction(-1)], "axial", ell), 1, -1)
    sigma = Fraction(order, 2)

    def coefficient(part: tuple[Fraction, ...], k: int) -> Fraction:
        return part[k] if 0 <= k < len(part) else Fraction(0)

    a = [Fraction(1)]
    for m in range(1, order + 1):
        right = Fraction(0)
        for j in range(max(0, m - 8), m):  # no coefficient reaches further back than the eighth power
            k = m - j
            both = m * j * coefficient(at.p, k + 1) + 2 * sigma * j * coefficient(at.K, k)
            both += sigma * k * coefficient(at.K, k) - sigma**2 * coefficient(at.Q, k - 1) - coefficient(at.W, k - 1)
            right -= both * a[j]
        if m == order:
            return right
        a.append(right / (m * (m * at.p[1] - 2 * sigma)))
    raise AssertionError("order must be at least 1")


@pytest.mark.parametrize("ell", [2, 3])
def test_the_horizon_series_has_no_logarithm_there_and_only_there(ell: int) -> None:
    """``r_h = 2M``: ``σ = iω r_h = 2 |Mω|``, so the special order is ``2σ = (ℓ-1)ℓ(ℓ+1)(ℓ+2)/3``."""
    special = (ell - 1) * ell * (ell + 1) * (ell + 2) // 3
    free = [order for order in range(1, special + 8) if obstruction(ell, order) == 0]
    assert free == [special]


@pytest.mark.slow
def test_no_mode_at_the_special_frequency(schwarzschild: PowerLaw, modes: Callable[..., np.ndarray]) -> None:
    """The blind and complete list has no oscillating mode next to -2i: the nearest are 0.2 away."""
    found = modes(schwarzschild, "axial", 2, Fraction(57, 20))
    assert np.min(np.abs(found + 2j)) > 0.2
