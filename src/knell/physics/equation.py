"""The regularised equation: boundary conditions turned into smoothness.

The wave equation ``d²Ψ/dr*² + (ω² - V) Ψ = 0``, ``dr* = dr/f``, with ``V = f u² W(u)`` and
``u = 1/r`` (units ``r_h = 1``), becomes under ``Ψ = exp(iω ∫ h du) φ`` with ``p = u² f``,
``p h = H`` and ``σ = iω``

    p φ'' + (2σH + p') φ' + [σH' - σ²Q - W] φ = 0,        Q = (1 - H²)/p.

With ``F = f (1 - f₁u) = 1 + O(u²)``, ``f₁ = f_u(0)``, the choice

    H = 1 - 2F,         Q = 4 (1 - f₁u) (1 - F)/u²

has ``H = -1 + O(u²)`` at infinity and ``H = +1`` on every root of ``f``, to the root's
multiplicity, so the outgoing and the ingoing wave are the solutions smooth at ``u = 0``
and at ``u = 1``, at and near the extremal end too. Schwarzschild: ``H = -1 + 2u²``,
``Q = 4(1+u)``. The singular points are ``u = 0`` (irregular) and the roots of ``f``
(regular, irregular where degenerate).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from knell.physics import polynomial
from knell.physics.background import PowerLaw
from knell.physics.field import effective_w


@dataclass(frozen=True)
class Equation:
    """Coefficients in ``u``, lowest power first, all of one number type.

    ``degenerate`` says that ``u = 1`` is exactly a double root of ``f``.
    """

    f: tuple[Any, ...]
    p: tuple[Any, ...]
    H: tuple[Any, ...]
    Q: tuple[Any, ...]
    W: tuple[Any, ...]
    degenerate: bool

    @property
    def mass(self) -> Any:
        """``M/r_h = -f_u(0)/2``: multiply ``ω r_h`` by it to get ``Mω``."""
        return -self.f[1] / 2

    def map(self, convert: Any) -> Equation:
        """The same equation with every coefficient passed through ``convert``."""
        parts = (tuple(convert(x) for x in part) for part in (self.f, self.p, self.H, self.Q, self.W))
        return Equation(*parts, degenerate=self.degenerate)


@dataclass(frozen=True)
class LocalEquation:
    """``(p φ')' + 2σK φ' + C φ = 0`` in ``x``, ``u = u_c + τx``, ``K = τH``, ``C = σK' - σ²Q - W``.

    Primes are derivatives in ``x``. At a singular end entered along the segment (``u_c = 0`` with
    ``τ = 1``, ``u_c = 1`` with ``τ = -1``) ``K(0) = -1``, ``p(0) = 0`` and, where the point is
    irregular, ``p'(0) = 0`` hold exactly and not to rounding; the opposite ``τ`` has ``K(0) = +1``.
    """

    p: tuple[Any, ...]
    K: tuple[Any, ...]
    Q: tuple[Any, ...]
    W: tuple[Any, ...]


def regularised(f: Sequence[Any], field: str, ell: int, degenerate: bool = False) -> Equation:
    """The equation of the polynomial ``f`` (``f[0] = 1``, ``f(1) = 0``) for a field and ``ℓ``.

    Works over any number type. Raises `ValueError` for an unknown field or too low an ``ℓ``.
    """
    factor = [f[0], -f[1]]
    F = polynomial.multiply(f, factor)
    # 1 - F vanishes to second order by construction: drop those two coefficients, do not divide.
    remainder = [-x for x in F[2:]]
    return Equation(
        f=tuple(f),
        p=(0 * f[0], 0 * f[0], *f),
        H=tuple([-f[0], 0 * f[0]] + [-2 * x for x in F[2:]]),
        Q=tuple(polynomial.scale(polynomial.multiply(factor, remainder), 4)),
        W=tuple(effective_w(f, field, ell)),
        degenerate=degenerate,
    )


def equation_balls(background: PowerLaw, field: str, ell: int, bits: int) -> Equation:
    """The equation over ``arb`` balls good to about ``bits`` bits."""
    from flint import ctx

    f = background.f(bits)
    with ctx.workprec(bits + 20):
        return regularised(f, field, ell, background.is_extremal)


def equation_floats(background: PowerLaw, field: str, ell: int) -> Equation:
    """The equation over doubles, each coefficient rounded once from balls."""
    return equation_balls(background, field, ell, 100).map(float)


def local(equation: Equation, centre: Any, direction: int = 1) -> LocalEquation:
    """The equation about ``u = centre`` in ``x = direction (u - centre)``, direction ±1.

    ``centre`` given as the integer 0 or 1 is the singular end, and its structural zeros are
    imposed; an ordinary point is given as a number that is not one of these integers.
    """
    parts = [polynomial.shift(part, centre) for part in (equation.p, equation.H, equation.Q, equation.W)]
    if direction < 0:
        parts = [polynomial.reflect(part) for part in parts]
        parts[1] = [-x for x in parts[1]]
    p, K, Q, W = parts
    if isinstance(centre, int) and centre in (0, 1):
        zero = 0 * equation.f[0]
        p[0] = zero
        K[0] = zero + (2 * centre - 1) * direction
        if centre == 0 or equation.degenerate:
            p[1] = zero
        if centre == 0:
            K[1] = zero
        elif equation.degenerate:
            K[1] = zero
    return LocalEquation(tuple(p), tuple(K), tuple(Q), tuple(W))
