"""Numbers that depend on ``σ``: values at one point, and Taylor models on a disc.

A model on ``|σ - σ₀| <= R`` is a polynomial of degree ``d`` in ``τ = (σ - σ₀)/R``, ``|τ| <= 1``,
with balls as coefficients, and it *contains* a function ``F`` in this sense: for every ``τ``
of the disc there are numbers ``c_i`` in the balls, which may depend on ``τ``, with
``F(τ) = Σ c_i τ^i``. Sums and products of models contain sums and products of the functions,
whatever the ``c_i``, because ball arithmetic holds for every choice. A remainder
``|E(τ)| <= ε`` needs no field of its own: it widens the ball of ``c_0`` by ``ε``. What a product
has beyond ``τ^d`` is dropped and its norm ``Σ_{i>d} |c_i|`` (it bounds the dropped part, for
``|τ| <= 1``) widens ``c_0`` likewise.

Division by a linear function. Let ``w = w₀ + w₁τ``, and let ``a_0 … a_d`` solve
``w₀ a_i + w₁ a_{i-1} = S_i``, which is the series of ``S/w`` cut at ``τ^d``. Then
``w Σ a_i τ^i = S + w₁ a_d τ^{d+1}``, so that exactly

    S/w = Σ_{i<=d} a_i τ^i - w₁ a_d τ^{d+1}/w,     |last term| <= |w₁ a_d|/(|w₀| - |w₁|),

for every choice of the ``S_i`` in their balls.

`Values` gives the same operations for a single ``σ``; the two classes share an interface so
that the series are written once.
"""

from __future__ import annotations

from typing import Any

from flint import acb, acb_poly, arb

from knell.methods.enclosure.refusal import InexactVertex, LostPrecision, WeakBound

ZERO = arb(0)


def upper(x: Any) -> arb:
    """An exact upper bound of ``|x|``; raises `LostPrecision` when there is none."""
    bound = x.abs_upper()
    if not bound.is_finite():
        raise LostPrecision("a ball is not finite: raise the precision")
    return bound


def lower(x: Any) -> arb:
    """An exact lower bound of ``|x|``, zero when the ball holds zero."""
    bound = x.abs_lower()
    if not bound.is_finite():
        raise LostPrecision("a ball is not finite: raise the precision")
    return bound


def box(radius: arb) -> acb:
    """The square ball about 0 that holds the disc of this radius."""
    side = arb(0, radius)
    return acb(side, side)


def exact_point(z: complex) -> acb:
    """A double-precision complex number as the exact number it is."""
    return acb(arb(z.real), arb(z.imag))


class Values:
    """Plain balls at one exact ``σ``."""

    degree = 0

    def __init__(self, sigma: acb) -> None:
        if not (sigma.is_exact() and sigma.is_finite()):
            raise InexactVertex("σ is not an exact number")
        self.sigma = sigma
        self.centre = sigma
        self.radius = ZERO
        self.disc = sigma

    def raised(self, extra: int) -> Values:
        return self

    def lift(self, x: Any) -> Any:
        return x

    def norm(self, a: acb) -> arb:
        return upper(a)

    def cut(self, a: acb) -> tuple[acb, arb]:
        return a, ZERO

    def widen(self, a: acb, error: arb) -> acb:
        return a + box(error)

    def middle(self, a: acb) -> acb:
        return a.mid()

    def split(self, a: acb) -> tuple[acb, arb]:
        middle = a.mid()
        return middle, upper(a - middle)

    def multiply(self, a: acb, b: acb) -> acb:
        return a * b

    def divide(self, a: acb, w0: acb, w1: Any) -> acb:
        """``a/w`` with ``w = w₀ + w₁σ``."""
        w = w0 + w1 * self.sigma
        if not bool(lower(w) > 0):
            raise WeakBound("a denominator of the recurrence may vanish: σ sits on a pole")
        return a / w


class Models:
    """Taylor models of degree ``d`` on the disc ``|σ - σ₀| <= R``; ``σ₀`` and ``R`` exact, ``R > 0``."""

    def __init__(self, centre: acb, radius: arb, degree: int) -> None:
        if not (centre.is_exact() and centre.is_finite() and radius.is_exact() and bool(radius > 0)):
            raise InexactVertex("the centre or the radius of a Taylor model is not an exact number")
        self.degree = degree
        self.centre = centre
        self.radius = radius
        self.sigma = acb_poly([centre, acb(radius)])
        self.disc = centre + box(radius)

    def raised(self, extra: int) -> Models:
        """The same disc with models of a higher degree."""
        return Models(self.centre, self.radius, self.degree + extra)

    def lift(self, x: Any) -> acb_poly:
        return x if isinstance(x, acb_poly) else acb_poly([x])

    def norm(self, a: acb_poly) -> arb:
        """``Σ|c_i|``, which bounds the model on ``|τ| <= 1``."""
        bound = sum((c.abs_upper() for c in a.coeffs()), ZERO).upper()
        if not bound.is_finite():
            raise LostPrecision("a model is not finite: raise the precision")
        return bound

    def cut(self, a: acb_poly) -> tuple[acb_poly, arb]:
        """The part of degree ``<= d`` and the norm of the rest."""
        top, excess = len(a), ZERO
        if top <= self.degree + 1:
            return a, excess
        for i in range(self.degree + 1, top):
            excess = (excess + upper(a[i])).upper()
        return a.truncate(self.degree + 1), excess

    def widen(self, a: acb_poly, error: arb) -> acb_poly:
        """The model with the remainder ``error`` put into the ball of ``c_0``."""
        return a + acb_poly([box(error)])

    def middle(self, a: acb_poly) -> acb_poly:
        """The exact polynomial of the midpoints, cut at degree ``d``."""
        return acb_poly([c.mid() for c in a.coeffs()[: self.degree + 1]])

    def split(self, a: acb_poly) -> tuple[acb_poly, arb]:
        """The polynomial of the midpoints, exact, and the norm of what is left."""
        middle = acb_poly([c.mid() for c in a.coeffs()])
        return middle, self.norm(a - middle)

    def multiply(self, a: acb_poly, b: acb_poly) -> acb_poly:
        product, excess = self.cut(a * b)
        return self.widen(product, excess) if bool(excess > 0) else product

    def divide(self, a: acb_poly, w0: acb, w1: Any) -> acb_poly:
        """``a/w`` with ``w = w₀ + w₁σ``; raises `WeakBound` when ``w`` may vanish on the disc."""
        here = w0 + w1 * self.centre
        slope = w1 * self.radius
        distance = (lower(acb(here)) - upper(acb(slope))).lower()
        if not bool(distance > 0):
            raise WeakBound("a denominator of the recurrence may vanish on the σ disc")
        inverse = 1 / here
        ratio = -slope * inverse
        quotient: list[acb] = []
        previous = acb(0)
        for i in range(self.degree + 1):
            previous = a[i] * inverse + ratio * previous
            quotient.append(previous)
        remainder = (upper(acb(slope)) * upper(previous) / distance).upper()
        return self.widen(acb_poly(quotient), remainder)
