"""Paths in the complex plane of the areal radius for the direct integration.

Both are logarithmic spirals cut into Taylor steps: the outer one about ``r = 0``, from far out on the ray
``arg r = π/2 - arg ω`` inwards; the inner one about ``r_h``, outwards. Along them the wanted solution gains on
the other one wherever the geometry allows it, and the bits it loses elsewhere are estimated beforehand.
"""

from __future__ import annotations

import cmath
import math
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

from knell.methods.original import HorizonRoots

_SAMPLES = 400


class PathError(ValueError):
    """The roots of ``f`` do not allow the path; the message says why."""


@dataclass(frozen=True)
class Route:
    """The choices that must not matter to the answer.

    ``tilt`` turns the recessive rays; ``stretch`` is the outer start in units of the radius at which the
    tail series just reaches the precision (and its inverse the inner start at a degenerate horizon); ``entry``
    the inner start over the convergence radius; ``ratio`` a Taylor step over the distance to the nearest
    singular point; ``meeting`` is ``log((r_m - r_h)/r_h)`` of the matching point.
    """

    tilt: float
    stretch: float
    entry: float
    ratio: float
    meeting: complex


@dataclass(frozen=True)
class Spiral:
    """``centre + exp(knot)`` for each knot; the first is where the series is summed."""

    knots: tuple[complex, ...]


@dataclass(frozen=True)
class Paths:
    """The two spirals (about ``0`` and about ``r_h``) and the bits that the inner solution loses on its way."""

    outer: Spiral
    inner: Spiral
    lost_bits: int


@dataclass(frozen=True)
class Geometry:
    """The singular points in doubles: horizon, the other roots of ``f``, and ``F₀ = f''(r_h)/2`` where degenerate."""

    horizon: float
    others: tuple[complex, ...]
    exponent: int
    degenerate: bool

    @classmethod
    def of(cls, roots: HorizonRoots, exponent: int) -> Geometry:
        """Raises `PathError` when another root lies as far out as the horizon, where the outer path runs."""
        horizon = float(roots.horizon.real)
        others = tuple(complex(root) for root in roots.others)
        if any(abs(root) >= horizon for root in others):
            raise PathError("a root of f other than the horizon lies outside |r| = r_h, where the outer path runs")
        return cls(horizon, others, exponent, roots.degenerate)

    def f(self, r: complex) -> complex:
        value = (r - self.horizon) ** (2 if self.degenerate else 1) / r**self.exponent
        for root in self.others:
            value *= r - root
        return value

    @property
    def curvature(self) -> float:
        """``f''(r_h)/2`` of a degenerate horizon."""
        value = complex(self.horizon**-self.exponent)
        for root in self.others:
            value *= self.horizon - root
        return value.real

    def distance(self, r: complex) -> float:
        """Distance from ``r`` to the nearest singular point, ``r = 0`` included."""
        return min(abs(r), abs(r - self.horizon), *(abs(r - root) for root in self.others), math.inf)

    @property
    def horizon_radius_of_convergence(self) -> float:
        return min(self.horizon, *(abs(self.horizon - root) for root in self.others), math.inf)


def paths(geometry: Geometry, omega: complex, bits: int, route: Route) -> Paths:
    """Both paths for frequencies near ``omega``; raises `PathError` when the inner one would wind about a root."""
    radius = max(_reach(bits, route) / (2 * abs(omega)), 6 * geometry.horizon)
    meeting = geometry.horizon * (1 + cmath.exp(route.meeting))
    far = complex(math.log(radius), math.pi / 2 - cmath.phase(omega) + route.tilt)
    end = route.meeting + math.log(geometry.horizon)
    near = _inner_start(geometry, omega, bits, route)
    if geometry.degenerate:  # where the formal series must reach the larger precision too
        near = _inner_start(geometry, omega, bits + _lost_bits(geometry, omega, near, end), route)
    _check_winding(geometry, near, end)
    return Paths(
        outer=_cut(geometry, 0.0, far, cmath.log(meeting), route.ratio),
        inner=_cut(geometry, geometry.horizon, near, end, route.ratio),
        lost_bits=_lost_bits(geometry, omega, near, end),
    )


