"""How many zeros of ``D`` a region holds: the winding of ``D`` round its outline.

``D`` stands here for the function with every factor ``w_j = 1 - 2σ/(p₁j)`` cleared that vanishes in the region; it is
analytic there, so the winding is the number of zeros. Each edge is the segment between two exact rationals in
``Mω``, shared by its neighbours; the models of different edges describe the same ``D`` up to factors ``w_j`` that one
cleared and the other did not, whose change of argument along the edge is added.

On an edge ``D`` is a Taylor model ``P(τ) + E``, ``|E| <= η``. A piece of it is accepted when, with ``P = Σ q_i z^i``,
``|z| <= 1`` covering the piece,

    |q₀| > 1.5 (Σ_{i>=1} |q_i| + η).

Then ``D/q₀`` stays in ``|w - 1| < 2/3``, so ``D`` has no zero on the piece and its change of argument is the
difference of the principal arguments of ``D/q₀`` at the ends. The pieces of an edge only serve to find the integer
in ``Δarg = Arg(D(end)/D(start)) + 2πk``: summed up over an outline, their widths would leave no integer."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction
from itertools import pairwise
from math import log10

from flint import acb, acb_poly, arb, ctx

from knell.methods.enclosure.effort import Effort, Run, cleared_factors, lands, mass, prepare
from knell.methods.enclosure.mismatch import Mismatch
from knell.methods.enclosure.path import Stride
from knell.methods.enclosure.printed import ball
from knell.methods.enclosure.problem import Problem
from knell.methods.enclosure.refusal import BadStructure, NoCount, Refusal
from knell.methods.enclosure.region import Corner, Region
from knell.methods.enclosure.taylor import exact_point, upper

_FEWEST, _MOST = 10.0, 60.0
REACH = 4.0
_PIECES = 64
_WIDE = 5.0
_BEYOND = Fraction(4, 5)
_SHORTEST = Fraction(1, 2000)


@dataclass(frozen=True)
class Edge:
    """One edge with its model's run, and ``Δarg D`` along it, the cleared factors included."""

    start: Corner
    end: Corner
    run: Run
    turn: arb


@dataclass(frozen=True)
class Count:
    """``number`` of zeros, with multiplicity, inside the region; ``cleared`` are the factors of ``D``."""

    region: Region
    number: int
    cleared: tuple[int, ...]
    edges: tuple[Edge, ...]


def corner_ball(problem: Problem, corner: Corner, bits: int) -> acb:
    """``σ = i Mω/M`` of a corner as a ball: exact but for ``M``."""
    re, im = corner
    return acb(-ball(im), ball(re)) / problem.equation(bits).mass


def region_factors(problem: Problem, region: Region) -> tuple[int, ...]:
    """``1 … J``: every ``j`` whose ``w_j`` may vanish in the region or on its outline. Decided in balls.

    ``w_j`` vanishes at ``Mω = -iMp₁j/2``; some beyond the region are cleared too, which changes no count but keeps
    poles out of the models of the edges. Nothing is cleared for a growing region or at a degenerate horizon.
    """
    if region.growing or problem.degenerate:
        return ()
    equation = problem.equation(128)
    with ctx.workprec(128):
        spacing = (-sum((k * c for k, c in enumerate(equation.f)), arb(0)) * equation.mass / 2).lower()
        if not bool(spacing > 0):
            raise BadStructure("the slope of f at the horizon is not resolved")
        last = int((ball(region.depth + _BEYOND) / spacing).upper().ceil().unique_fmpz()) + 1
    return tuple(range(1, last + 1))


def count_zeros(problem: Problem, region: Region) -> Count:
    """The number of zeros of ``D`` in the region; raises `NoCount` when it cannot be enclosed."""
    corners = region.outline()
    factors = region_factors(problem, region)
    edges, pace = [], Pace(_FEWEST + 1)
    for a, b in pairwise((*corners, corners[0])):
        edges += _edges(problem, a, b, factors, pace)
    return total(region, edges, factors)


def total(region: Region, edges: Sequence[Edge], factors: tuple[int, ...]) -> Count:
    """The winding number of edges that follow one another round the region's outline.

    Raises `NoCount` unless the edges close, follow the outline exactly, and leave one integer.
    """
    corners = region.outline()
    points = [edge.start for edge in edges]
    closed = all(edge.end == after.start for edge, after in pairwise((*edges, edges[0])))
    if not closed or not set(corners) <= set(points) or not _on_outline(points, corners):
        raise NoCount("the edges do not follow the outline of the region")
    with ctx.workprec(128):
        turns = sum((edge.turn for edge in edges), arb(0)) / (2 * arb.pi())
        number = turns.unique_fmpz() if turns.is_finite() else None
    if number is None or int(number) < 0:
        raise NoCount(f"the winding number {turns.str(5)} is not one whole number")
    return Count(region, int(number), factors, tuple(edges))


def _on_outline(points: Sequence[Corner], corners: Sequence[Corner]) -> bool:
    """Whether the points run once round the outline, side by side and forwards. Exact."""
    position = -1
    ring = [*corners, corners[0]]
    first = points.index(corners[0])
    here = 0
    for point in [*points[first:], *points[:first]]:
        if here + 1 < len(corners) and point == corners[here + 1]:
            here, position = here + 1, -1
        a, b = ring[here], ring[here + 1]
        along = (point[0] - a[0]) * (b[0] - a[0]) + (point[1] - a[1]) * (b[1] - a[1])
        aside = (point[0] - a[0]) * (b[1] - a[1]) - (point[1] - a[1]) * (b[0] - a[0])
        length = (b[0] - a[0]) ** 2 + (b[1] - a[1]) ** 2
        if aside != 0 or not position < along < length:
            return False
        position = along
    return here == len(corners) - 1


