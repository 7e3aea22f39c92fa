"""Potentials ``V = f u² W`` against the forms in ``r`` and ``m(r)``, over exact rationals."""

from __future__ import annotations

from fractions import Fraction

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from knell.physics import polynomial
from knell.physics.field import FIELDS, LOWEST_ELL, check_field, effective_w

small = st.fractions(min_value=-2, max_value=2, max_denominator=20)


@pytest.mark.parametrize("ell", [2, 3, 10])
def test_schwarzschild_potentials(ell: int) -> None:
    """``V = f [ℓ(ℓ+1)/r² + (1-s²) 2M/r³]``, ``2M = r_h = 1``, s = 2 (Regge-Wheeler), 1, 0 (``W = V r²/f``)."""
    f = [Fraction(1), Fraction(-1)]
    angular = ell * (ell + 1)
    for field, spin in (("axial", 2), ("electromagnetic", 1), ("scalar", 0)):
        expected = [angular, 1 - spin**2]
        w = effective_w(f, field, ell)
        assert w + [0] * (2 - len(w)) == expected


@settings(deadline=None, max_examples=30)
@given(st.lists(small, min_size=1, max_size=6), st.fractions(min_value="1/2", max_value=9, max_denominator=20))
def test_potentials_from_the_mass_function(tail: list[Fraction], r: Fraction) -> None:
    """``m(r) = -½ Σ f_k r^(1-k)``; then ``V r²/f`` of each field from ``m`` and ``m'`` alone.

    axial ``ℓ(ℓ+1) - 6m/r + 2m'``, scalar ``ℓ(ℓ+1) + 2m/r - 2m'``, electromagnetic ``ℓ(ℓ+1)``.
    """
    f = [Fraction(1), *tail]
    mass = -sum((x * r ** (1 - k) for k, x in enumerate(f) if k), Fraction(0)) / 2
    slope = -sum(((1 - k) * x * r ** (-k) for k, x in enumerate(f) if k), Fraction(0)) / 2
    assert polynomial.evaluate(effective_w(f, "axial", 3), 1 / r) == 12 - 6 * mass / r + 2 * slope
    assert polynomial.evaluate(effective_w(f, "scalar", 3), 1 / r) == 12 + 2 * mass / r - 2 * slope
    assert polynomial.evaluate(effective_w(f, "electromagnetic", 3), 1 / r) == 12


def test_each_field_starts_at_its_own_ell() -> None:
    assert LOWEST_ELL == {"axial": 2, "electromagnetic": 1, "scalar": 0}
    for field in FIELDS:
        check_field(field, LOWEST_ELL[field])
        with pytest.raises(ValueError, match=f"ell {LOWEST_ELL[field] - 1} for the {field} field"):
            check_field(field, LOWEST_ELL[field] - 1)


@pytest.mark.parametrize("ell", [2.0, "2", True, None, Fraction(2)])
def test_ell_is_a_whole_number(ell: object) -> None:
    with pytest.raises(ValueError, match="whole number"):
        check_field("electromagnetic", ell)  # type: ignore[arg-type]


@pytest.mark.parametrize("field", ["", "polar", "Axial", "gravitational"])
def test_an_unknown_field_is_named_with_the_known_ones(field: str) -> None:
    with pytest.raises(ValueError, match="must be one of axial, electromagnetic, scalar"):
        effective_w([Fraction(1), Fraction(-1)], field, 2)
