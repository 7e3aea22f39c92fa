"""``D(σ)``: both physical solutions carried to ``u_m`` and compared, with the bound of the error."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from flint import arb

from knell.methods.enclosure.path import check_homotopy, exact_vertices
from knell.methods.enclosure.problem import Problem, Side, side
from knell.methods.enclosure.refusal import InexactVertex
from knell.methods.enclosure.segment import Segment
from knell.methods.enclosure.series import Cut, Ring, State, ordinary_step, singular_start


@dataclass(frozen=True)
class Route:
    """One side's way: vertices in ``x`` (doubles, the last of them ``x_m``) and, once run, the order of each series."""

    vertices: tuple[complex, ...]
    orders: tuple[int, ...] | None = None


@dataclass(frozen=True)
class Carried:
    """A side's solution at ``u_m`` with its slope in ``x``, and the route with the orders used."""

    state: State
    route: Route


def carry(side_: Side, ring: Ring, route: Route, tolerance: arb, cleared: Sequence[int] = ()) -> Carried:
    """The solution of one singular end at the match point, along the vertices of ``route``."""
    points = exact_vertices(route.vertices, side_.at_horizon)
    orders = route.orders or (None,) * len(points)
    here = points[0]
    cut = Cut(tolerance, orders[0])
    state = singular_start(Segment.at_singular_end(side_, here), ring, cut, side_.irregular, cleared)
    used, state = [state.order], settle(ring, state.scaled(1 / here))
    for there, order in zip(points[1:], orders[1:], strict=True):
        h = there - here
        if not h.is_exact():
            raise InexactVertex("a step of the path is not an exact number: raise the precision")
        segment = Segment.at_ordinary_point(side_, here, h)
        state = ordinary_step(segment, ring, settle(ring, state.scaled(h)), Cut(tolerance, order))
        used.append(state.order)
        here, state = there, settle(ring, state.scaled(1 / h))
    return Carried(state, Route(tuple(route.vertices), tuple(used)))


def settle(ring: Ring, state: State) -> State:
    """The same state with the rounding of its slope moved into the error."""
    slope, radius = ring.split(state.slope)
    return State(state.value, slope, state.value_error, (state.slope_error + radius).upper(), state.order)


@dataclass(frozen=True)
class Mismatch:
    """``D`` as an exact number (or polynomial in ``τ``), the bound ``η`` of its error, and the routes."""

    value: Any
    error: arb
    infinity: Route
    horizon: Route


def mismatch(
    problem: Problem,
    ring: Ring,
    bits: int,
    routes: tuple[Route, Route],
    tolerances: tuple[arb, arb],
    cleared: Sequence[int] = (),
) -> Mismatch:
    """``D = φ_∞ φ_h' - φ_∞' φ_h`` at ``u_m`` (primes d/du), the horizon side cleared of ``J`` = ``cleared``.

    Must run inside ``ctx.workprec(bits)``. Raises a `Refusal` when anything is not proven.
    """
    ends = (side(problem, bits, False), side(problem, bits, True))
    points = [exact_vertices(route.vertices, end.at_horizon) for route, end in zip(routes, ends, strict=True)]
    check_homotopy(problem.equation(bits), points[0], points[1], ring.disc)
    out = carry(ends[0], ring, routes[0], tolerances[0])
    inward = carry(ends[1], ring, routes[1], tolerances[1], cleared)
    a, b = out.state, inward.state
    # d/du = -d/dx on the horizon side.
    value, excess = ring.cut(-(a.value * b.slope + a.slope * b.value))
    value, radius = ring.split(value)
    norm = ring.norm
    error = excess + radius
    error += norm(a.value) * b.slope_error + a.value_error * (norm(b.slope) + b.slope_error)
    error += norm(a.slope) * b.value_error + a.slope_error * (norm(b.value) + b.value_error)
    return Mismatch(value, error.upper(), out.route, inward.route)
