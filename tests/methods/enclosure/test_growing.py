"""No growing mode: the sign of V where it decides, a count of zero where it does not."""

from __future__ import annotations

from fractions import Fraction

import numpy as np
import pytest

from knell.methods.enclosure.growing import growth_bound, potential_is_not_negative, prove_stable
from knell.methods.enclosure.problem import Problem
from knell.physics.background import PowerLaw

# V of the axial ℓ = 2 field dips below zero at the horizon: W(1) = 3 - (n-1)|q| < 0 for q near -1 and n = 8.
NEGATIVE = Problem(PowerLaw.from_q(8, Fraction(-3, 5)), "axial", 2)


@pytest.mark.parametrize(
    ("n", "k", "field", "ell"),
    [
        *[(n, k, "axial", 2) for n in (3, 4, 5, 6) for k in ("1/4", "1/2", "3/4", "9/10", "1")],
        (2, "0", "axial", 3),
        (4, "-3", "axial", 2),
        (8, "1", "scalar", 0),
        (2, "0", "scalar", 0),
        (5, "1/2", "scalar", 1),
        (3, "1", "electromagnetic", 1),
    ],
)
def test_the_potential_is_not_negative(n, k, field, ell):
    problem = Problem(PowerLaw(n, Fraction(k)), field, ell)
    assert potential_is_not_negative(problem)
    assert prove_stable(problem).energy
    u = np.linspace(0, 1, 1001)
    weights = [float(c) for c in problem.equation(100).W]
    assert np.polyval(weights[::-1], u).min() >= -1e-14


def test_a_negative_potential_is_seen_and_bounded():
    assert not potential_is_not_negative(NEGATIVE)
    u = np.linspace(0, 1, 2001)
    equation = NEGATIVE.equation(100)
    f, W = (np.polyval([float(c) for c in part][::-1], u) for part in (equation.f, equation.W))
    bound = float(growth_bound(NEGATIVE))
    sharp = float(equation.mass) * np.sqrt(max(0.0, float((-f * u * u * W).max())))
    # 256 pieces and Horner's scheme widen it.
    assert 0 < sharp <= bound <= 5 * sharp


@pytest.mark.slow
def test_a_negative_potential_is_settled_by_a_count():
    stability = prove_stable(NEGATIVE)
    assert not stability.energy and stability.count.number == 0
    assert stability.count.region.growing