def _reach(bits: int, route: Route) -> float:
    """The exponent ``|2ωr|`` at which a formal series, accurate to ``exp(-|2ωr|)``, is summed."""
    return bits * math.log(2) * route.stretch


def _inner_start(geometry: Geometry, omega: complex, bits: int, route: Route) -> complex:
    limit = route.entry * geometry.horizon_radius_of_convergence
    if not geometry.degenerate:
        return complex(math.log(limit))
    size = min(2 * abs(omega) / (geometry.curvature * _reach(bits, route)), limit)
    return complex(math.log(size), cmath.phase(omega) - math.pi / 2 - route.tilt)


def _cut(geometry: Geometry, centre: float, start: complex, end: complex, ratio: float) -> Spiral:
    """Knots from ``start`` to ``end``, each step at most ``ratio`` of the distance to the nearest singular point."""
    knots, s = [start], 0.0
    while s < 1:
        here = centre + cmath.exp(knots[-1])
        allowed = ratio * geometry.distance(here)
        low, high = s, 1.0
        if abs(centre + cmath.exp(end) - here) > allowed or abs(end - knots[-1]) > 1:
            high = min(1.0, s + 1 / abs(end - start))
            for _ in range(40):
                middle = (low + high) / 2
                inside = abs(centre + cmath.exp(start + middle * (end - start)) - here) <= allowed
                low, high = (middle, high) if inside else (low, middle)
            s = low
        else:
            s = 1.0
        knots.append(start + s * (end - start))
    return Spiral(tuple(knots))


def _samples(centre: float, start: complex, end: complex) -> list[complex]:
    return [centre + cmath.exp(start + (end - start) * i / _SAMPLES) for i in range(_SAMPLES + 1)]


def _check_winding(geometry: Geometry, start: complex, end: complex) -> None:
    """The spiral must be deformable, past no root, into: turn next to the horizon, then straight out.

    The straight part lies in ``Re r > r_h``, where there is no root; so the argument of ``r - root`` must
    change along the spiral as it does from next to the horizon straight to the end.
    """
    spiral = _samples(geometry.horizon, start, end)
    for root in geometry.others:
        change = sum(cmath.phase((b - root) / (a - root)) for a, b in pairwise(spiral))
        first = cmath.phase((spiral[0] - root) / (geometry.horizon - root))
        direct = cmath.phase((spiral[-1] - root) / (geometry.horizon - root))
        if abs(first + change - direct) > 1:
            raise PathError(f"the inner path winds about the root of f at r = {root:.4g} M")


def _lost_bits(geometry: Geometry, omega: complex, start: complex, end: complex) -> int:
    """Bits lost where the ingoing wave falls against the outgoing one, ``|Ψ_in/Ψ_out| ≈ exp(2 Im ω r*)``, and in the
    Frobenius series, whose terms grow to about ``(1 - x/δ)^-|ω/f'(r_h)|``, ``δ`` its radius of convergence."""
    points = _samples(geometry.horizon, start, end)
    lost = _largest_drop(geometry, omega, points)
    if not geometry.degenerate:
        x = math.exp(start.real)
        slope = abs(geometry.f(geometry.horizon + 1e-3 * x)) / (1e-3 * x)
        lost -= abs(omega) / slope * math.log1p(-x / geometry.horizon_radius_of_convergence)
    return math.ceil(lost / math.log(2))


def _largest_drop(geometry: Geometry, omega: complex, points: Sequence[complex]) -> float:
    level = highest = drop = 0.0
    for a, b in pairwise(points):
        level += 2 * (omega * (b - a) / geometry.f((a + b) / 2)).imag
        highest = max(highest, level)
        drop = max(drop, highest - level)
    return drop
