"""Decimals and exact numbers: what is printed stays true."""

from __future__ import annotations

from fractions import Fraction

import pytest
from flint import acb, arb
from hypothesis import given
from hypothesis import strategies as st

from knell.methods.enclosure import printed
from knell.methods.enclosure.refusal import BadRecord, InexactVertex, LostPrecision


@given(x=st.floats(1e-300, 1e300))
def test_radii_are_rounded_outwards(x):
    up, down = Fraction(printed.rounded_up(arb(x))), Fraction(printed.rounded_down(arb(x)))
    assert down <= Fraction(x) <= up
    assert up - down <= Fraction(x) / 50


def test_a_wide_ball_is_rounded_from_its_ends():
    ball = arb(1, 0.5)
    assert Fraction(printed.rounded_up(ball)) >= Fraction(3, 2) and Fraction(printed.rounded_down(ball)) <= Fraction(
        1, 2
    )
    assert printed.rounded_up(arb(0)) == "0"
    assert printed.rounded_up(arb("9.999")) == "1.00e1"
    with pytest.raises(LostPrecision):
        printed.rounded_down(arb(0.1, 0.2))


@given(x=st.floats(allow_nan=False, allow_infinity=False))
def test_exact_numbers_read_back(x):
    back = printed.read_dyadic(printed.dyadic_text(arb(x)))
    assert printed.to_fraction(back) == Fraction(x)


@given(x=st.fractions(-5, 5), places=st.integers(0, 40))
def test_decimals_are_the_nearest(x, places):
    text = printed.decimal(x, places)
    assert abs(Fraction(text) - x) <= Fraction(1, 2 * 10**places)
    assert len(text.partition(".")[2]) == places


def test_what_is_not_exact_is_refused():
    for call in (printed.to_fraction, printed.dyadic_text):
        for value in (arb(1) / 3, arb("nan")):
            with pytest.raises(InexactVertex):
                call(value)
    for text in ("", "1", "1p", "ap3", "1p2p3", None, "1p999999999"):
        with pytest.raises(BadRecord):
            printed.read_dyadic(text)
    assert printed.complex_text(acb(1)) == ["1p0", "0p0"]
