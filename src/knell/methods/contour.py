"""Contours from infinity to the horizon for expansions in one disc, and the equation on them.

A contour is the diameter ``y ∈ [-1, 1]`` of the unit disc under the rational map of degree two

    u = kα / (kα + β),    α = (1-y)(1-ey),   β = (1+y)(1+ey),   e = (1-s)/(1+s),

infinity ``u = 0`` at ``y = 1`` and the horizon ``u = 1`` at ``y = -1``. In the parameter ``z = (1-y)/2`` of the path

    far = du/dz at infinity = ks,      near = du/dz at the horizon = s/k.

A negative argument of ``far`` lets ``r`` run to infinity with positive argument. ``far = near = 1`` is the
straight real path. ``s = 1`` is the arc, a Möbius map: its ends turn in opposite senses. ``k = 1`` is the S-shape,
whose ends turn in the same sense. Moduli below 1 slow the path down at an end, which makes the expansion converge
faster there.

The arc ``|k| = 1`` covers the same disc of the u-plane as the straight path with complex expansion point, but
expands about the disc's conformal centre; the S-shape does what the cubic ``u = z + (s-1) z(1-z)(1-2z)`` does, with
its extra preimages of 0 and 1 farther away. *Measured*, axial ℓ = 2, digits of overtones 0 / 2 / 4 at depth 200, the
best of ten expansion points, of sixteen cubics, and what `knell.methods.contour_choice` takes:

    n, κ       straight            cubic               rational
    κ = 0      16 / 12 / 10        25 / 18 / 14        28 / 24 / 27
    4, 0.75    16 / 10 /  8        25 / 17 / 11        28 / 29 / 24
    4, 0.9     16 / 10 /  6        25 / 16 /  9        30 / 24 / 17
    4, 1       18 / 10 /  5        32 / 25 / 18        30 / 28 / 26
    6, 0.9     16 / 10 /  5        25 / 15 /  8        24 / 17 / 12

The maps are rational; the equation on them is polynomial all the same (multiply through), of degree ``n + 4`` on an
arc and ``2n + 10`` on others, against ``n + 2`` on the straight path and ``3n + 8`` on the cubic.

Expanding about ``y = 0`` selects the wanted solution when ``y = ±1`` are nearer than every other singular point of
the equation in y: the images of the other roots of ``f`` and of ``u = ∞`` (two each, one on an arc). The second
preimages ``±1/e`` of the ends, and the zeros ``y² = 1/e`` of ``u'``, where the coefficients but not the solutions
have poles, lie outside the disc for every ``s`` with a positive real part.
"""

from __future__ import annotations

import cmath
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from knell.methods.match.geometry import other_roots
from knell.physics import polynomial
from knell.physics.equation import Equation

_SAMPLES = 64


@dataclass(frozen=True)
class Contour:
    """The map above, given by its ``k`` and ``s``; raises `ValueError` unless both have a positive real part."""

    k: complex = 1 + 0j
    s: complex = 1 + 0j

    def __post_init__(self) -> None:
        if not (complex(self.k).real > 0 and complex(self.s).real > 0):
            raise ValueError(f"contour k = {self.k}, s = {self.s}: both need a positive real part")

    @classmethod
    def turned(cls, k: float, k_degrees: float, s: float = 1.0, s_degrees: float = 0.0) -> Contour:
        """From moduli and clockwise angles: ``k e^(-i k_degrees)``, ``s e^(-i s_degrees)``."""
        return cls(
            *(m * cmath.exp(-1j * np.pi * d / 180) if d else complex(m) for m, d in ((k, k_degrees), (s, s_degrees)))
        )

    @property
    def far(self) -> complex:
        """``du/dz`` at infinity."""
        return self.k * self.s

    @property
    def near(self) -> complex:
        """``du/dz`` at the horizon."""
        return self.s / self.k

    @property
    def tilt(self) -> float:
        """Clockwise angle of the path at infinity in radians: ``-arg far``."""
        return -cmath.phase(self.k) - cmath.phase(self.s)

    @property
    def is_arc(self) -> bool:
        """``s = 1``: the map has degree one, and the recurrence is shorter."""
        return self.s == 1

    @property
    def e(self) -> complex:
        return (1 - self.s) / (1 + self.s)

    def at(self, y: Any) -> Any:
        """``u(y)``."""
        alpha, beta = self.k * (1 - y) * (1 - self.e * y), (1 + y) * (1 + self.e * y)
        return alpha / (alpha + beta)


@dataclass(frozen=True)
class PulledBack:
    """``P φ_yy + (R0 + σ R1) φ_y + (S0 + σ S1 + σ² S2) φ = 0``, coefficients in ``y``, lowest power first."""

    P: tuple[Any, ...]
    R: tuple[tuple[Any, ...], tuple[Any, ...]]
    S: tuple[tuple[Any, ...], tuple[Any, ...], tuple[Any, ...]]


