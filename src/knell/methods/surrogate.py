"""Surrogates: ``Mω`` of one mode along the coupling, as Chebyshev series on pieces of ``κ``.

``κ`` itself is the variable. What has a square-root edge at ``κ = 1`` is the horizon radius, and with it ``q`` and
``ω r_h``: at fixed ``M`` the metric is linear in ``κ``, and ``Mω`` is even in ``sqrt(1-κ)`` to every order (*measured*:
the linear coefficient is below ``1e-12`` where the quadratic one is ``0.1``). What is left there is exponentially
small, about ``exp(-2π Re ω/κ_s)`` with the surface gravity ``κ_s``, and turns with the phase ``2π Im ω/κ_s``: that is
why overtones need more pieces than the fundamental.

A piece is a polynomial through Chebyshev-Lobatto nodes, ends included, so pieces meet. It is kept when its last
coefficients are below the tolerance, at the full degree or already at half of it, else split in two.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import cached_property
from itertools import pairwise

import numpy as np
from flint import acb, arb, ctx
from numpy.typing import NDArray

Doubles = NDArray[np.float64]
Complexes = NDArray[np.complex128]
Sample = Callable[[Sequence[float]], Sequence[acb]]

DEGREE = 32
# Next to the extremal hole a solver's cost grows like 1/sqrt(1-κ): no node but κ = 1 itself lies closer than this.
NEAREST = 0.0119
_SHORTEST = 1e-4
# From this degree on half of it is tried first; its nodes are among those of the whole.
_TRY_HALF = 16
_BITS = 128
# Points in one pass of the recurrence: more fall out of the processor's cache.
_BATCH = 1 << 13


class NotResolved(ArithmeticError):
    """A piece as short as allowed still does not reach the tolerance: the mode jumps, or its values are noise."""


@dataclass(frozen=True)
class Piece:
    """``Σ_k c_k T_k(x)`` on ``low <= κ <= high``, ``x = (2κ - low - high)/(high - low)``."""

    low: float
    high: float
    coefficients: tuple[complex, ...]

    @property
    def tail(self) -> float:
        """The largest of the last coefficients, an eighth of them but two at least: about what is missing."""
        return max(abs(c) for c in self.coefficients[-max(2, len(self.coefficients) // 8) :])


@dataclass(frozen=True)
class Surrogate:
    """Adjoining pieces, ``κ`` rising; call it with couplings. Outside them it raises `ValueError`."""

    pieces: tuple[Piece, ...]

    @property
    def low(self) -> float:
        return self.pieces[0].low

    @property
    def high(self) -> float:
        return self.pieces[-1].high

    def __call__(self, coupling: Doubles | float) -> Complexes:
        """``Mω`` at each coupling, in its shape."""
        return self._evaluate(coupling, self._series)

    def slope(self, coupling: Doubles | float) -> Complexes:
        """``d(Mω)/dκ`` at each coupling, finite at ``κ = 1`` too."""
        return self._evaluate(coupling, self._slopes)

    @cached_property
    def _edges(self) -> Doubles:
        return np.array([piece.high for piece in self.pieces[:-1]])

    @cached_property
    def _series(self) -> list[Complexes]:
        return [np.array(piece.coefficients) for piece in self.pieces]

    @cached_property
    def _slopes(self) -> list[Complexes]:
        return [
            np.polynomial.chebyshev.chebder(c) * 2 / (piece.high - piece.low)
            for piece, c in zip(self.pieces, self._series, strict=True)
        ]

    def _evaluate(self, coupling: Doubles | float, series: list[Complexes]) -> Complexes:
        couplings = np.asarray(coupling, dtype=float)
        flat = couplings.ravel()
        # Written so that NaN is outside too.
        outside = ~((flat >= self.low) & (flat <= self.high))
        if outside.any():
            raise ValueError(f"coupling {flat[outside][0]:g} lies outside {self.low:g} … {self.high:g}")
        place = np.searchsorted(self._edges, flat)
        order = np.argsort(place, kind="stable")
        bounds = np.searchsorted(place[order], np.arange(len(self.pieces) + 1))
        ordered, values = flat[order], np.empty(flat.shape, complex)
        for i, piece in enumerate(self.pieces):
            for start in range(bounds[i], bounds[i + 1], _BATCH):
                batch = slice(start, min(start + _BATCH, bounds[i + 1]))
                x = (2 * ordered[batch] - piece.low - piece.high) / (piece.high - piece.low)
                values[order[batch]] = _clenshaw(series[i], x)
        return values.reshape(couplings.shape)


def _clenshaw(series: Complexes, x: Doubles) -> Complexes:
    """``Σ c_k T_k(x)``; real and imaginary part on their own are faster than complex numbers."""
    value = np.empty(x.shape, complex)
    twice = 2 * x
    for part, c in ((value.real, series.real), (value.imag, series.imag)):
        ahead, last = np.zeros_like(x), np.zeros_like(x)
        for a in c[:0:-1]:
            ahead, last = twice * ahead - last + a, ahead
        part[:] = x * ahead - last + c[0]
    return value


def fit(sample: Sample, tolerance: float, edges: Sequence[float] = (0.0, 1.0)) -> Surrogate:
    """Pieces whose last coefficients are below ``tolerance``, from the first of ``edges`` to the last.

    Each interval between ``edges`` is split as often as it needs. ``sample`` gives ``Mω`` at a list of couplings; what
    it raises comes through. Raises `NotResolved`, with the place, when a piece would have to be too short.
    """
    kept: list[Piece] = []
    pending = list(pairwise(edges))[::-1]
    while pending:
        low, high = pending.pop()
        degree = _degree(low, high)
        piece = _resolved(sample, low, high, degree, tolerance) if degree else None
        if piece is not None:
            kept.append(piece)
            continue
        if high - low < _SHORTEST or not degree:
            raise NotResolved(f"between couplings {low:g} and {high:g} no polynomial follows the mode to {tolerance:g}")
        # Four times closer to the extremal hole is half as far in sqrt(1-κ).
        middle = 1 - (1 - low) / 4 if high == 1 else (low + high) / 2
        pending += [(middle, high), (low, middle)]
    return Surrogate(tuple(kept))


def _resolved(sample: Sample, low: float, high: float, degree: int, tolerance: float) -> Piece | None:
    """The polynomial of ``degree`` or of half of it, whichever will do first; None where neither does."""
    if degree >= _TRY_HALF:
        half = _interpolate(sample, low, high, degree // 2)
        if half.tail <= tolerance:
            return half
        # Coefficients fall geometrically: by a factor in the last half of these, by its square in as many again.
        ratio = half.tail / max(abs(c) for c in half.coefficients[degree // 8 : degree // 4 + 1])
        if half.tail * ratio**2 > tolerance:
            return None
    whole = _interpolate(sample, low, high, degree)
    return whole if whole.tail <= tolerance else None


def _degree(low: float, high: float) -> int:
    """`DEGREE`, or less where nodes would come too near to the extremal hole; 0 where even few of them would."""
    if high < 1:
        return DEGREE
    # The node next to κ = 1 lies at sqrt(1-κ) = sqrt(1-low) sin(π/2 degree).
    allowed = (d for d in range(DEGREE, 2, -2) if math.sqrt(1 - low) * math.sin(math.pi / (2 * d)) > NEAREST)
    return next(allowed, 0)


def _interpolate(sample: Sample, low: float, high: float, degree: int) -> Piece:
    # From the right, 1 - x = 2 sin²: keeps its digits next to κ = 1, and the nodes of half the degree are among them.
    inner = [high - (high - low) * math.sin(math.pi * j / (2 * degree)) ** 2 for j in range(1, degree)]
    return Piece(low, high, _coefficients(sample([high, *inner, low])))


def _coefficients(values: Sequence[acb]) -> tuple[complex, ...]:
    """``c_k = (2/N) Σ'' v_j cos(πjk/N)``, first and last terms of sums and series halved; in balls, rounded once."""
    N = len(values) - 1
    with ctx.workprec(_BITS):
        cosines = [(arb(j) / N).cos_pi() for j in range(2 * N)]
        ends = [values[0] / 2, *values[1:-1], values[-1] / 2]
        sums = [sum((v * cosines[j * k % (2 * N)] for j, v in enumerate(ends)), acb(0)) for k in range(N + 1)]
        scaled = [complex(2 * total / N) for total in sums]
    return (scaled[0] / 2, *scaled[1:-1], scaled[-1] / 2)