@dataclass
class Pace:
    """Digits that the last edge needed: where the next one starts. Planning only."""

    digits: float
    shorter: bool = False

    def effort(self) -> Effort:
        return Effort(self.digits, int(8 + 0.75 * self.digits), Stride(0.45, 3.5))

    def learn(self, found: Mismatch, values: Sequence[acb]) -> None:
        """Aim at an error 2 to 4 digits below the values at the ends."""
        least = min(max(abs(complex(z.mid())), 1e-290) for z in values)
        missing = log10(max(float(found.error), 1e-300) / least) + 2.5
        if missing > 0:
            # A large gap comes from D varying over the disc: more digits help less than a shorter edge.
            self.digits += min(missing + 0.5, 5)
            self.shorter = missing > _WIDE
        elif missing < -2:
            self.digits = max(_FEWEST, self.digits + 0.5 * (missing + 2))


def _edges(problem: Problem, a: Corner, b: Corner, factors: tuple[int, ...], pace: Pace) -> list[Edge]:
    """One edge from ``a`` to ``b``, or several when it is too long or not resolved."""
    middle = ((a[0] + b[0]) / 2, (a[1] + b[1]) / 2)
    scale = mass(problem)
    sigma = complex(-middle[1], middle[0]) / scale
    half = max(abs(b[0] - a[0]), abs(b[1] - a[1])) / 2
    radius = float(half) / scale * 1.02
    if radius <= longest(problem, sigma):
        cleared = tuple(j for j in cleared_of(problem, sigma, radius) if j in factors)
        for _ in range(3):
            pace.shorter = False
            try:
                run = prepare(problem, exact_point(sigma), radius, pace.effort(), cleared)
                return [edge(problem, a, b, run, factors, pace)]
            except NoCount:
                if pace.shorter:
                    break
            except Refusal:
                break
    if half < _SHORTEST:
        raise NoCount(f"the edge at Mω = {complex(middle[0], middle[1]):.4f} is not resolved: a zero may lie on it")
    first = _edges(problem, a, middle, factors, pace)
    return first + _edges(problem, middle, b, factors, pace)


def cleared_of(problem: Problem, sigma: complex, radius: float) -> tuple[int, ...]:
    """Planning: the factors to clear in a model."""
    return cleared_factors(problem, sigma, radius, REACH)


def longest(problem: Problem, sigma: complex) -> float:
    """Planning: the largest useful radius of a model about ``sigma``, shorter where near-axis zeros crowd."""
    land = lands(problem)[1]
    crowd = land.lead if not land.irregular and abs(sigma.imag) < 0.3 else 1.0
    return min(0.3, 0.3 * abs(sigma), max(crowd, 0.02))


def edge(problem: Problem, a: Corner, b: Corner, run: Run, factors: tuple[int, ...], pace: Pace | None = None) -> Edge:
    """``Δarg D`` from ``a`` to ``b`` from one model; raises a `Refusal` when it is not resolved."""
    found, run = run.evaluate(problem)
    with ctx.workprec(run.bits):
        R = arb(run.radius)
        ends = [(corner_ball(problem, corner, run.bits) - run.sigma) / R for corner in (a, b)]
        if not all(bool(upper(end) < 1) for end in ends):
            raise NoCount("an edge leaves the disc of its model")
        if not set(run.cleared) <= set(factors):
            raise NoCount("a factor was cleared that the region does not know")
        before, after = _value(found, ends[0]), _value(found, ends[1])
        if pace is not None:
            pace.learn(found, (found.value(ends[0]), found.value(ends[1])))
        principal = _argument(after / before)
        pieces = _by_pieces(found, ends[0], ends[1])
        turns = ((pieces - principal) / (2 * arb.pi())).unique_fmpz()
        if turns is None:
            raise NoCount("the turns along an edge are not resolved")
        turn = principal + 2 * arb.pi() * arb(turns)
        slope = -sum((k * c for k, c in enumerate(problem.equation(run.bits).f)), arb(0))
        for j in factors:
            if j not in run.cleared:
                pole = slope * j / 2
                turn += _argument((pole - run.sigma - R * ends[1]) / (pole - run.sigma - R * ends[0]))
        return Edge(a, b, run, turn)


def _value(found: Mismatch, tau: acb) -> acb:
    return found.value(tau) + acb(arb(0, found.error), arb(0, found.error))


def _argument(z: acb) -> arb:
    """The principal argument of a ball that does not meet the cut; a straight segment never turns by π or more."""
    if not (z.is_finite() and (bool(z.real > 0) or bool(z.imag > 0) or bool(z.imag < 0))):
        raise NoCount("an argument is not resolved")
    return z.arg()


def _by_pieces(found: Mismatch, start: acb, end: acb) -> arb:
    """The change of argument of ``P + E`` from ``start`` to ``end``, adding up accepted pieces."""
    total_turn, pending, used = arb(0), [(Fraction(0), Fraction(1))], 0
    while pending:
        low, high = pending.pop()
        used += 1
        if used > _PIECES:
            raise NoCount("an edge needs too many pieces")
        centre = start + (end - start) * ball((low + high) / 2)
        half = (end - start) * ball((high - low) / 2)
        q = found.value(acb_poly([centre, half]))
        rest = sum((upper(c) for c in q.coeffs()[1:]), found.error)
        if not bool(q[0].abs_lower() > arb(1.5) * rest):
            middle = (low + high) / 2
            pending += [(middle, high), (low, middle)]
            continue
        error = acb(arb(0, found.error), arb(0, found.error))
        total_turn += _argument((q(acb(1)) + error) / q[0]) - _argument((q(acb(-1)) + error) / q[0])
    return total_turn
