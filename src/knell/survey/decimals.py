"""Balls written as plain decimal strings, the same everywhere for the same ball."""

from __future__ import annotations

from decimal import Decimal

from flint import acb, arb

from knell.survey.agreement import Frequency, rounded


def exact_decimal(x: arb) -> Decimal:
    """The midpoint of ``x`` as an exact decimal: ``m 2^e = (m 5^-e) 10^e`` for negative ``e``.

    Raises `ValueError` for infinities and NaN.
    """
    mantissa, exponent = (int(part) for part in x.mid().man_exp())
    if exponent >= 0:
        return Decimal(mantissa << exponent)
    digits = mantissa * 5**-exponent
    return Decimal((int(digits < 0), tuple(int(c) for c in str(abs(digits))), exponent))


def written(value: acb, digits: int) -> Frequency:
    """The midpoint, both parts to the decimal place that ``digits`` of ``|value|`` reach."""
    parts = (f"{exact_decimal(part):f}" for part in (value.real, value.imag))
    return rounded(Frequency(*parts), digits)
