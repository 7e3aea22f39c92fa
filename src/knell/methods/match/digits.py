"""The match over python-flint balls: one mode to any number of digits.

The same two solutions as in `solutions`, one frequency at a time. Series are cut where their terms
fall below the tolerance, so the result is converged, not proven (`knell.methods.enclosure` proves).
Within each series balls say how far rounding has spread; where that exceeds the tolerance the run is
repeated with more precision. From one series to the next midpoints are carried: balls would add up as
if the fast second solution, which dies along the way, were fed by every step.
"""

from __future__ import annotations

import cmath
import math
from collections import deque
from collections.abc import Sequence
from dataclasses import dataclass
from operator import add
from typing import Any

from flint import acb, arb, ctx

from knell.methods.match.geometry import MAIN_ROUTE, MatchRoute, check_homotopy, horizon_gap, other_roots
from knell.physics.background import PowerLaw
from knell.physics.equation import Equation, LocalEquation, equation_balls, local

_EXTRA_DIGITS = 8
# Beyond 0.4 the radii of a recurrence grow faster than its terms fall.
_RATIO = 0.33
_STIFFNESS = 8.0
_LONGEST_SERIES = 2000
_SMALL_TERMS = 6
_ATTEMPTS = 6
_ROUNDS = 8
# Second secant point, relative to a seed in doubles and to one that is precise already.
_ROUGH, _FINE = 1e-9, 1e-15


@dataclass(frozen=True)
class MatchRun:
    """One mode by the match: ``status`` (``ok``, ``starved``, ``failed``), ``frequency`` as ``Mω``, ``reason``.

    ``error`` is the last secant step, in ``Mω``: the value before it was already that close.
    """

    status: str
    frequency: acb | None = None
    error: float = math.inf
    reason: str = ""


class Starved(ArithmeticError):
    """Rounding spread beyond the tolerance: more precision is needed."""


class SeriesTooLong(ArithmeticError):
    """A series did not fall below the tolerance: a singular point is too near, or the start too far out."""


@dataclass(frozen=True)
class _Side:
    """How far a route's fixed parts depend on the equation alone: doubles for planning, balls for work."""

    equation: Equation
    plan: Equation
    roots: tuple[complex, ...]
    route: MatchRoute
    digits: int


def _series(
    at: LocalEquation,
    sigma: acb,
    x: acb,
    seed: Sequence[Any],
    order: int,
    tolerance: arb,
    longest: int = _LONGEST_SERIES,
) -> tuple[acb, acb]:
    """``φ(x)`` and ``φ_x(x)`` of the solution with the first ``order`` coefficients ``seed``.

    ``Σ_m a_m [(k+1) m p_{k+2-m} + 2σ m K_{k+1-m} + C_{k-m}] = 0`` solved for its highest term, in the
    scaled coefficients ``a_m x^m``.
    """
    p, two_k = list(at.p), [2 * sigma * c for c in at.K]
    slope_k = [k * c for k, c in enumerate(at.K)][1:]
    length = max(len(p), len(two_k) + 1, len(slope_k) + 2, len(at.Q) + 2, len(at.W) + 2)
    sigma_2 = sigma * sigma
    zero = acb(0)
    first = 3 - order
    power = x ** (first + order - 2) if first + order - 2 else acb(1)
    # What multiplies a_{m-i} is quadratic in m: its value at m and two differences make the next ones by additions.
    weights: list[acb] = []
    steps: list[acb] = []
    bends: list[acb] = []
    for i in range(first, length):
        a = p[i] * power if i < len(p) else zero
        b = two_k[i - 1] * power if i - 1 < len(two_k) else zero
        j = i - 2
        c = zero
        if j >= 0:
            if j < len(slope_k):
                c = c + sigma * slope_k[j]
            if j < len(at.Q):
                c = c - sigma_2 * at.Q[j]
            if j < len(at.W):
                c = c - at.W[j]
            c = c * power
        back = i - first + 1
        at_m, at_next, at_last = ((m - back) * ((m - order + 1) * a + b) + c for m in (order, order + 1, order + 2))
        weights.append(at_m)
        steps.append(at_next - at_m)
        bends.append(at_last - 2 * at_next + at_m)
        power = power * x
    lead_p = p[first - 1]
    lead_k = two_k[0] if order == 1 else zero
    terms = [acb(seed[0])] if order == 1 else [acb(seed[0]), seed[1] * x]
    value, moment = sum(terms[1:], terms[0]), (zero if order == 1 else terms[1])
    recent = deque(reversed(terms), maxlen=len(weights))
    small = 0
    for m in range(order, longest):
        total = zero
        for weight, term in zip(weights, recent, strict=False):
            total += weight * term
        term = total / (-m * ((m - order + 1) * lead_p + lead_k))
        recent.appendleft(term)
        value += term
        moment += m * term
        weights = list(map(add, weights, steps))
        steps = list(map(add, steps, bends))
        small = small + 1 if bool(abs(term).mid() * m < tolerance) else 0
        if small == _SMALL_TERMS:
            if bool(moment.rad() > 10 * tolerance):
                raise Starved("rounding spreads beyond the tolerance")
            return value.mid(), (moment / x).mid()
    raise SeriesTooLong("a local series has not fallen below the tolerance")


