"""Truncated series on one segment, with their residuals in balls.

The coefficient of ``ξ^k`` in ``L φ``, ``φ = Σ a_j ξ^j``, is ``Σ_{s>=0} c_s(k) a_{k+2-s}`` with

    c_s(k) = P_s (k+1)(k+2-s) + 2σκ_{s-1}(k+2-s) + (s-1)σκ_{s-1} - σ²q_{s-2} - w_{s-2},

a quadratic in ``k``. At an ordinary point ``c_0(k) = P_0 (k+1)(k+2)`` leads; at a singular end
``P_0 = 0`` and ``c_1(k) = j (P_1 j + 2σκ_0)``, ``j = k+1``, does: ``j h (p₁j - 2σ)`` at the regular horizon,
``-2σhj`` at an irregular end.

**What is proven does not depend on how the coefficients were found.** Each ``a_j`` is taken as the exact midpoint of
what the recurrence gives, cut at degree ``d`` in ``τ``; then *every* coefficient of ``L φ_N``, whatever its power
and its degree in ``τ``, is evaluated in balls for the exact polynomial ``φ_N`` and enters ``ρ``. Rounding, the cut
in ``τ``, the cut in ``ξ``, or a wrong coefficient can only make ``ρ`` larger. Radii therefore do not pile up along
the recurrence, as they would if the coefficients were carried as balls.

The first ``J₀`` coefficients at a singular end are the exception: there the lemmas need a residual that starts at a
power ``ξ^{J₀}``, so ``a_0 … a_{J₀}`` are balls (models with remainders) that contain the exact coefficients, and the
residual from ``ξ^{J₀}`` on is evaluated with these balls.

**Clearing.** At the regular horizon the solution with ``a_0 = 1`` has poles at ``2σ = p₁j``. For a set
``J`` of such ``j`` the solution with ``a_0 = ∏_{j∈J} (1 - 2σ/(p₁j))`` is analytic there. With ``w_j = 1 - 2σ/(p₁j)``,
``a_j w_j = -S/(P_1 j²)`` needs no division by ``w_j``; every earlier coefficient is multiplied by ``w_j``
as the recurrence passes ``j``. ``J₀ >= max J``, so the series runs past every cleared factor.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import count
from math import ceil, inf
from typing import Any

from flint import acb, arb

from knell.methods.enclosure import lemmas
from knell.methods.enclosure.refusal import LostPrecision, WeakBound
from knell.methods.enclosure.segment import Segment, ordinary_pieces, singular_suprema
from knell.methods.enclosure.taylor import ZERO, Models, Values, upper

Ring = Values | Models
Rows = Iterator[tuple[int, list[Any]]]


@dataclass(frozen=True)
class Cut:
    """Where a series ends: at the order of an earlier run, or where its terms fall below ``tolerance``."""

    tolerance: arb
    order: int | None = None
    longest: int = 1500


@dataclass(frozen=True)
class State:
    """``φ`` and ``φ'`` at one point: exact numbers (or exact polynomials in ``τ``) and bounds of their errors."""

    value: Any
    slope: Any
    value_error: arb
    slope_error: arb
    order: int

    def scaled(self, factor: acb) -> State:
        """The slope with respect to a variable that is ``factor`` times longer; exact when ``factor`` is 1."""
        return State(
            self.value, self.slope * factor, self.value_error, (self.slope_error * upper(factor)).upper(), self.order
        )


