"""Values against proven discs: which disc is whose, and what it leaves of the digits."""

from __future__ import annotations

import math
from decimal import Decimal
from itertools import permutations

import pytest

from knell.survey.agreement import Frequency
from knell.survey.enclosed import Enclosure, enclosing

VALUE = Frequency("0.3", "-0.4")


def disc(re: str, im: str = "-0.4", proven: str = "1e-20", unique: str = "1e-2") -> Enclosure:
    return Enclosure(Frequency(re, im), proven, unique)


def test_digits_come_from_the_distance_to_the_disc_itself() -> None:
    # |v| = 1/2: wrong by 5e-9 less 1e-9 is 8e-9 of it.
    assert disc("0.300000005", proven="1e-9").digits_at_most(VALUE) == math.floor(-100 * math.log10(8e-9)) / 100
    assert disc("0.300000005", proven="5e-9").digits_at_most(VALUE) == math.inf
    assert disc("0.3", "-0.4").digits_at_most(VALUE) == math.inf
    assert disc("30").digits_at_most(VALUE) == 0


def test_differences_far_below_a_double_count() -> None:
    value = Frequency("0.3", "-0.4" + 40 * "0" + "1")
    assert disc("0.3", proven="1e-60").digits_at_most(value) == pytest.approx(41.69, abs=0.011)


def test_the_nearest_disc_whatever_the_order() -> None:
    discs = [disc("0.301"), disc("0.3009"), disc("0.2995", unique="1e-5"), disc("0.32", unique="1")]
    for order in permutations(discs):
        # 0.2995 is nearest, but its disc of uniqueness does not reach.
        assert enclosing(VALUE, order) is discs[1]
    assert enclosing(VALUE, discs[2:3]) is None
    assert enclosing(VALUE, []) is None


def test_a_value_is_singled_out_with_all_of_its_error() -> None:
    enclosure = disc("0.3", unique="1e-6")
    # Half of 10^-digits against 1e-6.
    assert enclosure.singles_out(VALUE, 5.8)
    assert not enclosure.singles_out(VALUE, 5.6)


def test_radii_as_doubles_stay_true() -> None:
    texts = [f"{n}.{n}{n}e-{n}{n}" for n in range(1, 10)]
    for text in texts:
        proven, unique = disc("0.3", proven=text, unique=text).radii
        assert Decimal(unique) <= Decimal(text) <= Decimal(proven)
        assert proven <= math.nextafter(unique, 1)
    # Rounding to nearest would have failed some of either kind.
    assert len({Decimal(float(text)) < Decimal(text) for text in texts}) == 2
