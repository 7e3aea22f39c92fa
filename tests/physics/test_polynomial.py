"""Polynomial arithmetic over `Fraction`: every statement here is an identity, so equality is exact."""

from __future__ import annotations

from fractions import Fraction

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from knell.physics import polynomial

few = settings(deadline=None, max_examples=25)
rationals = st.fractions(min_value=-9, max_value=9, max_denominator=50)
polynomials = st.lists(rationals, min_size=1, max_size=7)


def direct_value(a: list[Fraction], u: Fraction) -> Fraction:
    """``Σ a_k u^k`` from the powers, not by Horner."""
    return sum((x * u**k for k, x in enumerate(a)), Fraction(0))


@few
@given(polynomials, rationals)
def test_evaluate_is_the_sum_of_powers(a: list[Fraction], u: Fraction) -> None:
    assert polynomial.evaluate(a, u) == direct_value(a, u)


@few
@given(polynomials, polynomials, rationals)
def test_add_and_multiply_commute_with_evaluation(a: list[Fraction], b: list[Fraction], u: Fraction) -> None:
    assert direct_value(polynomial.add(a, b), u) == direct_value(a, u) + direct_value(b, u)
    assert direct_value(polynomial.multiply(a, b), u) == direct_value(a, u) * direct_value(b, u)


@few
@given(polynomials, polynomials)
def test_product_has_the_sum_of_the_degrees(a: list[Fraction], b: list[Fraction]) -> None:
    product = polynomial.multiply(a, b)
    assert len(product) == len(a) + len(b) - 1
    assert product[-1] == a[-1] * b[-1]


@few
@given(polynomials, rationals, rationals)
def test_scale(a: list[Fraction], factor: Fraction, u: Fraction) -> None:
    assert direct_value(polynomial.scale(a, factor), u) == factor * direct_value(a, u)


@few
@given(polynomials, polynomials)
def test_derivative_obeys_the_product_rule(a: list[Fraction], b: list[Fraction]) -> None:
    left = polynomial.derivative(polynomial.multiply(a, b))
    right = polynomial.add(
        polynomial.multiply(polynomial.derivative(a), b), polynomial.multiply(a, polynomial.derivative(b))
    )
    width = max(len(left), len(right))
    assert left + [0] * (width - len(left)) == right + [0] * (width - len(right))


def test_derivative_of_powers_and_of_a_constant() -> None:
    assert polynomial.derivative([5, 0, 0, 2]) == [0, 0, 6]
    assert polynomial.derivative([Fraction(7)]) == [0]


@few
@given(polynomials, rationals, rationals)
def test_shift_moves_the_origin(a: list[Fraction], centre: Fraction, x: Fraction) -> None:
    assert direct_value(polynomial.shift(a, centre), x) == direct_value(a, centre + x)


@few
@given(polynomials, rationals)
def test_shift_there_and_back(a: list[Fraction], centre: Fraction) -> None:
    assert polynomial.shift(polynomial.shift(a, centre), -centre) == a


@few
@given(polynomials, rationals)
def test_reflect_changes_the_sign_of_the_argument(a: list[Fraction], x: Fraction) -> None:
    assert direct_value(polynomial.reflect(a), x) == direct_value(a, -x)


@few
@given(st.lists(rationals, min_size=1, max_size=6), rationals)
def test_divide_by_root_undoes_the_multiplication(quotient: list[Fraction], root: Fraction) -> None:
    assert polynomial.divide_by_root(polynomial.multiply(quotient, [-root, Fraction(1)]), root) == quotient


def test_arrays_evaluate_point_by_point() -> None:
    u = np.array([0.5, 1.0 - 1.0j, -2.0])
    assert np.array_equal(polynomial.evaluate([1.0, -2.0, 0.25], u), [polynomial.evaluate([1, -2, 0.25], x) for x in u])