def factors(segment: Segment, ring: Ring) -> Rows:
    """For ``k = 0, 1, …`` the pair of ``k`` and the list ``c_0(k) … c_S(k)``, by differences in ``k``."""
    sigma = ring.sigma
    square = ring.multiply(sigma, sigma) if isinstance(ring, Values) else sigma * sigma
    now, step, bend = [], [], []
    for s in range(segment.length + 1):
        p = segment.P[s] if s < len(segment.P) else acb(0)
        constant, linear = ring.lift((2 - s) * p), ring.lift((3 - s) * p)
        if 1 <= s <= len(segment.kappa):
            drift = sigma * segment.kappa[s - 1]
            constant, linear = constant + (3 - s) * drift, linear + 2 * drift
        if 2 <= s <= len(segment.q) + 1:
            constant = constant - square * segment.q[s - 2]
        if 2 <= s <= len(segment.w) + 1:
            constant = constant - ring.lift(segment.w[s - 2])
        now.append(constant)
        step.append(linear + ring.lift(p))
        bend.append(ring.lift(2 * p))
    for k in count():
        yield k, now
        now = [a + b for a, b in zip(now, step, strict=True)]
        step = [a + b for a, b in zip(step, bend, strict=True)]


def apply_row(row: Sequence[Any], a: Sequence[Any], k: int, first: int) -> Any:
    """``Σ_{s>=first} c_s(k) a_{k+2-s}`` over the coefficients there are."""
    total = None
    for s in range(max(first, k + 3 - len(a)), min(len(row) - 1, k + 2) + 1):
        term = row[s] * a[k + 2 - s]
        total = term if total is None else total + term
    return total


def _small(ring: Ring, a: Sequence[Any], tolerance: arb) -> bool:
    """Whether the last three coefficients lie below the tolerance."""
    return all(bool(ring.norm(a[-i]) < tolerance) for i in (1, 2, 3))


def ordinary_step(segment: Segment, ring: Ring, state: State, cut: Cut) -> State:
    """Carry ``state`` (slope with respect to ``ξ``) from ``ξ = 0`` to ``ξ = 1``, errors included.

    Raises `BadStructure` when ``p`` may vanish on the way, `LostPrecision` when the series does not end.
    """
    pieces = ordinary_pieces(segment, ring.centre, ring.radius)
    lead = acb(-1) / segment.P[0]
    a: list[Any] = [state.value, state.slope]
    rho, target = ZERO, cut.order
    rows = factors(segment, ring)
    for k, row in rows:
        order = k + 1
        if target is None and k > 4 and k % 3 == 0 and _small(ring, a, cut.tolerance):
            target = order
        if target is not None and order >= target:
            break
        if order >= cut.longest:
            raise LostPrecision(f"the series at an ordinary point did not end within {cut.longest} terms")
        total = apply_row(row, a, k, 1)
        a.append(ring.middle(total * (lead / ((k + 1) * (k + 2)))))
        rho = rho + ring.norm(total + row[0] * a[-1])
    # The row in hand is k = N - 1, that of the first equation in which a_{N+1} = 0 takes part.
    rho = (rho + _residual(ring, a, k, row, rows)).upper()
    errors = lemmas.transport((state.value_error, state.slope_error), rho, pieces, arb(1) / len(pieces))
    return _sums(ring, a, *errors)


def _residual(ring: Ring, a: Sequence[Any], k: int, row: list[Any], rows: Rows) -> arb:
    """``Σ|r_k|`` from the row in hand to the last that reaches ``a_N``."""
    total = ZERO
    last = len(a) + len(row) - 4
    while k <= last:
        total = (total + ring.norm(apply_row(row, a, k, 0))).upper()
        k, row = next(rows)
    return total


def _sums(ring: Ring, a: Sequence[Any], value_error: arb, slope_error: arb) -> State:
    """``Σa_j`` and ``Σj a_j``: the midpoints become the state, the radii join the errors."""
    value, slope = a[0], ring.lift(acb(0))
    for j in range(1, len(a)):
        value, slope = value + a[j], slope + a[j] * j
    (value, value_rest), (slope, slope_rest) = ring.cut(value), ring.cut(slope)
    value, value_radius = ring.split(value)
    slope, slope_radius = ring.split(slope)
    errors = (value_error + value_rest + value_radius).upper(), (slope_error + slope_rest + slope_radius).upper()
    return State(value, slope, *errors, len(a) - 1)


