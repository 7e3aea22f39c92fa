"""Taylor coefficients of two solutions at once, by the fixed-length recurrence of the equation on a contour.

With ``φ = Σ a_k y^k`` the coefficient of ``y^(k-2)`` of the equation gives, for ``m = k - j``,

    P_0 k (k-1) a_k = - Σ_j [P_j m(m-1) + R_(j-1) m + S_(j-2)] a_m,      j = 1 … L,

whose bracket is quadratic in ``k``. The sum is one small matrix product for both solutions: the last ``L``
coefficients live in a ring of ``L`` rows, each position of the ring has its row of brackets, and a row moves on by
``L`` with two additions of constant differences. The same code runs over FLINT balls and over mpmath numbers.

From one term to the next only midpoints are carried: radii would grow exponentially, far beyond the true error (by
1 to 4 bits a term). Each term still comes with the radius of its own step, from which `knell.methods.aim_rounding`
computes the true propagation.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any

from knell.methods.contour import PulledBack


@dataclass(frozen=True)
class Columns:
    """The brackets ``-[…]/P_0 = X k² + (Y0 + σY1) k + Z0 + σZ1 + σ²Z2``, one entry for each ``j = 1 … L``."""

    X: list[Any]
    Y: tuple[list[Any], list[Any]]
    Z: tuple[list[Any], list[Any], list[Any]]

    @property
    def length(self) -> int:
        return len(self.X)

    def at(self, sigma: Any) -> tuple[list[Any], list[Any], list[Any]]:
        """``X``, ``Y``, ``Z`` for one frequency."""
        square = sigma * sigma
        Y = [a + sigma * b for a, b in zip(*self.Y, strict=True)]
        Z = [a + sigma * b + square * c for a, b, c in zip(*self.Z, strict=True)]
        return self.X, Y, Z


def columns(equation: PulledBack) -> Columns:
    """The brackets of the recurrence about ``y = 0``; raises `ZeroDivisionError` where that point is singular."""
    length = max(len(equation.P) - 1, *(len(R) for R in equation.R), *(len(S) + 1 for S in equation.S))
    zero = 0 * equation.P[0]
    factor = -1 / equation.P[0]

    def scaled(part: Sequence[Any], offset: int) -> list[Any]:
        """``-part_(j-offset)/P_0`` for ``j = 1 … L``."""
        return [factor * part[j - offset] if offset <= j < len(part) + offset else zero for j in range(1, length + 1)]

    P, R, S = scaled(equation.P, 0), [scaled(x, 1) for x in equation.R], [scaled(x, 2) for x in equation.S]
    j = range(1, length + 1)
    # m(m-1) = k² - (2j+1) k + j(j+1), m = k - j.
    return Columns(
        X=P,
        Y=([r - (2 * i + 1) * p for i, p, r in zip(j, P, R[0], strict=True)], R[1]),
        Z=(
            [i * (i + 1) * p - i * r + s for i, p, r, s in zip(j, P, R[0], S[0], strict=True)],
            [s - i * r for i, r, s in zip(j, R[1], S[1], strict=True)],
            S[2],
        ),
    )


def taylor_pair(
    brackets: Columns, sigma: Any, last: int, matrix: Callable[[list[list[Any]]], Any], rounded: Callable[[Any], Any]
) -> tuple[list[Any], list[Any]]:
    """``a_0 … a_last`` and ``b_0 … b_last`` of the solutions with the data (1, 0) and (0, 1).

    ``matrix`` makes a matrix of nested lists (`flint.acb_mat`, `mpmath.matrix`), ``rounded`` is what is carried to
    the next term (the midpoint, or the number itself). ``last`` is 2 or more.
    """
    length = brackets.length
    X, Y, Z = brackets.at(sigma)
    zero = 0 * X[0]
    pair = ([zero + 1, zero], [zero, zero + 1])
    ring = matrix([[pair[0][i], pair[1][i]] if i < 2 else [zero, zero] for i in range(max(length, 2))])
    size = max(length, 2)

    def row(values: Sequence[Any], position: int) -> Any:
        """Entry ``j`` at the ring's place of ``a_(k-j)``, ``k = position`` modulo the ring's size."""
        lags = ((position - place - 1) % size for place in range(size))
        return matrix([[values[lag] if lag < length else zero for lag in lags]])

    rows, steps, bends = [], [], []
    for k in range(2, min(size + 2, last + 1)):
        x, y, z = row(X, k), row(Y, k), row(Z, k)
        rows.append((x * k + y) * k + z)
        steps.append(x * (2 * k * size + size * size) + y * size)
        bends.append(x * (2 * size * size))
    a, b = pair
    for k in range(2, last + 1):
        turn = (k - 2) % size
        product = rows[turn] * ring
        rows[turn] += steps[turn]
        steps[turn] += bends[turn]
        divisor = k * (k - 1)
        first, second = product[0, 0] / divisor, product[0, 1] / divisor
        place = k % size
        ring[place, 0], ring[place, 1] = rounded(first), rounded(second)
        a.append(first)
        b.append(second)
    return a, b
