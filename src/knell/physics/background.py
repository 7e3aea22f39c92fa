"""Backgrounds: static, spherically symmetric metrics ``f(r) = 1 - 2 m(r)/r``.

Units are ``r_h = 1`` (outermost horizon) and ``u = r_h/r``, in which ``f`` is a
polynomial in ``u`` with ``f(0) = 1`` and ``f(1) = 0``. Everything above this module
sees those coefficients only; the power-law family is one way to make them.

Power-law family, integer ``n >= 2``:

    m(r) = M [1 - κ c_n (M/r)^(n-1)],    c_n = (1/n) (2(n-1)/n)^(n-1)
    f(u) = 1 - (1+q) u + q u^n,   M/r_h = (1+q)/2,   κ = q / (2 c_n (M/r_h)^n)

``c_n`` makes the horizon degenerate at ``κ = 1``, where ``q = 1/(n-1)``. ``κ = 0`` is
Schwarzschild, ``n = 2`` has the Reissner-Nordström form with ``κ = Q²/M²``, and
``κ < 0`` is allowed. ``κ(q)`` has zero slope at the extremal end, so ``q`` (or
``sqrt(1-κ)``) is the smooth parameter there, never ``κ``.
"""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from typing import Any

from flint import arb, ctx, fmpq


class BackgroundError(ValueError):
    """The parameters describe no black hole; the message names the parameter and the remedy."""


def to_fmpq(value: Fraction) -> fmpq:
    """The FLINT rational equal to ``value``."""
    return fmpq(value.numerator, value.denominator)


@dataclass(frozen=True)
class PowerLaw:
    """The power-law background of one exponent and one exact coupling ``κ <= 1``.

    Raises `BackgroundError` for an exponent below 2 or not whole, and for ``κ > 1``,
    where ``f`` has no root and there is no horizon.
    """

    exponent: int
    coupling: Fraction

    def __post_init__(self) -> None:
        if isinstance(self.exponent, bool) or not isinstance(self.exponent, int) or self.exponent < 2:
            raise BackgroundError(f"exponent {self.exponent}: must be a whole number, 2 or more")
        if not isinstance(self.coupling, Fraction):
            raise TypeError("coupling must be a Fraction, so that it stays exact")
        if self.coupling > 1:
            raise BackgroundError(f"coupling {self.coupling}: must be at most 1; above 1 there is no horizon")

    @classmethod
    def from_q(cls, exponent: int, q: Fraction) -> PowerLaw:
        """The background with rational ``q``, whose coupling is then rational too."""
        c_n = cls(exponent, Fraction(0)).c_n
        if not -1 < q <= Fraction(1, exponent - 1):
            raise BackgroundError(f"q = {q}: must lie in (-1, 1/(n-1)]")
        return cls(exponent, q / (2 * c_n * ((1 + q) / 2) ** exponent))

    @property
    def c_n(self) -> Fraction:
        """``(1/n) (2(n-1)/n)^(n-1)``."""
        n = self.exponent
        return Fraction(1, n) * Fraction(2 * (n - 1), n) ** (n - 1)

    @property
    def is_schwarzschild(self) -> bool:
        return self.coupling == 0

    @property
    def is_extremal(self) -> bool:
        """Exactly ``κ = 1``: the horizon is a double root of ``f``."""
        return self.coupling == 1

    def q(self, bits: int) -> arb:
        """``q`` as a ball of relative radius about ``2^-bits``, proven to hold the root.

        ``F(q) = q - 2 c_n κ ((1+q)/2)^n``. For ``0 < κ < 1`` it is concave with
        ``F(0) < 0 < F(1/(n-1))``; for ``κ < 0`` it increases on ``(-1, 0)`` from a
        negative to a positive value. Either way there is one root in the bracket, so
        opposite signs of ``F`` at ``q - ε`` and ``q + ε`` enclose it. Exact at
        ``κ = 0`` and ``κ = 1``.
        """
        if self.is_schwarzschild:
            return arb(0)
        if self.is_extremal:
            with ctx.workprec(bits + 20):
                return arb(fmpq(1, self.exponent - 1))
        # F' vanishes like sqrt(1-κ) at the extremal end, so half of the bits of 1-κ are lost there.
        distance = 1 - self.coupling
        lost = max(0, distance.denominator.bit_length() - distance.numerator.bit_length() + 2)
        with ctx.workprec(2 * bits + 2 * lost + 64):
            return self._enclose(bits)

    def _enclose(self, bits: int) -> arb:
        n = self.exponent
        slope = 2 * arb(to_fmpq(self.c_n * self.coupling))

        def value(q: arb) -> arb:
            return q - slope * ((1 + q) / 2) ** n

        low, high = (arb(0), arb(fmpq(1, n - 1))) if self.coupling > 0 else (arb(-1), arb(0))
        # Newton from the side on which F'' keeps it monotone never leaves the bracket:
        # F is concave for κ > 0 (start at the low end) and convex for κ < 0 (start at the high end).
        q = low if self.coupling > 0 else high
        for _ in range(20 * bits):
            step = value(q) / (1 - slope * n / 2 * ((1 + q) / 2) ** (n - 1))
            q = (q - step).mid()
            if bool(abs(step) < abs(q) * arb(2) ** (-bits - 8)):
                break
        margin = (abs(q) * arb(2) ** (-bits - 2)).upper()
        below, above = (q - margin).mid(), (q + margin).mid()
        if not (bool(value(below) < 0) and bool(value(above) > 0) and bool(below > low) and bool(above < high)):
            raise ArithmeticError(f"q of exponent {n}, coupling {self.coupling} could not be enclosed to {bits} bits")
        return below.union(above)

    def f(self, bits: int) -> list[Any]:
        """Coefficients of ``f(u) = 1 - (1+q) u + q u^n`` as balls, lowest power first."""
        q = self.q(bits)
        with ctx.workprec(bits + 20):
            coefficients = [arb(0)] * (self.exponent + 1)
            coefficients[0] = arb(1)
            coefficients[1] = -(1 + q)
            coefficients[self.exponent] = coefficients[self.exponent] + q
            return coefficients
