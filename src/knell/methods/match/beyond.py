"""The horizon series of a hole near the extremal end, summed past the next root of ``f``.

Near the extremal end the next root ``u = 1 + δ`` is close, the series in ``x = 1 - u`` reaches only
``|x| < δ``, and carrying ``φ_h`` on from there amplifies errors by ``|y|^(-Re s)``, ``s = 2σ/p₁``
(the second solution goes like ``y^s``). In ``y = x/(x + δ)`` that root lies at infinity, and the
series reaches almost all the way. With ``p = x(x+δ) g``, ``C = σK_x - σ²Q - W``:

    (δ y g φ_y)_y + 2σK φ_y + δ (1-y)^-2 C φ = 0,    x = δ y/(1-y).

Multiplied by ``y``, with ``b = y φ_y``, every coefficient is a polynomial in ``x``:

    y (δ g b)_y + 2σK b + (x + x²/δ) C φ = 0.

Multiplication by ``x`` is a running sum, ``[x v]_k = [x v]_(k-1) + δ v_(k-1)``. Sums of this kind lose
nothing; clearing the powers of ``1-y`` instead gives a shorter recurrence whose rounding errors
grow like a high power of ``k``.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from knell.physics import polynomial
from knell.physics.equation import LocalEquation

Complexes = NDArray[np.complex128]

LONGEST = 20000
CHECKED_EVERY = 10
ROUNDING = 1e-16


class NeedsPrecision(ArithmeticError):
    """Doubles cannot carry the horizon series here: extended precision is needed."""


def horizon_series(local: LocalEquation, gap: float, sigma: Complexes, y: complex) -> tuple[Complexes, Complexes]:
    """``φ_h`` and ``y dφ_h/dy`` at ``y``, one value for each ``σ``.

    ``local`` is the equation in ``x = 1 - u`` at a regular horizon, ``gap`` is ``δ``. Raises
    `NeedsPrecision` when the terms do not fall below rounding.
    """
    g = np.asarray(polynomial.divide_by_root(list(local.p)[1:], -gap))
    K = np.asarray(local.K)
    p1 = gap * g[0]
    of_b = _rows(gap * g, 2 * K)[:, 1:]
    of_phi = _rows(*(_times_x(part, gap) for part in (polynomial.derivative(list(local.K)), local.Q, local.W)))[:, 1:]
    # Row j holds the running coefficient of x^j b, of x^j φ.
    b = np.zeros((of_b.shape[1] + 1, sigma.size), dtype=complex)
    phi = np.zeros((of_phi.shape[1] + 1, sigma.size), dtype=complex)
    phi[0] = 1.0
    value, moment = np.ones_like(sigma), np.zeros_like(sigma)
    past_poles = 2 * np.max(sigma.real) / p1
    for k in range(1, LONGEST):
        for running in (b, phi):
            running[1:] += gap * running[:-1]
            running *= y
        (with_g, with_K), (with_slope, with_Q, with_W) = of_b @ b[1:], of_phi @ phi[1:]
        total = k * with_g + sigma * (with_K + with_slope - sigma * with_Q) - with_W
        phi[0] = total / (k * (2 * sigma - k * p1))
        b[0] = k * phi[0]
        value += phi[0]
        moment += b[0]
        # Terms may rise once more where k passes s.
        if k % CHECKED_EVERY == 0 and k > past_poles and np.all(k * np.abs(phi[0]) <= ROUNDING * np.abs(value)):
            return value, moment
    raise NeedsPrecision("the horizon series does not converge")


def _rows(*parts: NDArray[np.float64]) -> NDArray[np.float64]:
    """Coefficient lists as the rows of one matrix, filled up with zeros."""
    rows = np.zeros((len(parts), max(map(len, parts))))
    for row, part in zip(rows, parts, strict=True):
        row[: len(part)] = part
    return rows


def _times_x(part: Sequence[float], gap: float) -> NDArray[np.float64]:
    """Coefficients of ``(x + x²/δ)`` times a polynomial in ``x``."""
    return np.convolve(np.asarray(part, dtype=float), [0.0, 1.0, 1.0 / gap])
