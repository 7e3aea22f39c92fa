"""The extremal ``n = 2`` hole, scalar field, ``Mω``: H. Onozawa et al., Phys. Rev. D 53, 7033 (1996).

Values quoted from memory, recomputed. The published gravitational and electromagnetic tables of this hole solve
coupled equations and do not apply to the fields here.
"""

from __future__ import annotations

from collections.abc import Callable
from fractions import Fraction

import numpy as np
import pytest
from mpmath import mpc

from knell.physics.background import PowerLaw

ONOZAWA = {
    0: [(".13346", ".095844"), (".092965", ".33065"), (".075081", ".58833")],
    1: [(".37764", ".089384"), (".34818", ".27614")],
    2: [(".62657", ".088748")],
}
EXTREMAL = PowerLaw(2, Fraction(1))
# The search's last Newton steps are 1e-12 and below.
DOUBLES = 1e-10


def rounds_to(value: float, printed: str) -> bool:
    return round(value, len(printed) - 1) == float(printed)


@pytest.mark.parametrize("ell", [0, 1, 2])
def test_scalar_modes(ell: int, modes: Callable[..., np.ndarray], digits_of: Callable[..., mpc]) -> None:
    """All printed digits agree."""
    found = modes(EXTREMAL, "scalar", ell, Fraction(7, 10))
    for seed, (re, minus_im) in zip(found, ONOZAWA[ell], strict=False):
        exact = complex(digits_of(EXTREMAL, "scalar", ell, complex(seed), 20))
        assert abs(seed - exact) < DOUBLES
        assert rounds_to(exact.real, re)
        assert rounds_to(-exact.imag, minus_im)
    assert len(found) >= len(ONOZAWA[ell])
