"""Chebyshev series on ``[-1, 1]``: the few operations a spectral method needs.

A series is the list ``a`` of ``Σ a_k T_k(x)``. Multiplication by a polynomial and
integration are banded in these coefficients, so a differential equation integrated as
often as its order becomes a banded, well-scaled matrix (C. Clenshaw, Proc. Camb. Phil.
Soc. 53, 134, 1957; S. Olver, A. Townsend, SIAM Rev. 55, 462, 2013, for the same idea in
ultraspherical bases).
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np
from flint import acb, acb_poly


def from_monomials(coefficients: Sequence[Any]) -> list[Any]:
    """The Chebyshev series of ``Σ c_k x^k``, over any number type (Horner with ``x T_k = (T_{k+1} + T_{|k-1|})/2``)."""
    series = [coefficients[-1]]
    for c in reversed(coefficients[:-1]):
        raised = [0 * c] * (len(series) + 1)
        for k, a in enumerate(series):
            share = a if k == 0 else a * 0.5
            raised[k + 1] = raised[k + 1] + share
            if k > 0:
                raised[k - 1] = raised[k - 1] + share
        raised[0] = raised[0] + c
        series = raised
    return series


def product_matrix(series: Sequence[complex], rows: int, columns: int) -> np.ndarray:
    """Matrix of ``v -> series * v``, from ``columns`` coefficients to the first ``rows``."""
    matrix = np.zeros((rows + columns + len(series), columns), complex)
    k = np.arange(columns)
    for j, a in enumerate(series):
        # T_j T_k = (T_{j+k} + T_{|j-k|})/2; within one j no (row, column) pair repeats in either sum.
        matrix[k + j, k] += a / 2
        matrix[abs(k - j), k] += a / 2
    return matrix[:rows]


def integration_matrix(rows: int, columns: int) -> np.ndarray:
    """Matrix of the antiderivative, constant of integration left out (row 0 is zero)."""
    matrix = np.zeros((rows, columns))
    for k in range(1, rows):
        if k - 1 < columns:
            matrix[k, k - 1] = (2 if k == 1 else 1) / (2 * k)
        if k + 1 < columns:
            matrix[k, k + 1] = -1 / (2 * k)
    return matrix


def laurent(series: Sequence[acb]) -> acb_poly:
    """``z^d Σ a_k (z^k + z^-k)/2``, ``d = len(series) - 1``: products of series become products of polynomials."""
    half = [a / 2 for a in series[1:]]
    return acb_poly([*reversed(half), series[0], *half])


def from_laurent(product: acb_poly, centre: int, count: int) -> list[acb]:
    """The first ``count`` coefficients of the series whose `laurent` polynomial is ``product`` about ``z^centre``."""
    return [product[centre]] + [2 * product[centre + k] for k in range(1, count)]


def antiderivative(series: Sequence[acb], count: int) -> list[acb]:
    """The first ``count`` coefficients of the antiderivative without its constant; ``series`` needs ``count + 1``."""
    return [acb(0), series[0] - series[2] / 2] + [(series[k - 1] - series[k + 1]) / (2 * k) for k in range(2, count)]
