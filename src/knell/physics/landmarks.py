"""Landmarks of a background: horizon, surface gravity, light ring, the window of the search.

All are dimensionless (units of M, the ADM mass) and computed in balls, so that they are
the same doubles on every processor.
"""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from math import ceil

import numpy as np
from flint import arb, ctx

from knell.physics import polynomial
from knell.physics.background import PowerLaw

_BITS = 128


@dataclass(frozen=True)
class LightRing:
    """``radius`` r_c/M, ``frequency`` M Ω_c and ``exponent`` M λ_c of the unstable circular null orbit.

    ``Ω_c = √f_c / r_c``, ``λ_c² = f_c (2 f_c - r_c² f_c'')/(2 r_c²)``
    (V. Cardoso et al., Phys. Rev. D 79, 064016, 2009).
    """

    radius: float
    frequency: float
    exponent: float


def horizon_radius(background: PowerLaw) -> float:
    """``r_h/M = 2/(1+q)``."""
    f = background.f(_BITS)
    with ctx.workprec(_BITS):
        return float(-2 / f[1])


def surface_gravity(background: PowerLaw) -> float:
    """``M κ_s = (M/r_h) |f_u(1)|/2``; exactly zero at the extremal end."""
    if background.is_extremal:
        return 0.0
    f = background.f(_BITS)
    with ctx.workprec(_BITS):
        return float(-f[1] / 2 * abs(polynomial.evaluate(polynomial.derivative(f), arb(1))) / 2)


def light_ring(background: PowerLaw) -> LightRing:
    """The light ring outside the horizon: ``2f + u f_u = 0``, the root nearest to infinity.

    Raises `ArithmeticError` if there is none in ``0 < u < 1``.
    """
    f = background.f(_BITS)
    with ctx.workprec(_BITS):
        condition = [(2 + k) * x for k, x in enumerate(f)]
        roots = np.roots([float(x) for x in reversed(condition)])
        inside = sorted(z.real for z in roots if abs(z.imag) < 1e-9 and 1e-9 < z.real < 1 - 1e-9)
        if not inside:
            raise ArithmeticError("no light ring outside the horizon")
        slope = polynomial.derivative(condition)
        u = arb(inside[0])
        for _ in range(8):
            u = (u - polynomial.evaluate(condition, u) / polynomial.evaluate(slope, u)).mid()
        f_u = polynomial.derivative(f)
        value, first = polynomial.evaluate(f, u), polynomial.evaluate(f_u, u)
        second = polynomial.evaluate(polynomial.derivative(f_u), u)
        # r² f_rr = u² f_uu + 2u f_u
        curvature = u * u * second + 2 * u * first
        mass = -f[1] / 2
        return LightRing(
            radius=float(1 / (u * mass)),
            frequency=float(mass * u * value.sqrt()),
            exponent=float(mass * u * (value * (2 * value - curvature) / 2).sqrt()),
        )


@dataclass(frozen=True)
class Window:
    """``0 < Re Mω <= re_max``, ``-depth <= Im Mω <= 0``, less the square of half-side ``excluded`` about 0."""

    re_max: Fraction
    depth: Fraction
    excluded: Fraction = Fraction(1, 10)


def window(background: PowerLaw, ell: int, depth: Fraction = Fraction(3, 2)) -> Window:
    """The standard window: ``re_max = 1.2 MΩ_c (ℓ+1/2) + 0.1``, rounded up to two decimals."""
    edge = 1.2 * light_ring(background).frequency * (ell + 0.5) + 0.1
    return Window(Fraction(ceil(100 * edge - 1e-9), 100), depth)
