"""``A(σ) v`` of the spectral pencil over FLINT numbers, at a cost linear in the number of coefficients.

The rows are those of `spectral.pencil`, in its order: for each side, from the third coefficient on, the series of

    (p/h²) φ + I[(2σH/h - p'/h²) φ - I[(σH'/h + σ²Q + W) φ]],      I: antiderivative, primes: d/dx,

then value and slope at each corner. Products of series are products of short polynomials (`chebyshev.laurent`).
"""

from __future__ import annotations

from collections.abc import Sequence
from itertools import pairwise

from flint import acb

from knell.methods import chebyshev
from knell.methods.spectral import Side
from knell.physics import polynomial


def residual(parts: Sequence[Side], sigma: acb, vector: Sequence[acb]) -> list[acb]:
    """``A(σ) v``."""
    rows: list[acb] = []
    for side, v in zip(parts, split(parts, vector), strict=True):
        rows += _equation_rows(side, sigma, v)
    return rows + corner_rows(parts, vector)


def slope(parts: Sequence[Side], sigma: acb, vector: Sequence[acb]) -> list[acb]:
    """``A'(σ) v``, as half the difference of ``A(σ+1) v`` and ``A(σ-1) v``: exact, the pencil being quadratic."""
    pairs = zip(residual(parts, sigma + 1, vector), residual(parts, sigma - 1, vector), strict=True)
    return [(above - below) / 2 for above, below in pairs]


def coefficients(side: Side, sigma: acb) -> tuple[list[acb], list[acb]]:
    """Series of ``2σH/h - p'/h²`` and of ``-(σH'/h + σ²Q + W)``."""
    first = polynomial.add(polynomial.scale(side.H, 2 * sigma), polynomial.scale(side.dp, -1))
    zeroth = polynomial.add(polynomial.scale(side.dH, -sigma), polynomial.scale(side.Q, -(sigma * sigma)))
    return first, polynomial.add(zeroth, polynomial.scale(side.W, -1))


def split(parts: Sequence[Side], vector: Sequence[acb]) -> list[Sequence[acb]]:
    """The unknowns of each side."""
    series, start = [], 0
    for side in parts:
        series.append(vector[start : start + side.degree + 1])
        start += side.degree + 1
    return series


def corner_rows(parts: Sequence[Side], vector: Sequence[acb]) -> list[acb]:
    """At each corner the jump of ``φ`` and that of ``dφ/du`` (times ``h/degree²`` of the left side)."""
    rows = []
    for (left, right), (a, b) in zip(pairwise(parts), pairwise(split(parts, vector)), strict=True):
        rows.append(sum(a, acb(0)) - sum(b[0::2], acb(0)) + sum(b[1::2], acb(0)))
        before = sum((k * k * x for k, x in enumerate(a)), acb(0))
        after = sum(((-1) ** (k + 1) * k * k * x for k, x in enumerate(b)), acb(0))
        rows.append((before - after * left.half / right.half) / left.degree**2)
    return rows


def _equation_rows(side: Side, sigma: acb, v: Sequence[acb]) -> list[acb]:
    count, unknown = side.rows + 2, chebyshev.laurent(v)
    first, zeroth = coefficients(side, sigma)

    def times(a: Sequence[acb], size: int) -> list[acb]:
        return chebyshev.from_laurent(chebyshev.laurent(a) * unknown, len(a) + len(v) - 2, size)

    inner = chebyshev.antiderivative(times(zeroth, count + 2), count + 1)
    middle = [x + y for x, y in zip(times(first, count + 1), inner, strict=True)]
    outer = chebyshev.antiderivative(middle, count)
    return [x + y for x, y in zip(times(side.p, count)[2:], outer[2:], strict=True)]
