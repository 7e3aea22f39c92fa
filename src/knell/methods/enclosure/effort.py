"""How hard to try: digits, degree, bits and the routes that go with them. Floats decide here, and only here.

Nothing in this module can make a proof wrong: it chooses paths, orders and precision, which the
lemmas then judge.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import lru_cache
from math import ceil, e, log2, log10

from flint import acb, arb, ctx

from knell.methods.enclosure.mismatch import Mismatch, Route, mismatch
from knell.methods.enclosure.path import Ground, Stride, ground, horner, plan
from knell.methods.enclosure.problem import Problem, side
from knell.methods.enclosure.taylor import Models, Values

_PLANNING_BITS = 100


@dataclass(frozen=True)
class Effort:
    """``digits`` of the truncated series, ``degree`` in ``τ`` (0: a single value), and how far a step goes."""

    digits: float
    degree: int
    stride: Stride


@dataclass(frozen=True)
class Run:
    """Everything that an evaluation of ``D`` needs to be repeated: nothing else enters it.

    ``sigma`` is exact; ``radius`` is that of the σ disc (a double, 0 for a single value); ``tolerances`` of the two
    sides only say where a series may end.
    """

    sigma: acb
    radius: float
    degree: int
    bits: int
    tolerances: tuple[arb, arb]
    cleared: tuple[int, ...]
    infinity: Route
    horizon: Route

    def evaluate(self, problem: Problem) -> tuple[Mismatch, Run]:
        """``D`` along these routes, and the run with the orders it used; raises a `Refusal`."""
        with ctx.workprec(self.bits):
            ring = Models(self.sigma, arb(self.radius), self.degree) if self.radius else Values(self.sigma)
            routes = (self.infinity, self.horizon)
            found = mismatch(problem, ring, self.bits, routes, self.tolerances, self.cleared)
            return found, replace(self, infinity=found.infinity, horizon=found.horizon)


@lru_cache(maxsize=64)
def lands(problem: Problem) -> tuple[Ground, Ground]:
    """The floats of both sides, for planning."""
    with ctx.workprec(_PLANNING_BITS):
        return ground(side(problem, _PLANNING_BITS, False)), ground(side(problem, _PLANNING_BITS, True))


@lru_cache(maxsize=64)
def mass(problem: Problem) -> float:
    """``M/r_h`` to double precision, for planning."""
    return float(problem.equation(_PLANNING_BITS).mass)


def growth(land: Ground, vertices: Sequence[complex], sigma: complex) -> float:
    """The largest natural logarithm by which the unwanted solution may grow on the way to ``u_m``."""
    total = worst = 0.0
    for a, b in zip(reversed(vertices[:-1]), reversed(vertices[1:]), strict=True):
        middle = (a * b) ** 0.5 if (a * b.conjugate()).real > 0 else (a + b) / 2
        middle = middle if (middle * b.conjugate()).real > 0 else -middle
        total += (-2 * sigma * horner(land.K, middle) / horner(land.p, middle) * (b - a)).real
        worst = max(worst, total)
    return worst


def cleared_factors(problem: Problem, sigma: complex, radius: float, reach: float) -> tuple[int, ...]:
    """The ``j >= 1`` with ``|p₁j/2 - σ₀| < reach · R``: poles of the uncleared ``D`` that would spoil the model."""
    land = lands(problem)[1]
    if land.irregular or radius == 0:
        return ()
    spacing = land.lead / 2
    extent = reach * radius
    if extent <= abs(sigma.imag):
        return ()
    half = (extent**2 - sigma.imag**2) ** 0.5
    first, last = ceil((sigma.real - half) / spacing), int((sigma.real + half) / spacing)
    return tuple(j for j in range(max(first, 1), last + 1) if abs(spacing * j - sigma) < extent)


def prepare(problem: Problem, sigma: acb, radius: float, effort: Effort, cleared: tuple[int, ...] = ()) -> Run:
    """A run for the disc of ``radius`` about ``sigma``: routes long enough, digits and bits for what they amplify."""
    z, routes, digits = complex(sigma), [], []
    for land, at_horizon in zip(lands(problem), (False, True), strict=True):
        needed = effort.digits
        if at_horizon and cleared:
            needed += max(0.0, -sum(log10(max(abs(1 - 2 * z / (land.lead * j)), 1e-3)) for j in cleared))
        lost = log10(e) * growth(land, plan(land, at_horizon, z, needed + 3, effort.stride), z)
        vertices = plan(land, at_horizon, z, needed + lost + 3, effort.stride)
        digits.append(needed + log10(e) * growth(land, vertices, z))
        routes.append(Route(vertices))
    bits = 64 + ceil(1.25 * max(digits) * log2(10)) + 4 * effort.degree
    with ctx.workprec(64):
        tolerances = tuple((arb(10) ** (-d)).mid() for d in digits)
    return Run(sigma, radius, effort.degree, bits, tolerances, cleared, routes[0], routes[1])