def pull_back(equation: Equation, contour: Contour, number: Callable[[Any], Any] = complex) -> PulledBack:
    """The equation in ``y``; ``number`` makes the complex type of the result of a coefficient or a Python complex.

    With ``u = A/B``, ``u' = cv/B²``, ``v = 1 - ey²``, and ``ĝ = B^deg g(A/B)`` for every coefficient ``g``:

        p̂ B² v φ'' + [p̂ B (2B'v - Bv') + c ĝ B v²] φ' + c² v³ Ĉ φ = 0,    g = 2σH + p',  C = σH' - σ²Q - W,

    where ``p``, ``g`` and ``C`` have the degrees ``n+2``, ``n+1`` and ``n``.
    """
    equation = equation.map(number)
    degree = len(equation.f) - 1
    one, k, s = number(1), number(contour.k), number(contour.s)
    e = (1 - s) / (1 + s)
    if contour.is_arc:
        A, B, v = [k, -k], [k + 1, 1 - k], [one]
        c = -2 * k
    else:
        A = [k, -k * (1 + e), k * e]
        B = [k + 1, (1 - k) * (1 + e), (k + 1) * e]
        v = [one, 0 * one, -e]
        c = -2 * k * (1 + e)
    powers = [[one]]
    for _ in range(degree + 2):
        powers.append(polynomial.multiply(powers[-1], B))

    def hat(g: Sequence[Any], order: int) -> list[Any]:
        """``B^order g(A/B)`` by Horner's rule; ``g`` is padded to the order."""
        padded = [*g, *[0 * one] * (order + 1 - len(g))]
        value = [padded[order]]
        for j in range(order - 1, -1, -1):
            value = polynomial.add(polynomial.multiply(value, A), polynomial.scale(powers[order - j], padded[j]))
        return value

    v2 = polynomial.multiply(v, v)
    cv2 = polynomial.scale(polynomial.multiply(B, v2), c)
    ccv3 = polynomial.scale(polynomial.multiply(v2, v), c * c)
    pB = polynomial.multiply(hat(equation.p, degree + 2), B)
    turn = polynomial.scale(polynomial.multiply(polynomial.derivative(B), v), 2)
    if not contour.is_arc:
        turn = polynomial.add(turn, polynomial.scale(polynomial.multiply(B, polynomial.derivative(v)), -1))
    slope_p, slope_H = polynomial.derivative(equation.p), polynomial.derivative(equation.H)
    return PulledBack(
        P=tuple(polynomial.multiply(pB, polynomial.multiply(B, v))),
        R=(
            tuple(polynomial.add(polynomial.multiply(pB, turn), polynomial.multiply(hat(slope_p, degree + 1), cv2))),
            tuple(polynomial.scale(polynomial.multiply(hat(equation.H, degree + 1), cv2), 2)),
        ),
        S=(
            tuple(polynomial.scale(polynomial.multiply(hat(equation.W, degree), ccv3), -1)),
            tuple(polynomial.multiply(hat(slope_H, degree), ccv3)),
            tuple(polynomial.scale(polynomial.multiply(hat(equation.Q, degree), ccv3), -1)),
        ),
    )


def images(roots: Any, k: Any, s: Any) -> tuple[Any, Any]:
    """The nearer preimage ``y`` of each of ``roots`` (last axis) and of ``u = ∞``, for arrays ``k``, ``s`` of contours.

    ``ρ = u / (k(1-u))`` and ``e (1-ρ) y² - (1+e)(1+ρ) y + (1-ρ) = 0``; the two preimages multiply to ``1/e``.
    """
    k, s = np.asarray(k, dtype=complex)[..., None], np.asarray(s, dtype=complex)[..., None]
    e = (1 - s) / (1 + s)
    u = np.asarray(roots, dtype=complex)

    def nearer(over: Any, under: Any) -> Any:
        """The smaller root for ``ρ = over/under``."""
        half, minus = (1 + e) * (under + over) / 2, under - over
        root = np.sqrt(half * half - e * minus * minus)
        total = np.where(np.abs(half + root) > np.abs(half - root), half + root, half - root)
        with np.errstate(divide="ignore", invalid="ignore"):
            return np.where(total == 0, np.inf, minus / np.where(total == 0, 1, total))

    return nearer(u, k * (1 - u)), nearer(1, -k)[..., 0]


def obstacle(equation: Equation, contour: Contour) -> str:
    """Why the contour does not select the wanted solution, in words; empty when it does.

    Every singular point but the two ends has to lie outside the unit disc of ``y``, and no root of ``f`` between the
    contour and the real segment on which the boundary conditions are posed.
    """
    roots = other_roots(equation)
    at_roots, at_infinity = images(roots, contour.k, contour.s)
    for u, y in [*zip(roots, at_roots, strict=True), (np.inf, at_infinity)]:
        if not abs(y) > 1:
            name = "r = 0" if np.isinf(u) else f"the root {u:.4g} of f"
            return f"{name} lies at {abs(y):.3f} of the distance of infinity and horizon from the expansion point"
    path = contour.at(np.linspace(1, -1, _SAMPLES + 2)[1:-1])
    loop = np.concatenate([[0], path, [1]])
    for u in roots:
        # From 0 to 1 along the contour and back along the real segment.
        along = np.angle((loop[1:] - u) / (loop[:-1] - u)).sum()
        if abs(along - np.angle((1 - u) / (0 - u))) > 1:
            return f"the root {u:.4g} of f lies between the contour and the real segment"
    return ""
