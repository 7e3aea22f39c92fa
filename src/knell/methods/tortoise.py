"""The tortoise coordinate ``r*(r) = ∫ dr/f`` of the original equation and its inverse, in doubles.

With ``x = r - r_h`` and the roots ``r_i = r_h - d_i`` of ``f``, partial fractions of ``1/f`` give

    r* = x + ln(x)/f'(r_h) + Σ_i ln(1 + x/d_i)/f'(r_i)                          simple horizon
    r* = x - 1/(F₀x) - F₁ ln(x)/F₀² + Σ_i ln(1 + x/d_i)/f'(r_i)                 f = F₀x² + F₁x³ + …

The unknown of the inversion is ``ln x``, so that ``x`` and ``f`` keep their relative accuracy next to the
horizon, where ``r`` itself is ``r_h`` to rounding.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from knell.methods.original import OriginalEquation, horizon_roots

_BITS = 160
_TABLE = 4000
_ITERATIONS = 30

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Tortoise:
    """``horizon`` is ``r_h``, ``distances`` the ``d_i``, ``weights`` the ``1/f'(r_i)``, ``log`` and ``pole`` the
    factors of ``ln x`` and ``1/x``; ``f = x^order Π(x + d_i)/r^exponent``. All in M."""

    horizon: float
    exponent: int
    order: int
    distances: tuple[complex, ...]
    weights: tuple[complex, ...]
    log: float
    pole: float

    @classmethod
    def of(cls, equation: OriginalEquation) -> Tortoise:
        """The coordinate of an equation; differences of the roots are taken in balls, before rounding."""
        roots = horizon_roots(equation, _BITS)
        r_h, n = roots.horizon, equation.exponent
        order = 2 if roots.degenerate else 1
        distances = [r_h - root for root in roots.others]
        weights = []
        for root in roots.others:
            product = (root - r_h) ** order
            for other in roots.others:
                if other is not root:
                    product *= root - other
            weights.append(root**n / product)
        leading = r_h**-n
        for distance in distances:
            leading *= distance
        log = 1 / leading
        if roots.degenerate:
            relative = sum((1 / d for d in distances), -n / r_h)  # F₁/F₀
            log = -relative / leading
        return cls(
            horizon=float(r_h.real),
            exponent=n,
            order=order,
            distances=tuple(complex(d) for d in distances),
            weights=tuple(complex(w) for w in weights),
            log=float(log.real),
            pole=-1 / float(leading.real) if roots.degenerate else 0.0,
        )

    def r_star(self, log_x: Array) -> Array:
        """``r*`` at ``x = exp(log_x)``, in M."""
        x = np.exp(log_x)
        value = x + self.log * log_x
        if self.pole:
            value = value + self.pole / x
        for distance, weight in zip(self.distances, self.weights, strict=True):
            value = value + (weight * np.log1p(x / distance)).real
        return value

    def f(self, log_x: Array) -> Array:
        """``f`` at ``x = exp(log_x)``, with full relative accuracy at the horizon."""
        x = np.exp(log_x)
        value = x**self.order / (self.horizon + x) ** self.exponent
        product = np.ones_like(x, dtype=complex)
        for distance in self.distances:
            product = product * (x + distance)
        return value * product.real

    def log_x(self, r_star: Array) -> Array:
        """The inverse of `r_star` for an array of values, by Newton's iteration from a table.

        Raises `ArithmeticError` when it does not settle.
        """
        table = np.linspace(*self._range(float(np.min(r_star)), float(np.max(r_star))), _TABLE)
        log_x = np.interp(r_star, self.r_star(table), table)
        for _ in range(_ITERATIONS):
            step = (self.r_star(log_x) - r_star) * self._slope(log_x)
            log_x = log_x - step
            if np.max(np.abs(step)) < 1e-11:
                return log_x
        raise ArithmeticError("the tortoise coordinate could not be inverted")

    def _slope(self, log_x: Array) -> Array:
        """``d ln x/dr* = f/x``, without the factor ``x`` that would underflow."""
        x = np.exp(log_x)
        value = x ** (self.order - 1) / (self.horizon + x) ** self.exponent
        product = np.ones_like(x, dtype=complex)
        for distance in self.distances:
            product = product * (x + distance)
        return value * product.real

    def _range(self, lowest: float, highest: float) -> tuple[float, float]:
        low, high = -1.0, 1.0
        while self.r_star(np.array(low)) > lowest:
            low *= 1.5
        while self.r_star(np.array(high)) < highest:
            high *= 1.5
        return low, high
