"""One straight segment of the path: the equation scaled to ``ξ ∈ [0, 1]`` and its suprema.

With ``x = x_c + hξ`` (``h`` complex and exact) the local equation of `physics.equation.local`
becomes, after multiplication by ``h²``,

    (P φ')' + 2σκ φ' + (σκ' - σ²q - w) φ = 0,
    P(ξ) = p(x),   κ(ξ) = h K(x),   q(ξ) = h² Q(x),   w(ξ) = h² W(x),

so that every lemma is needed for the unit segment alone. At a singular end ``x_c = 0``,
``κ(0) = -h`` and ``P(0) = 0`` hold exactly, and ``P'(0) = 0`` where the end is irregular.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import cached_property
from typing import Any

from flint import acb, acb_poly, arb

from knell.methods.enclosure.lemmas import Piece
from knell.methods.enclosure.refusal import BadStructure, LostPrecision
from knell.methods.enclosure.taylor import exact_point, lower, upper

PIECES = 16


@dataclass(frozen=True)
class Segment:
    """Coefficients of ``P``, ``κ``, ``q``, ``w`` in ``ξ``, lowest power first."""

    P: tuple[acb, ...]
    kappa: tuple[acb, ...]
    q: tuple[acb, ...]
    w: tuple[acb, ...]

    @classmethod
    def at_singular_end(cls, side: Any, h: acb) -> Segment:
        """The segment from ``x = 0`` to ``x = h``; structural zeros stay exact zeros."""
        powers = [acb(1)]
        for _ in range(max(len(side.p), len(side.K) + 1, len(side.Q) + 2, len(side.W) + 2)):
            powers.append(powers[-1] * h)
        scaled = [
            tuple(c * powers[i + extra] for i, c in enumerate(part))
            for part, extra in ((side.p, 0), (side.K, 1), (side.Q, 2), (side.W, 2))
        ]
        return cls(*scaled)

    @classmethod
    def at_ordinary_point(cls, side: Any, centre: acb, h: acb) -> Segment:
        """The segment from ``x = centre`` to ``x = centre + h``."""
        line = acb_poly([centre, h])
        parts = (acb_poly(list(side.p))(line), acb_poly(list(side.K))(line) * h)
        rest = (acb_poly(list(side.Q))(line) * (h * h), acb_poly(list(side.W))(line) * (h * h))
        return cls(*(tuple(part.coeffs()) for part in (*parts, *rest)))

    @cached_property
    def length(self) -> int:
        """Largest shift of the recurrence."""
        return max(len(self.P) - 1, len(self.kappa), len(self.q) + 1, len(self.w) + 1)


def covering(pieces: int) -> list[acb]:
    """Balls whose union is ``[0, 1]``, end points included."""
    half = arb(1) / (2 * pieces)
    return [acb(arb((2 * i + 1) * half.mid(), half)) for i in range(pieces)]


def supremum(values: Sequence[arb]) -> arb:
    """The largest of exact upper bounds."""
    largest = values[0]
    for value in values[1:]:
        if bool(value > largest):
            largest = value
    return largest


def infimum(values: Sequence[arb]) -> arb:
    """The smallest of exact lower bounds."""
    smallest = values[0]
    for value in values[1:]:
        if bool(value < smallest):
            smallest = value
    return smallest


def _potential(segment: Segment, sigma: acb) -> Callable[[acb], acb]:
    slope = acb_poly(list(segment.kappa)).derivative()
    q, w = acb_poly(list(segment.q)), acb_poly(list(segment.w))
    square = sigma * sigma
    return lambda xi: sigma * slope(xi) - square * q(xi) - w(xi)


def ordinary_pieces(segment: Segment, centre: acb, radius: arb, pieces: int = PIECES) -> list[Piece]:
    """What `lemmas.transport` needs of each of the equal pieces of the step, for ``|σ - centre| <= radius``.

    Raises `BadStructure` when ``P`` may vanish on the step.
    """
    P, kappa, q, w = (acb_poly(list(part)) for part in (segment.P, segment.kappa, segment.q, segment.w))
    p_slope, kappa_slope, square = P.derivative(), kappa.derivative(), centre * centre
    found = []
    for xi in covering(pieces):
        p = P(xi)
        least = lower(p)
        if not bool(least > 0):
            raise BadStructure("p may vanish on an ordinary step: shorten it or move the path")
        k, k_slope, q_here = kappa(xi), kappa_slope(xi), q(xi)
        b0, b1 = (2 * centre * k + p_slope(xi)) / p, 2 * radius * k / p
        c0 = (centre * k_slope - square * q_here - w(xi)) / p
        c1, c2 = radius * (k_slope - 2 * centre * q_here) / p, -radius * radius * q_here / p
        slow, bend = slow_exponent(b0, b1, c0, c1)
        fast, fast_bend = b0 + slow, b1 + bend
        parts = (fast * slow + c0, fast * bend + fast_bend * slow + c1, fast_bend * bend + c2)
        coupling = sum((upper(part) for part in parts), arb(0)).upper()
        rate = ((-fast.real).upper() + upper(fast_bend)).upper()
        if not rate.is_finite():
            raise LostPrecision("a growth rate is not finite: raise the precision")
        found.append(Piece(slow, bend, rate, coupling, least))
    return found


def slow_exponent(b0: acb, b1: acb, c0: acb, c1: acb) -> tuple[acb, acb]:
    """The root nearer to 0 of ``λ² + Bλ + C/P = 0`` and its slope in ``τ``, at the midpoints, as exact doubles."""
    b, b_bend, c, c_bend = (complex(x.mid()) for x in (b0, b1, c0, c1))
    root = (b * b - 4 * c) ** 0.5
    larger = (-b - root) / 2 if abs(-b - root) > abs(-b + root) else (-b + root) / 2
    slow = c / larger if larger else 0j
    steep = b + 2 * slow
    return exact_point(slow), exact_point(-(b_bend * slow + c_bend) / steep if steep else 0j)


def singular_suprema(
    segment: Segment, sigma: acb, order_of_zero: int, pieces: int = PIECES
) -> tuple[arb, arb, arb, arb]:
    """For ``P = ξ^z G``, ``z`` = ``order_of_zero`` (1 regular, 2 irregular): bounds over segment and σ ball.

    Returns ``α₊ = max(0, sup Re(-2σκ/G))``, ``γ = inf Re(2σκ/G)`` (a lower bound, of either sign),
    ``c = sup|C|`` and ``inf|G|``. Raises `BadStructure` when ``P`` lacks its zero at the end
    or has more of them.
    """
    if len(segment.P) <= order_of_zero or any(not x.is_zero() for x in segment.P[:order_of_zero]):
        raise BadStructure("p lacks its structural zero at the singular end")
    G, kappa = acb_poly(list(segment.P[order_of_zero:])), acb_poly(list(segment.kappa))
    potential = _potential(segment, sigma)
    rates, c, least = [], [], []
    for xi in covering(pieces):
        g = G(xi)
        floor = lower(g)
        if not bool(floor > 0):
            raise BadStructure("p/x^z may vanish on the first segment: shorten it or move the path")
        least.append(floor)
        rate = (2 * sigma * kappa(xi) / g).real
        if not rate.is_finite():
            raise LostPrecision("a rate is not finite: raise the precision")
        rates.append(rate)
        c.append(upper(potential(xi)))
    alpha = supremum([arb(0), *[(-rate).upper() for rate in rates]])
    gamma = infimum([rate.lower() for rate in rates])
    return alpha, gamma, supremum(c), infimum(least)
