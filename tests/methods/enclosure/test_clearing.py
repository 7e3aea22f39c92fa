"""Zeros of the clearing, exactly."""

from __future__ import annotations

from fractions import Fraction

import pytest

from knell.methods.enclosure.clearing import defining_polynomial, special_value, vanishes_exactly
from knell.methods.enclosure.problem import Problem
from knell.physics.background import PowerLaw


@pytest.mark.parametrize(
    ("background", "ell", "expected"),
    [
        # The algebraically special frequency -i(ℓ-1)ℓ(ℓ+1)(ℓ+2)/12: j = 8 for ℓ = 2 (S. Chandrasekhar, 1984).
        (PowerLaw(2, Fraction(0)), 2, [8]),
        (PowerLaw.from_q(4, Fraction(1, 7)), 2, [4]),
        (PowerLaw(4, Fraction(1, 2)), 2, []),
        (PowerLaw(3, Fraction(-1, 3)), 2, []),
    ],
)
def test_known_zeros_of_the_clearing(background, ell, expected):
    problem = Problem(background, "axial", ell)
    assert [j for j in range(1, 12) if vanishes_exactly(problem, j)] == expected


@pytest.mark.slow
def test_the_special_frequency_of_ell_three():
    # -10i: j = 40.
    problem = Problem(PowerLaw(2, Fraction(0)), "axial", 3)
    assert [j for j in range(30, 45) if vanishes_exactly(problem, j)] == [40]


def test_the_first_value_by_hand():
    # Schwarzschild, j = 1, σ = p₁/2 = 1/2: S_0 = C(0) = σK'(0) - σ²Q(0) - W(0) with K' = 4, Q = 8, W = ℓ(ℓ+1) - 3.
    problem = Problem(PowerLaw(2, Fraction(0)), "axial", 2)
    value = special_value(problem, 1)
    assert value.degree() == 0 and -value[0] == 2 - 2 - 3


def test_q_is_one_root_of_its_polynomial_among_others():
    # κ = 343/432: q = 1/7 is one of four roots of F; S vanishes at it, not identically modulo F.
    problem = Problem(PowerLaw(4, Fraction(343, 432)), "axial", 2)
    assert defining_polynomial(problem.background).degree() == 4
    assert special_value(problem, 4).degree() >= 0
    assert vanishes_exactly(problem, 4) and not vanishes_exactly(problem, 5)
