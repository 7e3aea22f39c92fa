"""What a proof is about: a background, a field and ``ℓ``, as balls of any precision.

``D(σ) = φ_∞ φ_h' - φ_∞' φ_h`` at ``u_m`` (primes d/du), with ``φ_∞(0) = 1`` and ``φ_h(1) = 1``, depends on
``σ`` and on the exact number ``u_m`` alone: not on the path within its homotopy class, nor on orders or precision.
Its zeros with ``Re ω > 0`` are the quasinormal modes. (Another ``u_m`` multiplies it by
``exp(-∫ 2σH/p du)`` times a ratio of ``p``, which has no zeros.)
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from typing import Any

from flint import acb, arb, ctx

from knell.methods.enclosure.refusal import BadStructure
from knell.physics import polynomial
from knell.physics.background import PowerLaw
from knell.physics.equation import Equation, equation_balls, local

# One exact number, the same for every proof: dyadic, so that 1 - u is exact too.
MATCH_POINT = 0.5 - 0.1875j


@dataclass(frozen=True)
class Problem:
    """Background, field and ``ℓ``; hashable and exact, hence fit to be a cache key."""

    background: PowerLaw
    field: str
    ell: int

    def equation(self, bits: int) -> Equation:
        """The regularised equation in balls, checked by `check_structure`."""
        return _equation(self, bits)

    @property
    def degenerate(self) -> bool:
        return self.background.is_extremal


@lru_cache(maxsize=64)
def _equation(problem: Problem, bits: int) -> Equation:
    equation = equation_balls(problem.background, problem.field, problem.ell, bits)
    with ctx.workprec(bits + 20):
        check_structure(equation)
    return equation


def check_structure(equation: Equation) -> None:
    """The structural zeros that the lemmas use are there, and no others.

    ``p`` and ``p'`` vanish at ``u = 0`` exactly; ``f(1)`` is a ball about 0; the slope ``f_u(1)`` excludes
    0 unless the horizon is degenerate, and holds it when it is. For the power law ``-1 < q <= 1/(n-1)``.
    Raises `BadStructure` otherwise.
    """
    p, H, f = equation.p, equation.H, equation.f
    if not (p[0].is_zero() and p[1].is_zero() and (H[0] + 1).is_zero() and H[1].is_zero() and (p[2] - 1).is_zero()):
        raise BadStructure("p = u² + O(u³) or H = -1 + O(u²) does not hold exactly at infinity")
    at_horizon = polynomial.evaluate(f, arb(1))
    slope = polynomial.evaluate(polynomial.derivative(f), arb(1))
    if not (at_horizon.is_finite() and slope.is_finite() and at_horizon.contains(0)):
        raise BadStructure("f(1) = 0 does not hold: u = 1 is not the horizon")
    if equation.degenerate != bool(slope.contains(0)):
        raise BadStructure("the horizon is called degenerate and is not, or the other way round")
    if not equation.degenerate and not bool(slope < 0):
        raise BadStructure("f is not positive just outside u = 1")


@dataclass(frozen=True)
class Side:
    """The equation about one singular end in ``x``: ``x = u`` at infinity, ``x = 1 - u`` at the horizon."""

    p: tuple[acb, ...]
    K: tuple[acb, ...]
    Q: tuple[acb, ...]
    W: tuple[acb, ...]
    irregular: bool
    at_horizon: bool

    @property
    def slope(self) -> acb:
        """``p₁ = |f_u(1)|`` at a regular horizon, exactly zero at an irregular end."""
        return self.p[1]


@lru_cache(maxsize=128)
def side(problem: Problem, bits: int, at_horizon: bool) -> Side:
    """The local equation at infinity or at the horizon, structural zeros exact."""
    with ctx.workprec(bits + 20):
        parts: Any = local(problem.equation(bits), 1, -1) if at_horizon else local(problem.equation(bits), 0, 1)
        p, K, Q, W = (tuple(acb(c) for c in part) for part in (parts.p, parts.K, parts.Q, parts.W))
        irregular = problem.degenerate or not at_horizon
        wanted = 2 if irregular else 1
        if any(not c.is_zero() for c in p[:wanted]) or not (K[0] + 1).is_zero() or not bool(p[wanted].real > 0):
            raise BadStructure("the structural zeros of p and K(0) = -1 do not hold at a singular end")
        return Side(p, K, Q, W, irregular, at_horizon)
