"""No growing mode.

**Energy.** Let ``Im ω > 0``. Ingoing at the horizon and outgoing at infinity then mean that ``Ψ`` and ``dΨ/dr*``
fall off exponentially at both ends. Multiply ``Ψ'' + (ω² - V)Ψ = 0`` by ``Ψ̄`` and integrate over all ``r*``:

    ω² ∫|Ψ|² = ∫|Ψ'|² + ∫V|Ψ|².

The right side is real, so ``ω²`` is: ``ω = iy`` with ``y > 0``, and ``-y² ∫|Ψ|² = ∫|Ψ'|² + ∫V|Ψ|²``. Where ``V >=
0`` everywhere outside the horizon this is a contradiction: there is no growing mode at all. ``V = f u² W`` with ``f
> 0`` for ``0 < u < 1``, so ``W >= 0`` there is what is proven, in balls, on pieces that cover ``[0, 1]``, after
zeros at the ends are divided out exactly.

**Count.** Where ``V`` is negative somewhere, ``y² < sup(-V)`` still holds. A proven count of zero in ``0 < Im Mω <
y``, ``|Re Mω|`` small, ``y² >= M² sup(-V)``, therefore excludes every growing mode outside the square about ``ω =
0`` that the region leaves out, and nothing is said about that square."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction
from math import ceil

from flint import acb, acb_poly, arb, ctx

from knell.methods.enclosure.count import Count, count_zeros
from knell.methods.enclosure.printed import ball
from knell.methods.enclosure.problem import Problem
from knell.methods.enclosure.refusal import Incomplete
from knell.methods.enclosure.region import Region
from knell.methods.enclosure.segment import covering, supremum
from knell.physics import polynomial
from knell.physics.equation import regularised

_BITS = 200
_DEEPEST = 24


@dataclass(frozen=True)
class Stability:
    """``energy``: ``V >= 0`` excludes every growing mode; otherwise ``count`` excludes those of its region."""

    energy: bool
    count: Count | None = None


def prove_stable(problem: Problem, excluded: Fraction = Fraction(1, 10)) -> Stability:
    """No growing mode, by energy or else by a count of zero; raises a `Refusal` when neither is proven."""
    if potential_is_not_negative(problem):
        return Stability(True)
    height = max(Fraction(ceil(1000 * float(growth_bound(problem))) + 1, 1000), 2 * excluded)
    region = Region(3 * excluded, height, excluded, excluded, growing=True)
    count = count_zeros(problem, region)
    if count.number != 0:
        raise Incomplete(f"{count.number} growing modes counted")
    return Stability(False, count)


def potential_is_not_negative(problem: Problem) -> bool:
    """Whether ``W >= 0`` on ``[0, 1]`` is proven; False proves nothing."""
    with ctx.workprec(_BITS):
        return _positive_between(_without_end_zeros(problem), Fraction(0), Fraction(1), 0)


def _without_end_zeros(problem: Problem) -> list[arb]:
    """``W`` divided by the powers of ``u`` and ``1 - u`` that divide it exactly."""
    if problem.degenerate:
        n = problem.background.exponent
        q = Fraction(1, n - 1)
        f = [Fraction(1), -(1 + q), *[Fraction(0)] * (n - 1)]
        f[n] += q
        exact = list(regularised(f, problem.field, problem.ell, True).W)
        while len(exact) > 1 and sum(exact) == 0:
            # W = (1 - u) · quotient: divide_by_root divides by u - 1.
            exact = [-c for c in polynomial.divide_by_root(exact, Fraction(1))]
        weights = [ball(c) for c in exact]
    else:
        weights = list(problem.equation(_BITS).W)
    while len(weights) > 1 and weights[0].is_zero():
        weights = weights[1:]
    return weights


def _positive_between(weights: Sequence[arb], low: Fraction, high: Fraction, depth: int) -> bool:
    middle = (low + high) / 2
    u = arb(ball(middle).mid(), ball((high - low) / 2 * Fraction(1025, 1024)).upper())
    value = acb_poly([acb(c) for c in weights])(acb(u)).real
    if bool(value > 0):
        return True
    if depth == _DEEPEST or bool(value < 0):
        return False
    return _positive_between(weights, low, middle, depth + 1) and _positive_between(weights, middle, high, depth + 1)


def growth_bound(problem: Problem) -> arb:
    """An upper bound of ``M √sup(-V)``."""
    equation = problem.equation(_BITS)
    with ctx.workprec(_BITS):
        f, W = (acb_poly([acb(c) for c in part]) for part in (equation.f, equation.W))
        depths = [(-(f(u) * u * u * W(u)).real).upper() for u in covering(256)]
        return (equation.mass * supremum([arb(0), *depths]).sqrt()).upper()
