"""Polynomials as lists of coefficients, lowest power first, over any number type.

The same formulas must run over floats, `Fraction`, mpmath numbers and balls, so this
is written with ``+`` and ``*`` alone.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

Coefficients = list[Any]


def add(a: Sequence[Any], b: Sequence[Any]) -> Coefficients:
    """``a + b``."""
    longer, shorter = (a, b) if len(a) >= len(b) else (b, a)
    return [x + shorter[i] if i < len(shorter) else x for i, x in enumerate(longer)]


def scale(a: Sequence[Any], factor: Any) -> Coefficients:
    """``factor * a``."""
    return [factor * x for x in a]


def multiply(a: Sequence[Any], b: Sequence[Any]) -> Coefficients:
    """``a * b``."""
    product: Coefficients = [0 * a[0] * b[0]] * (len(a) + len(b) - 1)
    for i, x in enumerate(a):
        for j, y in enumerate(b):
            product[i + j] = product[i + j] + x * y
    return product


def derivative(a: Sequence[Any]) -> Coefficients:
    """``da/du``; the derivative of a constant is the zero polynomial ``[0]``."""
    return [k * x for k, x in enumerate(a)][1:] or [0 * a[0]]


def evaluate(a: Sequence[Any], u: Any) -> Any:
    """Horner's value of ``a`` at ``u`` (a number or an array)."""
    value = a[-1] + 0 * u
    for x in reversed(a[:-1]):
        value = value * u + x
    return value


def shift(a: Sequence[Any], centre: Any) -> Coefficients:
    """Coefficients in ``x`` of ``a(centre + x)``, by repeated synthetic division."""
    out = [x + 0 * centre for x in a]
    for i in range(len(out) - 1):
        for j in range(len(out) - 2, i - 1, -1):
            out[j] = out[j] + centre * out[j + 1]
    return out


def reflect(a: Sequence[Any]) -> Coefficients:
    """Coefficients in ``x`` of ``a(-x)``."""
    return [x if k % 2 == 0 else -x for k, x in enumerate(a)]


def divide_by_root(a: Sequence[Any], root: Any) -> Coefficients:
    """``a / (u - root)`` when ``root`` is a root of ``a``; the remainder is dropped.

    It is zero in exact arithmetic, and the caller says so: this is structural.
    """
    quotient: Coefficients = []
    carry = 0 * a[0]
    for x in reversed(a[1:]):
        carry = x + carry * root
        quotient.append(carry)
    return quotient[::-1]
