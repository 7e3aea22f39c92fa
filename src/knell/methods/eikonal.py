"""Eikonal witness: modes of large ``ℓ`` from the light ring, ``ω ≈ Ω_c L - iλ_c N``, ``L = ℓ+½``, ``N = overtone+½``.

What it leaves out is real and falls like ``1/L``: ``ω = Ω_c L - iλ_c N + a/L + O(L⁻²)``. With the potential
``V = L² v + w + …`` (``v = f/r²``; ``w`` the field's part and ``-v/4``), derivatives in ``r*`` at the peak of ``v``
and the second-order expansion about the peak (S. Iyer, C. Will, Phys. Rev. D 35, 3621, 1987)

    a = [w + λ_c² N² + Λ]/(2Ω_c),    Λ = (v₄/v₂)(1/4 + N²)/8 - (v₃/v₂)² (7 + 60N²)/288.

So the remainder of the leading formula is known to first order, and the corrected value is left with ``O(L⁻²)``.
"""

from __future__ import annotations

from dataclasses import dataclass

from flint import arb, arb_series, ctx

from knell.methods.original import OriginalEquation, original_equation
from knell.physics.background import PowerLaw
from knell.physics.landmarks import LightRing, light_ring

_BITS = 128


@dataclass(frozen=True)
class Eikonal:
    """``leading`` = ``M(Ω_c L - iλ_c N)``; ``corrected`` adds ``a/L``; ``remainder = |a|/L`` estimates what the leading
    formula leaves out (the next order, not a bound)."""

    leading: complex
    corrected: complex
    remainder: float


def eikonal(background: PowerLaw, field: str, ell: int, overtone: int) -> Eikonal:
    """The estimate of ``Mω`` for ``ℓ`` well above the overtone number.

    Raises `ValueError` for an unknown field, too low an ``ℓ`` or a negative overtone number, and `ArithmeticError`
    where there is no light ring.
    """
    if overtone < 0:
        raise ValueError(f"overtone {overtone}: must be 0 or more")
    ring = light_ring(background)
    L, N = ell + 0.5, overtone + 0.5
    leading = complex(ring.frequency * L, -ring.exponent * N)
    shift = correction(original_equation(background, field, ell), ring, N) / L
    return Eikonal(leading, leading + shift, abs(shift))


def correction(equation: OriginalEquation, ring: LightRing, N: float) -> float:
    """The coefficient ``a`` of ``1/L``, in units of 1/M."""
    with ctx.workprec(_BITS):
        v = _peak_derivatives(equation, ring.radius)
        anharmonic = v[4] / v[2] * (0.25 + N**2) / 8 - (v[3] / v[2]) ** 2 * (7 + 60 * N**2) / 288
        r = ring.radius
        field_part = float(equation.f(r) * equation.potential_over_f(r)) - float(equation.angular) * v[0]
        return (field_part - v[0] / 4 + ring.exponent**2 * N**2 + anharmonic) / (2 * ring.frequency)


def _peak_derivatives(equation: OriginalEquation, radius: float) -> list[float]:
    """``v = f/r²`` and its first four derivatives in ``r*`` at the light ring, ``d/dr* = f d/dr``."""
    n = equation.exponent
    with ctx.workprec(_BITS):
        saved = ctx.cap
        ctx.cap = 6
        try:
            r = arb_series([arb(radius), 1])
            k = arb(equation.deformation.numerator) / equation.deformation.denominator
            f = 1 - 2 / r + 2 * k / r**n
            current = f / r**2
            values = [float(current[0])]
            for _ in range(4):
                current = f * current.derivative()
                values.append(float(current[0]))
            return values
        finally:
            ctx.cap = saved