def singular_start(segment: Segment, ring: Ring, cut: Cut, irregular: bool, cleared: Sequence[int] = ()) -> State:
    """The series at a singular end with ``a_0 = ∏_{j∈J} (1 - 2σ/(p₁j))``, ``J`` = ``cleared`` (empty: ``a_0 = 1``).

    Raises `WeakBound` when a denominator may vanish or the lemma does not apply, `LostPrecision`
    when the series does not end (at an irregular end: its terms stop falling above the tolerance).
    """
    bounds = singular_suprema(segment, ring.disc, 2 if irregular else 1)
    if irregular and cleared:
        raise WeakBound("there is no factor to clear at an irregular end")
    known = max([_least_start(bounds, irregular, cut.longest), *cleared])
    rows = factors(segment, ring)
    # Remainders of these coefficients grow along the recurrence: a higher degree keeps them small while it matters.
    a = _leading_coefficients(segment, ring.raised(known), rows, known, cleared)
    rho, target, k = ZERO, cut.order, known
    for k, row in rows:
        if target is None and k > max(known, 4) and k % 3 == 0 and _small(ring, a, cut.tolerance):
            target = k
        if target is not None and k >= target:
            break
        if k >= cut.longest:
            raise LostPrecision(f"the series at a singular end did not end within {cut.longest} terms")
        total = apply_row(row, a, k, 2)
        a.append(ring.middle(_next(segment, ring, ring.cut(total)[0], k + 1)))
        rho = rho + ring.norm(total + row[1] * a[-1])
    # The row in hand is k = N, that of the first equation in which a_{N+1} = 0 takes part.
    rho = (rho + _residual(ring, a, k, row, rows)).upper()
    alpha, gamma, c, least = bounds
    if irregular:
        value, slope = lemmas.irregular_tail(rho, gamma, c, least, known)
    else:
        value, slope = lemmas.regular_tail(rho, alpha, c, least, known)
    return _sums(ring, a, value, slope)


def _next(segment: Segment, ring: Ring, total: Any, j: int) -> Any:
    """``a_j = -S/(j (P_1 j + 2σκ_0))``."""
    lead = segment.P[1] * j if len(segment.P) > 1 else acb(0)
    return ring.divide(total * (acb(-1) / j), lead, 2 * segment.kappa[0])


def _leading_coefficients(segment: Segment, ring: Ring, rows: Rows, known: int, cleared: Sequence[int]) -> list[Any]:
    """Balls or models that contain ``a_0 … a_{J₀}``, ``J₀`` = ``known``, with the factors of ``cleared`` applied."""
    one = ring.lift(acb(1))
    a: list[Any] = [one]
    for j in range(1, known + 1):
        k, row = next(rows)
        total, beyond = ring.cut(apply_row(row, a, k, 2))
        total = ring.widen(total, beyond)
        if j in cleared:
            factor = one + ring.sigma * (2 * segment.kappa[0] / (segment.P[1] * j))
            a = [ring.multiply(factor, earlier) for earlier in a]
            a.append(total * (acb(-1) / (segment.P[1] * j * j)))
        else:
            a.append(_next(segment, ring, total, j))
    return a


def _least_start(bounds: tuple[arb, arb, arb, arb], irregular: bool, longest: int) -> int:
    """A ``J₀`` for which the lemma's ``d`` should be at least 1/2; the lemma decides whether it applies.

    Raises `WeakBound` where none below ``longest`` would do.
    """
    alpha, gamma, c, least = (float(x) for x in bounds)
    if irregular:
        needed = 2 * c / (gamma * least) - 2 if gamma * least > 0 else inf
    else:
        # least (m+1) (m+2-α) >= 2c
        half = (alpha + 1) / 2
        needed = max(alpha, half - 1 + (half * half + 2 * c / least) ** 0.5) if least > 0 else inf
    if not needed < longest:
        raise WeakBound("γ, inf|g| or c leave no power at which the lemma of the singular end applies")
    return max(1, ceil(needed))
