"""Exact rationals: what is written is what is meant, in YAML, on the command line and in file names."""

from __future__ import annotations

import math
from fractions import Fraction

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from knell.physics.exact import from_slug, parse_rational, rational_slug, rational_text

rationals = st.fractions(max_denominator=10**9)


@pytest.mark.parametrize(
    ("written", "meant"),
    [
        ("0.9", Fraction(9, 10)),
        (0.9, Fraction(9, 10)),
        (np.float64(0.9), Fraction(9, 10)),
        ("9/10", Fraction(9, 10)),
        (" 9 / 10 ", Fraction(9, 10)),
        ("18/20", Fraction(9, 10)),
        ("-1/2", Fraction(-1, 2)),
        ("+.5", Fraction(1, 2)),
        ("1.", Fraction(1)),
        ("1.0e-3", Fraction(1, 1000)),
        ("1e-3", Fraction(1, 1000)),
        ("1E3", Fraction(1000)),
        (1e-3, Fraction(1, 1000)),
        (1e22, Fraction(10**22)),
        (1, Fraction(1)),
        (-3, Fraction(-3)),
        (Fraction(343, 432), Fraction(343, 432)),
        ("0.999999999999", 1 - Fraction(1, 10**12)),
        ("0.12345678901234567890123", Fraction(12345678901234567890123, 10**23)),
    ],
)
def test_what_is_written_is_what_is_meant(written: object, meant: Fraction) -> None:
    assert parse_rational(written) == meant


def test_a_double_is_not_the_decimal_it_prints() -> None:
    """Why parameters are fractions: ``Fraction(0.9)`` is off by about 2e-17."""
    assert Fraction(0.9) != parse_rational(0.9)


@pytest.mark.parametrize(
    "written",
    [
        *("", " ", "nine", "1/0", "9/-10", "1/2/3", "1.5/2", "0.9.1", "0x10", "1_000", "1e", "1e-99999", "--1", "0,9"),
        *("nan", "inf", "-inf", "9\n1", math.nan, math.inf, -math.inf, True, False, None, [1], 1 + 0j),
    ],
)
def test_anything_else_is_refused_and_named(written: object) -> None:
    with pytest.raises(ValueError, match="is not a number"):
        parse_rational(written)


@settings(deadline=None, max_examples=30)
@given(rationals)
def test_text_round_trip(value: Fraction) -> None:
    assert parse_rational(rational_text(value)) == value


@settings(deadline=None, max_examples=30)
@given(st.floats(allow_nan=False, allow_infinity=False))
def test_a_float_is_read_as_the_shortest_decimal_that_prints_it(value: float) -> None:
    assert float(parse_rational(value)) == value
    assert parse_rational(value) == parse_rational(repr(value))


@settings(deadline=None, max_examples=30)
@given(rationals)
def test_slug_round_trip(value: Fraction) -> None:
    slug = rational_slug(value)
    assert from_slug(slug) == value
    assert set(slug) <= set("m_0123456789")  # safe in a file name and free of the separators '-', '.' and '/'


@settings(deadline=None, max_examples=30)
@given(rationals, rationals)
def test_slugs_of_different_rationals_differ(a: Fraction, b: Fraction) -> None:
    assert (rational_slug(a) == rational_slug(b)) == (a == b)


def test_slugs_are_what_the_file_names_show() -> None:
    assert [rational_slug(Fraction(x)) for x in ("9/10", "1", "0", "-1/2", "-100")] == [
        "9_10",
        "1",
        "0",
        "m1_2",
        "m100",
    ]


@pytest.mark.parametrize(
    "slug", ["", "9/10", "0.9", "-1", "9_0", "_2", "m", "1_2_3", "1_2m", "18_20", "4_1", "01", "m0", "9_10\n", "٣"]
)
def test_only_slugs_are_read_back(slug: str) -> None:
    with pytest.raises(ValueError, match="file-name form"):
        from_slug(slug)