def _allowed(side: _Side, u: complex, sigma: float) -> float:
    distance = min(abs(u), abs(u - 1), *(abs(u - z) for z in side.roots)) if side.roots else min(abs(u), abs(u - 1))
    p, H = (sum(c * u**k for k, c in enumerate(part)) for part in (side.plan.p, side.plan.H))
    return min(_RATIO * distance, _STIFFNESS * abs(p) / max(abs(2 * sigma * H), 1e-300))


def _carry(side: _Side, sigma: acb, at: acb, targets: Sequence[complex], data: tuple[acb, acb]) -> tuple[acb, acb]:
    """``φ``, ``φ_u`` along straight lines; every vertex is one exact number."""
    value, slope = data
    size = abs(complex(sigma))
    tolerance = arb(10) ** (-side.digits - _EXTRA_DIGITS)
    here = complex(at)
    for target in targets:
        while True:
            left = target - here
            allowed = _allowed(side, here, size)
            arriving = abs(left) <= allowed
            there = target if arriving else here + left / math.ceil(abs(left) / allowed)
            h = acb(there) - at
            local_at = local(side.equation, at)
            scale = abs(value).mid() + abs(slope * h).mid()
            value, slope = _series(local_at, sigma, h, (value, slope), 2, tolerance * scale)
            at, here = acb(there), there
            if arriving:
                break
    return value, slope


def _formal(side: _Side, end: int, sigma: acb, angle: float, curvature: float) -> tuple[complex, tuple[acb, acb]]:
    """The smooth solution at an irregular end, from its formal series at ``x = |x| e^{i angle}``.

    The terms fall until about ``2|σ|/(curvature |x|)`` of them are taken, to ``exp`` of minus that
    number; ``|x|`` is brought in until this is below the tolerance.
    """
    tolerance = arb(10) ** (-side.digits - _EXTRA_DIGITS)
    reach = 2 * abs(complex(sigma)) / ((side.digits + _EXTRA_DIGITS) * math.log(10) + 10)
    at = local(side.equation, end, 1 if end == 0 else -1)
    for _ in range(_ATTEMPTS):
        x = min(reach, 0.25) / curvature * cmath.exp(1j * angle)
        longest = int(1.2 * 2 * abs(complex(sigma)) / (curvature * abs(x))) + 20
        try:
            return x, _series(at, sigma, acb(x), (1,), 1, tolerance, longest)
        except SeriesTooLong:
            reach *= 0.8
    raise SeriesTooLong("the formal series at an irregular end does not fall below the tolerance")


def _outgoing(side: _Side, sigma: acb) -> tuple[acb, acb]:
    ray, turn = side.route.ray, cmath.phase(side.route.meeting)
    start, data = _formal(side, 0, sigma, ray, 1.0)
    arc = [0.5 * cmath.exp(1j * (ray + (turn - ray) * k / 8)) for k in range(8)]
    targets = [*arc, side.route.meeting]
    check_homotopy(side.plan, targets, 0)
    return _carry(side, sigma, acb(start), targets, data)


