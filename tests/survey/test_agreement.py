"""Digits shared by decimal strings: against the definition in exact rationals, and at its edges."""

from __future__ import annotations

from fractions import Fraction

import mpmath
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from knell.survey.agreement import Frequency, agreement, carried, rounded

PART = st.integers(10**29, 10**30 - 1)
SIGN = st.sampled_from((1, -1))


def text(numerator: int) -> str:
    """A number of 30 decimal places."""
    whole, decimals = divmod(abs(numerator), 10**30)
    return f"{'-' if numerator < 0 else ''}{whole}.{decimals:030d}"


@settings(deadline=None, max_examples=60)
@given(PART, PART, st.integers(1, 28), SIGN, st.booleans())
def test_agreement_is_minus_the_logarithm_of_the_relative_difference(
    re: int, im: int, digits: int, sign: int, real: bool
) -> None:
    step = sign * 10 ** (30 - digits)
    a = Frequency(text(re + step * real), text(-im + step * (not real)))
    b = Frequency(text(re), text(-im))
    with mpmath.workdps(60):
        exact = -mpmath.log10(abs(mpmath.mpf(step) / mpmath.mpc(re, im)))
    # Rounded down to hundredths; doubles carry the logarithm to 1e-14.
    assert exact - 0.01 - 1e-12 <= agreement(a, b) <= exact + 1e-12


def test_equal_strings_agree_to_what_they_carry() -> None:
    short, long = Frequency("0.374", "-0.089"), Frequency("0.37400000", "-0.08900000")
    # |ω| = 0.3844, three decimal places: 3 + log10(0.3844) = 2.58 digits.
    assert agreement(short, short) == agreement(short, long) == carried(long, short) == 2.58
    assert agreement(long, long) == 7.58


def test_the_coarser_string_bounds_a_close_agreement() -> None:
    assert agreement(Frequency("0.374", "-0.0890000000"), Frequency("0.3740000001", "-0.0890000000")) == 2.58


def test_a_part_that_is_zero_says_nothing_of_the_last_place() -> None:
    assert agreement(Frequency("0", "-2.000000"), Frequency("0", "-2.000000")) == 6.3


def test_digits_beyond_doubles_and_far_apart_scales() -> None:
    a, b = Frequency("1" + "0" * 400 + "1", "0"), Frequency("1" + "0" * 401, "0")
    assert agreement(a, b) == 401.0
    # 6e-450 is no double; its modulus is.
    tiny = Frequency("6E-450", "0"), Frequency("5E-450", "0")
    assert agreement(*tiny) == pytest.approx(float(-mpmath.log10(0.2)), abs=0.011)


def test_frequencies_without_a_common_digit_agree_to_nothing() -> None:
    assert agreement(Frequency("0.9", "-0.1"), Frequency("0.1", "-0.9")) == 0.0


@pytest.mark.parametrize("bad", ["", "nan", "inf", "0.3 ± 0.1", "1/3"])
def test_what_is_no_number_is_refused(bad: str) -> None:
    with pytest.raises(ValueError, match="frequency"):
        agreement(Frequency(bad, "0.1"), Frequency("0.3", "0.1"))


def test_agreement_with_zero_is_refused() -> None:
    with pytest.raises(ValueError, match="zero"):
        agreement(Frequency("0.1", "0.1"), Frequency("0", "0.0"))


@settings(deadline=None, max_examples=60)
@given(PART, PART, st.integers(1, 29))
def test_rounded_keeps_the_agreed_digits_and_no_more(re: int, im: int, digits: int) -> None:
    value = Frequency(text(re), text(-im))
    short = rounded(value, digits + 0.4)
    gaps = [abs(Fraction(x) - Fraction(y)) for x, y in ((short.re, value.re), (short.im, value.im))]
    places = {len(part.partition(".")[2]) for part in (short.re, short.im)}
    assert len(places) == 1
    # Half a unit of the last place, which is at most that of the last agreed digit of |ω| ≤ 1.42.
    last_place = Fraction(1, 10 ** places.pop())
    assert max(gaps) <= last_place / 2
    size = abs(complex(value))
    assert size * 10**-digits / 11 < last_place <= 10 * size * 10**-digits


def test_both_parts_are_written_to_the_same_place() -> None:
    near_axis = Frequency("0.0000626123456789", "-0.6042061234567890")
    assert rounded(near_axis, 10.9) == Frequency("0.0000626123", "-0.6042061235")
    assert rounded(near_axis, 0.9) == Frequency("", "")
    assert rounded(Frequency("12.3456", "-1.6"), 1.5) == Frequency("12", "-2")
