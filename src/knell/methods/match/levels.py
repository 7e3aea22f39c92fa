"""How the second solution grows beside the wanted one along a path: what a step's error becomes.

Two solutions of the regularised equation differ by a factor that goes like ``e^(-2σ ∫ H/p du)``
(Abel's formula), the ratio of the outgoing to the ingoing wave. Along a path on which this
level rises, an error made early is amplified by ``e^(rise)``; digits lost so must be carried extra.
"""

from __future__ import annotations

from collections.abc import Sequence
from functools import cache

import numpy as np
from numpy.typing import NDArray

from knell.physics import polynomial
from knell.physics.equation import Equation

_NODES = 8
# A straight piece is cut so that no part is longer than this fraction of its distance to 0 and 1.
_PART = 0.5


@cache
def _gauss() -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    nodes, weights = np.polynomial.legendre.leggauss(_NODES)
    return (nodes + 1) / 2, weights / 2


def levels(equation: Equation, path: Sequence[complex], sigma: complex) -> NDArray[np.float64]:
    """``Re(-2σ ∫ H/p du)`` from the first vertex of the path to points along it (``equation`` over doubles)."""
    nodes, weights = _gauss()
    points = [complex(path[0])]
    for target in path[1:]:
        start = points[-1]
        nearest = min(abs(start), abs(start - 1), abs(target), abs(target - 1))
        parts = int(np.ceil(abs(target - start) / (_PART * nearest)))
        points += [start + (target - start) * k / parts for k in range(1, parts + 1)]
    start, step = np.asarray(points[:-1]), np.diff(points)
    u = start[:, None] + step[:, None] * nodes
    slope = polynomial.evaluate(equation.H, u) / polynomial.evaluate(equation.p, u)
    return np.concatenate([[0.0], np.cumsum(np.real(-2 * sigma * (slope @ weights) * step))])


def digits_lost(equation: Equation, path: Sequence[complex], sigma: complex) -> float:
    """Decimal digits by which an error made on the way can outgrow the solution before the path's end."""
    along = levels(equation, path, sigma)
    return float(along[-1] - np.min(along)) / np.log(10)
