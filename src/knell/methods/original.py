"""The original wave equation ``d²Ψ/dr*² + (ω² - V) Ψ = 0`` in the areal radius, from the mass function.

Units are the ADM mass, ``M = 1``. The metric is ``f = 1 - 2m/r`` with the mass function
``m(r) = 1 - k r^(1-n)``, ``k = κ c_n``, and ``dr* = dr/f``. With ``f' = 2m/r² - 2m'/r`` inserted, so
that only ``m`` and ``m'`` appear, ``V = f U`` where

    axial            U = ℓ(ℓ+1)/r² - 6m/r³ + 2m'/r²     from V = (ℓ-1)(ℓ+2) f/r² + r d²(1/r)/dr*²
    electromagnetic  U = ℓ(ℓ+1)/r²
    scalar           U = ℓ(ℓ+1)/r² + 2m/r³ - 2m'/r²     from V = ℓ(ℓ+1) f/r² + (1/r) d²r/dr*²

Nothing is shared with the regularised equation, so the methods built on this module check that
derivation as well as its solvers.
"""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from typing import Any

from flint import acb, ctx, fmpq, fmpq_poly

from knell.physics.background import PowerLaw

# (lowest ℓ, weight of m/r³, weight of m'/r²) in U
_FIELDS = {"axial": (2, -6, 2), "electromagnetic": (1, 0, 0), "scalar": (0, 2, -2)}


@dataclass(frozen=True)
class OriginalEquation:
    """``m = 1 - k r^(1-n)`` and ``U = angular/r² + mass_weight m/r³ + slope_weight m'/r²``, all exact.

    ``exponent`` is ``n`` and ``deformation`` is ``k``; Schwarzschild is ``n = 1, k = 0``.
    """

    exponent: int
    deformation: Fraction
    angular: Fraction
    mass_weight: Fraction
    slope_weight: Fraction

    def mass(self, r: Any) -> Any:
        """``m(r)`` for floats and arrays."""
        return 1 - float(self.deformation) * r ** (1 - self.exponent)

    def f(self, r: Any) -> Any:
        """``f(r) = 1 - 2m/r`` for floats and arrays; it cancels at the horizon, `Tortoise.f` does not."""
        return 1 - 2 * self.mass(r) / r

    def potential_over_f(self, r: Any) -> Any:
        """``U(r) = V/f`` for floats and arrays."""
        slope = (self.exponent - 1) * float(self.deformation) * r**-self.exponent
        weighted = float(self.mass_weight) * self.mass(r) / r + float(self.slope_weight) * slope
        return (float(self.angular) + weighted) / r**2

    @property
    def horizon_polynomial(self) -> fmpq_poly:
        """``g = r^n f = r^n - 2 r^(n-1) + 2k``."""
        return self._power(self.exponent) - 2 * self._power(self.exponent - 1) + 2 * _rational(self.deformation)

    @property
    def slope_polynomial(self) -> fmpq_poly:
        """``r^(n+1) f' = 2 r^(n-1) - 2nk``."""
        return 2 * self._power(self.exponent - 1) - 2 * self.exponent * _rational(self.deformation)

    @property
    def potential_polynomial(self) -> fmpq_poly:
        """``r^(n+2) U``."""
        n, k = self.exponent, self.deformation
        constant = -self.mass_weight * k + self.slope_weight * (n - 1) * k
        return (
            _rational(self.angular) * self._power(n)
            + _rational(self.mass_weight) * self._power(n - 1)
            + _rational(constant)
        )

    def _power(self, k: int) -> fmpq_poly:
        return fmpq_poly([0] * k + [1])


@dataclass(frozen=True)
class HorizonRoots:
    """The roots of ``g = r^n f``: the outermost positive one and the others (balls, with multiplicity)."""

    horizon: Any
    degenerate: bool
    others: tuple[Any, ...]


def original_equation(background: PowerLaw, field: str, ell: int) -> OriginalEquation:
    """The equation of a background, field and ``ℓ``; raises `ValueError` for an unknown field or too low an ``ℓ``."""
    if field not in _FIELDS:
        raise ValueError(f"field {field!r}: must be one of {', '.join(_FIELDS)}")
    lowest, mass_weight, slope_weight = _FIELDS[field]
    if ell < lowest:
        raise ValueError(f"ell {ell} for the {field} field: must be {lowest} or more")
    return OriginalEquation(
        exponent=1 if background.is_schwarzschild else background.exponent,
        deformation=background.coupling * background.c_n,
        angular=Fraction(ell * (ell + 1)),
        mass_weight=Fraction(mass_weight),
        slope_weight=Fraction(slope_weight),
    )


def horizon_roots(equation: OriginalEquation, bits: int) -> HorizonRoots:
    """All roots of ``g`` as certified balls of about ``bits`` bits; multiplicities are exact.

    Raises `ArithmeticError` when ``g`` has no positive root.
    """
    with ctx.workprec(bits):
        roots = [(acb(root), multiplicity) for root, multiplicity in equation.horizon_polynomial.complex_roots()]
    positive = [pair for pair in roots if pair[0].imag == 0 and bool(pair[0].real > 0)]
    if not positive:
        raise ArithmeticError("f has no positive root: there is no horizon")
    horizon, multiplicity = max(positive, key=lambda pair: float(pair[0].real))
    others = tuple(root for root, count in roots if root is not horizon for _ in range(count))
    return HorizonRoots(horizon, multiplicity > 1, others)


def _rational(value: Fraction) -> fmpq:
    return fmpq(value.numerator, value.denominator)