def _ingoing(side: _Side, sigma: acb) -> tuple[acb, acb]:
    """Leave the horizon on a logarithmic spiral in ``x = 1 - u``: turning as the distance grows keeps errors small."""
    x_meeting = 1 - side.route.meeting
    recessive = max(cmath.phase(complex(sigma)) - 0.75 * math.pi, -0.78 * math.pi)
    if side.equation.degenerate:
        curvature = abs(sum(k * (k - 1) * c for k, c in enumerate(side.plan.f))) / 2
        x, (value, slope) = _formal(side, 1, sigma, recessive, max(curvature, 1.0))
    else:
        gap = min(1.0, horizon_gap(side.plan))
        x = 0.45 * gap * cmath.exp(1j * (recessive if gap < 0.25 else cmath.phase(x_meeting)))
        tolerance = arb(10) ** (-side.digits - _EXTRA_DIGITS)
        value, slope = _series(local(side.equation, 1, -1), sigma, acb(x), (1,), 1, tolerance)
    span = complex(math.log(abs(x_meeting / x)), cmath.phase(x_meeting) - cmath.phase(x))
    pieces = max(1, math.ceil(abs(span) / 0.35))
    targets = [1 - x * cmath.exp(span * k / pieces) for k in range(1, pieces)] + [side.route.meeting]
    check_homotopy(side.plan, [1 - x, *targets], 1)
    return _carry(side, sigma, 1 - acb(x), targets, (value, -slope))


def wronskian(side: _Side, sigma: acb) -> acb:
    """``D(σ) = φ_∞ φ_h' - φ_∞' φ_h`` at the meeting point, no factor taken out."""
    value, slope = _outgoing(side, sigma)
    value_h, slope_h = _ingoing(side, sigma)
    return value * slope_h - slope * value_h


def refine(
    background: PowerLaw,
    field: str,
    ell: int,
    seed: complex | acb,
    digits: int,
    route: MatchRoute = MAIN_ROUTE,
) -> MatchRun:
    """The zero of ``D`` next to ``seed`` (``Mω``, good to six digits or more) to ``digits`` digits.

    Secant steps on ``D``; the precision is raised until rounding spreads to less than the digits
    asked. ``failed`` when the secant leaves the seed's neighbourhood, ``starved`` when no tried
    precision was enough.
    """
    bits = int(3.33 * (digits + 20)) + 60
    for _ in range(_ATTEMPTS):
        equation = equation_balls(background, field, ell, bits)
        plan = equation.map(float)
        side = _Side(equation, plan, tuple(other_roots(plan)), route, digits)
        try:
            with ctx.workprec(bits):
                return _secant(side, seed, digits)
        except Starved as error:
            reason = str(error)
            bits += bits // 2
        except SeriesTooLong as error:
            return MatchRun("failed", reason=str(error))
    return MatchRun("starved", reason=reason)


def _secant(side: _Side, seed: complex | acb, digits: int) -> MatchRun:
    to_sigma = (acb(0, 1) / side.equation.mass).mid()
    start = (acb(seed) * to_sigma).mid()
    goal = 10.0 ** (-digits) * abs(complex(start))
    offset = _FINE if isinstance(seed, acb) else _ROUGH
    a, b = (start * (1 + offset)).mid(), start
    D_a, D_b = wronskian(side, a), wronskian(side, b)
    for _ in range(_ROUNDS):
        if (D_b - D_a).contains(0):
            raise Starved("D does not change between two secant points")
        step = (D_b * (b - a) / (D_b - D_a)).mid()
        moved = float(abs(step).mid())
        a, D_a, b = b, D_b, (b - step).mid()
        if float(abs(b - start).mid()) > 1e-3 * abs(complex(start)):
            return MatchRun("failed", reason="the secant left the neighbourhood of the seed")
        if moved <= goal:
            return MatchRun("ok", (b / to_sigma).mid(), float(side.plan.mass) * moved)
        D_b = wronskian(side, b)
    return MatchRun("failed", reason="the secant did not converge")
