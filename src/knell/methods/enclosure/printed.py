"""Exact numbers and decimals: what is printed stays true.

A printed radius is rounded up and includes the rounding of the printed centre; a printed radius of
uniqueness is rounded down. Exact dyadic numbers are stored as ``mantissa p exponent``.
"""

from __future__ import annotations

from fractions import Fraction

from flint import acb, arb, fmpq

from knell.methods.enclosure.refusal import BadRecord, InexactVertex, LostPrecision


def to_fraction(x: arb) -> Fraction:
    """The rational that an exact ball is."""
    if not (x.is_finite() and x.is_exact()):
        raise InexactVertex("a number that must be exact is not")
    mantissa, exponent = x.man_exp()
    m, e = int(mantissa), int(exponent)
    return Fraction(m << e) if e >= 0 else Fraction(m, 1 << -e)


def ball(value: Fraction) -> arb:
    """The rational as a ball at the precision of the context."""
    return arb(fmpq(value.numerator, value.denominator))


def dyadic_text(x: arb) -> str:
    """``mantissa p exponent`` of an exact ball."""
    if not (x.is_finite() and x.is_exact()):
        raise InexactVertex("a number that must be exact is not")
    mantissa, exponent = x.man_exp()
    return f"{int(mantissa)}p{int(exponent)}"


def read_dyadic(text: str) -> arb:
    """The inverse of `dyadic_text`; raises `BadRecord`."""
    try:
        mantissa, exponent = (int(part) for part in text.split("p"))
    except (ValueError, AttributeError) as error:
        raise BadRecord(f"{text!r} is not an exact number") from error
    if abs(exponent) > 100_000:
        raise BadRecord(f"{text!r} is out of range")
    return arb((mantissa, exponent))


def decimal(value: Fraction, places: int) -> str:
    """``value`` rounded to ``places`` decimals."""
    scaled = round(value * 10**places)
    sign, digits = "-" if scaled < 0 else "", str(abs(scaled)).rjust(places + 1, "0")
    return f"{sign}{digits[:-places]}.{digits[-places:]}" if places else f"{sign}{digits}"


def _scientific(value: Fraction, digits: int, up: bool) -> str:
    if value < 0:
        raise LostPrecision("a radius is negative")
    if value == 0:
        return "0"
    exponent = len(str(value.numerator)) - len(str(value.denominator))
    while value < Fraction(10) ** exponent:
        exponent -= 1
    while value >= Fraction(10) ** (exponent + 1):
        exponent += 1
    scaled = value / Fraction(10) ** (exponent - digits + 1)
    whole = -((-scaled.numerator) // scaled.denominator) if up else scaled.numerator // scaled.denominator
    if whole == 10**digits:
        whole, exponent = whole // 10, exponent + 1
    text = str(whole)
    return f"{text[0]}.{text[1:]}e{exponent}"


def rounded_up(bound: arb, digits: int = 3) -> str:
    """The upper end of ``bound`` as a decimal that is no smaller."""
    return _scientific(to_fraction(bound.upper()), digits, True)


def rounded_down(bound: arb, digits: int = 3) -> str:
    """The lower end of ``bound`` as a decimal that is no larger."""
    return _scientific(to_fraction(bound.lower()), digits, False)


def complex_text(z: acb) -> list[str]:
    """Real and imaginary part of an exact number as text."""
    return [dyadic_text(z.real), dyadic_text(z.imag)]
