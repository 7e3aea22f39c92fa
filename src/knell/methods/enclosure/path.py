"""Paths: where to go, planned in floats and proven harmless in balls.

A side of the match starts at its singular end (``x = u`` at infinity, ``x = 1 - u`` at the horizon), runs
straight to its first vertex ``x₁`` and from there to ``x_m``. Vertices are doubles, that is exact
numbers; each is the end of one step and the start of the next, and both sides end at the identical ``u_m``.

Directions. At an irregular end the first segment must lie where ``Re(σ/x) < 0``: ``θ = arg x₁`` within
``arg σ - 3π/2 < θ < arg σ - π/2``; ``arg σ - 3π/4`` leaves the least to turn. ``arg σ`` is continuous from π (growing
modes on the imaginary axis, for which the real path ``θ = 0`` is admissible and defines the problem) to
0 (damped modes beside the negative imaginary axis), so ``θ`` is too. From ``x₁`` on a logarithmic spiral
turns and grows at once; turning at fixed ``|x₁|``, or going straight, lets the unwanted solution grow first.

Homotopy. ``D`` is defined on the real segment for growing modes, and by turning the ends for the
others. The path may be deformed into the real segment, ends turning, when

1. from ``x₁`` on, the path of an irregular end does not meet the negative ``x`` axis (so that ``arg x`` is
   the principal one), and ``Im x₁ < 0`` unless ``Re σ <= 0`` on all of the σ disc: in the slit plane the
   condition ``Re(σ/x₁) < 0`` then means the sector above and not its copy 2π away;
2. the closed polygon 0 → … → ``u_m`` → … → 1 → 0 winds about no root of ``f`` other than 1. (At a regular
   horizon ``φ_h`` is analytic, so turning about ``u = 1`` itself does not matter there.)

Both are decided in balls. For the power law with ``0 < q <= 1/(n-1)``, ``f/(1-u) = 1 - q(u + … + u^{n-1})`` has no
root in ``|u| <= 1`` but ``u = 1`` at the extremal end, and for ``-1 < q < 0``
``|(1+q)u + |q|u^n| <= 1`` with equality at ``u = 1`` alone; outside the unit disc roots come close for larger ``n``
(``1.04 + 0.38i`` at ``n = 22``), and a path that winds about one proves zeros of another sheet.
"""

from __future__ import annotations

from cmath import exp, log, phase, pi, rect
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise
from math import log1p
from typing import Any

import numpy as np
from flint import acb, acb_poly, arb

from knell.methods.enclosure.problem import MATCH_POINT, Side
from knell.methods.enclosure.refusal import ForeignPath, InexactVertex, WeakBound
from knell.methods.enclosure.taylor import exact_point, lower
from knell.physics.equation import Equation


@dataclass(frozen=True)
class Stride:
    """How far a step may go: ``reach`` of the distance to the nearest singular point, ``rate`` in ``|2σK/p|h``."""

    reach: float = 0.45
    rate: float = 6.0


@dataclass(frozen=True)
class Ground:
    """Floats of one side, for planning only: coefficients of ``K`` and ``p``, singular points in ``x``, end type."""

    K: tuple[complex, ...]
    p: tuple[complex, ...]
    singular: tuple[complex, ...]
    irregular: bool
    lead: float

    @property
    def gap(self) -> float:
        """Distance from the end to the nearest other singular point."""
        return min((abs(z) for z in self.singular if z != 0), default=1.0)


def ground(side: Side) -> Ground:
    """The floats that planning needs from the balls of a side."""

    def floats(part: Sequence[Any]) -> tuple[complex, ...]:
        return tuple(complex(c) for c in part)

    p, zeros = floats(side.p), 2 if side.irregular else 1
    roots = np.roots([c.real for c in reversed(p[zeros:])])
    singular = (0j, *(complex(z) for z in roots))
    return Ground(floats(side.K), p, singular, side.irregular, p[zeros].real)


def continuous_phase(sigma: complex) -> float:
    """``arg σ`` in ``(-π/2, 3π/2]``: continuous over the damped and the growing half with ``Re ω >= 0`` and beyond."""
    angle = phase(sigma)
    return angle + 2 * pi if angle < -pi / 2 else angle


def first_vertex(land: Ground, sigma: complex, digits: float, x_m: complex) -> complex:
    """Where the series of the singular end is left."""
    if land.irregular:
        size = 2 * abs(sigma) / (2.303 * digits + 10) / land.lead
        return rect(min(size, 0.45 * land.gap, 0.3), continuous_phase(sigma) - 3 * pi / 4)
    if land.gap >= 0.25:
        return rect(min(0.45 * min(1.0, land.gap), abs(x_m)), phase(x_m))
    # The unwanted solution goes like (x/(x+δ))^(2σ/p₁): a far first vertex leaves it less to grow.
    return rect(0.6 * land.gap, max(continuous_phase(sigma) - 3 * pi / 4, -0.78 * pi))


