"""Power series that solve a linear differential equation with polynomial coefficients, over FLINT numbers.

All recurrences of the direct integration have the form

    c d(k) a_k = - Σ_j [k² X_j + k Y_j + Z_j] a_(k-j),    j = 1 … L.

The three sums over ``j`` are one small matrix product per term. The last ``L`` coefficients live in a ring, and
there is one copy of the matrix for each position of the ring, so a step of the recurrence writes one number only.
The numbers are floating-point numbers of the working precision (midpoints of balls: radii would grow exponentially
along a recurrence, far beyond the true error, which is measured otherwise).
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Any

from flint import acb, acb_mat

_CHECK_EVERY = 4
_TERMS_PER_BIT = 8


class SeriesError(ArithmeticError):
    """A series does not reach the working precision where it is summed."""


def summed(
    columns: Sequence[tuple[Any, Any, Any]],
    leading: Any,
    divisor: Callable[[int], Any],
    start: Sequence[Any],
    step: Any,
    bits: int,
    asymptotic: bool = False,
) -> tuple[Any, Any]:
    """``Σ a_k x^k`` and ``Σ k a_k x^k`` at ``x = step``.

    ``columns`` are ``(X_j, Y_j, Z_j)``, ``leading`` is ``c``, ``start`` the first ``a_k x^k``. The sum ends where the
    terms stay below ``2^-bits`` of the largest. Raises `SeriesError` when they do not get there within 8 terms per
    bit, or when the terms of an asymptotic series grow again before that.
    """
    matrices = _ring(columns, leading, step)
    length = len(columns)
    terms = list(start)
    column = acb_mat(length, 1)
    for k, term in enumerate(terms):
        column[k % length, 0] = term
    scale = 1 / sum((abs(term) for term in terms), abs(acb(0))).mid()
    threshold = 2.0**-bits
    largest, smallest, quiet = 0.0, float("inf"), 0
    for k in range(len(terms), _TERMS_PER_BIT * bits):
        products = matrices[k % length] * column
        term = (((k * products[0, 0] + products[1, 0]) * k + products[2, 0]) / divisor(k)).mid()
        terms.append(term)
        column[k % length, 0] = term
        if k % _CHECK_EVERY:
            continue
        size = float((abs(term) + abs(terms[-2])) * scale)
        largest, smallest = max(largest, size, 1.0), min(smallest, size)
        quiet = quiet + 1 if size * (1 if asymptotic else k) < threshold * largest else 0
        if quiet == (1 if asymptotic else 2):
            return _sums(terms)
        if asymptotic and size > 1e6 * smallest:
            break
    raise SeriesError(f"a series stalls at {smallest / largest:.1e} of its largest term, {threshold:.1e} needed")


def _ring(columns: Sequence[tuple[Any, Any, Any]], leading: Any, step: Any) -> list[acb_mat]:
    """The matrices ``-(X, Y, Z)_j step^j / c``; in the p-th, column ``s`` is that of ``a_i``, ``i = s mod L``."""
    length = len(columns)
    factor = -1 / leading
    scaled = []
    for column in columns:
        factor = (factor * step).mid()
        scaled.append([(entry * factor).mid() for entry in column])
    return [
        acb_mat(3, length, [scaled[(p - s - 1) % length][row] for row in range(3) for s in range(length)])
        for p in range(length)
    ]


def _sums(terms: Sequence[Any]) -> tuple[Any, Any]:
    value, weighted = acb(0), acb(0)
    for k in range(len(terms) - 1, -1, -1):
        value += terms[k]
        weighted += k * terms[k]
    return value.mid(), weighted.mid()
