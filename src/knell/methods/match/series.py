"""Local power series of the regularised equation for many frequencies at once, in doubles.

In a local variable ``x`` the equation reads

    A φ'' + (B₀ + σB₁) φ' + (C₀ + σC₁ + σ²C₂) φ = 0

with polynomial coefficients, so ``φ = Σ a_m x^m`` obeys, for every ``k``,

    Σ_m a_m [ m(m-1) A_{k+2-m} + m (B₀+σB₁)_{k+1-m} + (C₀+σC₁+σ²C₂)_{k-m} ] = 0 :

a recurrence of fixed length. Its highest term is ``a_{k+2}`` at an ordinary point
(``A_0 ≠ 0``) and ``a_{k+1}`` at a singular end (``A_0 = 0``; ``A_1 = 0`` too where it is
irregular, and the series is then a formal one, to be cut before its terms grow).
All series run in the scaled variable ``a_m h^m``, so that a step of length ``h`` sums plain
coefficients and never overflows.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from knell.physics import polynomial
from knell.physics.equation import Equation, LocalEquation

Complexes = NDArray[np.complex128]


@dataclass(frozen=True)
class Operator:
    """Coefficients of the local equation as one array ``(6, length)`` or ``(6, length, frequencies)``.

    Row 0 is ``A``, 1 ``B₀``, 2 ``B₁``, 3 ``C₀``, 4 ``C₁``, 5 ``C₂``. Column ``i`` holds what
    multiplies ``a_{k+2-i}``: ``A_i``, ``B_{i-1}`` and ``C_{i-2}``.
    """

    rows: NDArray[Any]


def _stack(A: list[Any], B0: list[Any], B1: list[Any], C0: list[Any], C1: list[Any], C2: list[Any]) -> Operator:
    shifted = [(0, A), (1, B0), (1, B1), (2, C0), (2, C1), (2, C2)]
    length = max(offset + len(part) for offset, part in shifted)
    shape = np.broadcast_shapes(*(np.shape(x) for _, part in shifted for x in part))
    rows = np.zeros((6, length, *shape), dtype=complex)
    for row, (offset, part) in enumerate(shifted):
        for i, x in enumerate(part):
            rows[row, offset + i] = x
    return Operator(rows)


def operator_of(local: LocalEquation) -> Operator:
    """The operator in the ``x`` of a `LocalEquation` (either end, or an ordinary point)."""
    K = list(local.K)
    return _stack(
        list(local.p),
        polynomial.derivative(local.p),
        polynomial.scale(K, 2),
        polynomial.scale(local.W, -1),
        polynomial.derivative(K),
        polynomial.scale(local.Q, -1),
    )


def operator_at(equation: Equation, centre: Any) -> Operator:
    """The operator about an ordinary point ``u = centre``, a number or one per frequency."""
    p, H, Q, W = (polynomial.shift(part, centre) for part in (equation.p, equation.H, equation.Q, equation.W))
    return operator_of(LocalEquation(tuple(p), tuple(H), tuple(Q), tuple(W)))


def _scaled(operator: Operator, h: Any, order: int) -> NDArray[Any]:
    """Rows for the scaled coefficients ``a_m h^m``: column ``i`` times ``h^(order-2+i)``."""
    rows = operator.rows
    powers = np.asarray(h, dtype=complex) ** (np.arange(rows.shape[1]) + order - 2).reshape(-1, *(1,) * np.ndim(h))
    if rows.ndim == 2 and powers.ndim == 2:
        rows = rows[:, :, None]
    return rows * powers[None] if rows.ndim == powers.ndim + 1 else rows * powers[None, :, None]


def coefficients(
    operator: Operator, sigma: Complexes, h: Any, seed: list[Any], order: int, terms: int
) -> tuple[Complexes, Complexes]:
    """Scaled coefficients ``a_m h^m`` and ``m a_m h^m``, ``m < terms``, each ``(terms, frequencies)``.

    ``seed`` holds the first ``order`` coefficients (scaled): two at an ordinary point, one at a
    singular end. ``h`` is one number or one per frequency.
    """
    rows = _scaled(operator, h, order)
    length = rows.shape[1]
    first = 3 - order  # columns below it hold the leading term
    A, B, C = rows[0:1, first:][:, ::-1], rows[1:3, first:][:, ::-1], rows[3:6, first:][:, ::-1]
    leading_a = rows[0, first - 1]
    leading_b = rows[1, first - 1] + sigma * rows[2, first - 1]
    shared = rows.ndim == 2
    if not shared:
        B = B[0] + sigma * B[1]
        C = C[0] + sigma * (C[1] + sigma * C[2])
        A = A[0]
        product = np.empty_like(B)
    A, B, C = (np.ascontiguousarray(part) for part in (A, B, C))
    # Zero rows in front stand for the coefficients of negative index.
    plain, first_moment, second_moment = np.zeros((3, length + terms, sigma.size), dtype=complex)
    for m in range(terms):
        if m < len(seed):
            x = seed[m]
        else:
            window = slice(m + first, m + length)
            if shared:
                b, c = B @ first_moment[window], C @ plain[window]
                total = (A @ second_moment[window])[0] + b[0] + c[0] + sigma * (b[1] + c[1] + sigma * c[2])
            else:
                total = np.multiply(A, second_moment[window], out=product).sum(axis=0)
                total += np.multiply(B, first_moment[window], out=product).sum(axis=0)
                total += np.multiply(C, plain[window], out=product).sum(axis=0)
            x = total / (-m * ((m - 1) * leading_a + leading_b))
        plain[length + m] = x
        first_moment[length + m] = m * x
        second_moment[length + m] = m * (m - 1) * x
    return plain[length:], first_moment[length:]