def spiral(land: Ground, sigma: complex, x1: complex, x_m: complex, stride: Stride) -> tuple[complex, ...]:
    """Vertices from ``x₁`` to ``x_m`` along ``log x`` linear, with steps that the lemmas bear."""
    start, turn = log(x1), log(x_m) - log(x1)
    vertices, x, at = [x1], x1, 0.0
    while at < 1:
        reach = stride.reach * min(abs(x - z) for z in land.singular)
        drift = abs(2 * sigma * horner(land.K, x) / horner(land.p, x))
        step = min(reach, stride.rate / drift) if drift > 0 else reach
        # A piece of the spiral of length z in log x has the chord |x| |e^z - 1| <= |x| (e^|z| - 1).
        ahead = log1p(step / abs(x)) / abs(turn) if turn else 1.0
        at = at + ahead
        # A last step of less than half a stride is shared with the one before it.
        if at < 1 < at + 0.5 * ahead:
            at = 0.5 * (at - ahead + 1)
        x = exp(start + at * turn) if at < 1 else x_m
        vertices.append(x)
        if len(vertices) > 3000:
            raise WeakBound("the path needs more than 3000 steps")
    return tuple(vertices)


def plan(land: Ground, at_horizon: bool, sigma: complex, digits: float, stride: Stride) -> tuple[complex, ...]:
    """The vertices of one side in ``x``, the last of them ``x_m``."""
    x_m = 1 - MATCH_POINT if at_horizon else MATCH_POINT
    return spiral(land, sigma, first_vertex(land, sigma, digits, x_m), x_m, stride)


def horner(coefficients: Sequence[complex], x: complex) -> complex:
    """A polynomial in floats, lowest power first."""
    value = 0j
    for c in reversed(coefficients):
        value = value * x + c
    return value


def exact_vertices(vertices: Sequence[complex], at_horizon: bool) -> list[acb]:
    """The vertices as exact numbers; raises `InexactVertex` unless the last is the match point itself."""
    points = [exact_point(complex(v)) for v in vertices]
    if not points or any(not (z.is_exact() and z.is_finite()) for z in points):
        raise InexactVertex("a vertex of the path is not an exact number")
    end = 1 - points[-1] if at_horizon else points[-1]
    if not (end.is_exact() and (end - exact_point(MATCH_POINT)).is_zero()):
        raise InexactVertex("a side does not end at the match point")
    return points


def foreign_roots(equation: Equation) -> list[acb]:
    """Balls that hold the roots of ``f`` other than ``u = 1``, each once."""
    quotient = [acb(c) for c in equation.f]
    for _ in range(2 if equation.degenerate else 1):
        total, lower_ones = acb(0), []
        for c in reversed(quotient[1:]):
            total = total + c
            lower_ones.append(total)
        quotient = lower_ones[::-1]
    while quotient and quotient[-1].is_zero():
        quotient.pop()
    if len(quotient) < 2:
        return []
    try:
        return acb_poly(quotient).roots()
    except ValueError as error:
        raise ForeignPath("the roots of f could not be told apart: raise the precision") from error


def check_homotopy(
    equation: Equation, infinity: Sequence[acb], horizon: Sequence[acb], disc: acb, roots: Sequence[acb] | None = None
) -> None:
    """Raise `ForeignPath` unless both conditions of the module's text hold for every ``σ`` of ``disc``."""
    _check_slit(infinity, disc)
    if equation.degenerate:
        _check_slit(horizon, disc)
    polygon = [acb(0), *infinity, *(1 - x for x in reversed(horizon[:-1])), acb(1)]
    for root in foreign_roots(equation) if roots is None else roots:
        if winding(polygon, root) != 0:
            raise ForeignPath("the path and the real segment enclose a root of f")


def _check_slit(vertices: Sequence[acb], disc: acb) -> None:
    if not (bool(vertices[0].imag < 0) or bool(disc.real <= 0)):
        raise ForeignPath("the first vertex is not below the real axis, as damped modes need")
    for a, b in pairwise(vertices):
        if _crosses_negative_axis(a, b):
            raise ForeignPath("the path meets the cut of an irregular end")
    if _crosses_negative_axis(vertices[0], vertices[0]):
        raise ForeignPath("the path starts on the cut of an irregular end")


def _crosses_negative_axis(a: acb, b: acb) -> bool:
    """Whether the segment may meet ``x <= 0``; False is proven."""
    for side in (lambda z: z.imag > 0, lambda z: z.imag < 0, lambda z: z.real > 0):
        if bool(side(a)) and bool(side(b)):
            return False
    # The ends lie on different sides: the segment passes 0 on the right when a × b has the sign of Im b - Im a.
    cross = a.real * b.imag - a.imag * b.real
    rise = b.imag - a.imag
    return not ((bool(rise > 0) and bool(cross > 0)) or (bool(rise < 0) and bool(cross < 0)))


def winding(polygon: Sequence[acb], point: acb) -> int:
    """Winding number of the closed polygon about every number of the ball ``point``.

    Raises `ForeignPath` when the ball may meet the polygon.
    """
    total = arb(0)
    for a, b in zip(polygon, [*polygon[1:], polygon[0]], strict=True):
        before, after = a - point, b - point
        if not (bool(lower(before) > 0) and bool(lower(after) > 0)):
            raise ForeignPath("a root of f may lie on the path")
        quotient = after / before
        # A straight segment subtends less than π about a point that is not on it.
        if not (bool(quotient.real > 0) or bool(quotient.imag > 0) or bool(quotient.imag < 0)):
            raise ForeignPath("a root of f may lie on the path")
        total += quotient.arg()
    turns = (total / (2 * arb.pi())).unique_fmpz()
    if turns is None:
        raise ForeignPath("the winding number of the path is not resolved")
    return int(turns)
