"""Exact rational parameters, from what a person writes to file names and hashes.

A coupling written ``0.9`` means 9/10. The double nearest to 0.9 differs from it by
2e-17, which a computation with more than sixteen digits notices, so parameters are
`fractions.Fraction` everywhere.
"""

from __future__ import annotations

import re
from fractions import Fraction

_RATIO = re.compile(r"[+-]?\d+\s*/\s*[1-9]\d*")
_DECIMAL = re.compile(r"[+-]?(\d+(\.\d*)?|\.\d+)([eE][+-]?\d{1,4})?")


def parse_rational(value: object) -> Fraction:
    """The exact rational that ``value`` denotes.

    Integers and fractions pass through; text is a decimal (``0.9``, ``1.0e-3``) or a
    ratio (``9/10``); a float is read as the shortest decimal that prints it, because
    that is what was typed.

    >>> parse_rational("0.9"), parse_rational("9/10"), parse_rational(0.9)
    (Fraction(9, 10), Fraction(9, 10), Fraction(9, 10))

    Raises `ValueError` for anything else, booleans, infinities and NaN included.
    """
    if isinstance(value, bool):
        raise ValueError(f"{value!r} is not a number")
    if isinstance(value, (int, Fraction)):
        return Fraction(value)
    text = repr(float(value)) if isinstance(value, float) else str(value).strip()
    if _RATIO.fullmatch(text):
        return Fraction(text.replace(" ", ""))
    if _DECIMAL.fullmatch(text):
        return Fraction(text)
    raise ValueError(f"{value!r} is not a number; write a decimal such as 0.9 or a ratio such as 9/10")


def rational_text(value: Fraction) -> str:
    """``9/10``, or ``1`` for a whole number: the form stored in files."""
    return str(value)


def rational_slug(value: Fraction) -> str:
    """A file-name form that sorts apart and reads back: ``9_10``, ``1``, ``m1_2``.

    >>> rational_slug(Fraction(-1, 2))
    'm1_2'
    """
    return str(value).replace("/", "_").replace("-", "m")


def from_slug(slug: str) -> Fraction:
    """The inverse of `rational_slug`; raises `ValueError` for any other text."""
    if re.fullmatch(r"m?\d+(_[1-9]\d*)?", slug):
        value = Fraction(slug.replace("_", "/").replace("m", "-"))
        if rational_slug(value) == slug:  # 18_20 reads as 9/10, whose name is 9_10: no second name for one file
            return value
    raise ValueError(f"{slug!r} is not a rational in file-name form")
