"""All roots of AIM's quantisation condition: what AIM alone sees, artefacts included.

With ``σ`` left symbolic the recurrence of `knell.methods.aim_recurrence` gives polynomials in ``σ``, and the
condition at depth ``N`` one of degree ``2N + 2``. Its roots are modes, mirrored modes (``Re ω < 0``), roots not
converged at the depth and, on the real path, the branch cut on the negative imaginary axis, discretised.
"""

from __future__ import annotations

from dataclasses import dataclass

from flint import acb, acb_poly, ctx

from knell.methods.aim_recurrence import Columns, columns
from knell.methods.contour import Contour, pull_back
from knell.physics.equation import Equation

_AGREEMENT = 1e-8
# From an isolated root to full precision: each step doubles the digits.
_NEWTON_STEPS = 8


def quantisation_polynomial(equation: Equation, contour: Contour, depth: int, bits: int) -> acb_poly:
    """``a_(N+1) b_(N+2) - a_(N+2) b_(N+1)`` as a polynomial in ``σ``; ``equation`` over balls good to ``bits``.

    Midpoints are carried from one step to the next: compare two values of ``bits`` to see what rounding has done.
    """
    with ctx.workprec(bits):
        brackets = columns(pull_back(equation, contour, acb))
        a, b = _symbolic(brackets, depth + 2)
        return a[0] * b[1] - a[1] * b[0]


def _symbolic(brackets: Columns, last: int) -> tuple[list[acb_poly], list[acb_poly]]:
    """The last two coefficients of both solutions, polynomials in ``σ``."""
    zero, one = acb_poly([0]), acb_poly([1])
    a, b = [one, zero], [zero, one]
    constant, linear, square = brackets.Z
    for k in range(2, last + 1):
        first, second = zero, zero
        for j in range(1, min(brackets.length, k) + 1):
            i = j - 1
            weight = acb_poly(
                [
                    (brackets.X[i] * k + brackets.Y[0][i]) * k + constant[i],
                    brackets.Y[1][i] * k + linear[i],
                    square[i],
                ]
            )
            first += weight * a[k - j]
            second += weight * b[k - j]
        factor = acb_poly([acb(1) / (k * (k - 1))])
        a.append(_middle(first * factor))
        b.append(_middle(second * factor))
    return a[-2:], b[-2:]


def _middle(polynomial: acb_poly) -> acb_poly:
    return acb_poly([c.mid() for c in polynomial.coeffs()])


@dataclass(frozen=True)
class AimRoots:
    """Roots as ``Mω`` by damping, and how many more were ``lost``: too few bits to say where they are."""

    roots: list[acb]
    lost: int


def all_roots(equation: Equation, contour: Contour, depth: int, bits: int) -> AimRoots:
    """All roots of the quantisation condition at a depth, isolated by FLINT.

    Each is refined on the polynomial computed with twice the bits (``equation`` is over balls good to those) and kept
    if it moves by less than `_AGREEMENT` relative. Raises `ArithmeticError` when FLINT cannot isolate the roots.
    """
    with ctx.workprec(bits):
        rough = _middle(quantisation_polynomial(equation, contour, depth, bits))
        try:
            found = [_refined(x.mid(), rough) for x in rough.roots()]
        except ValueError as error:
            raise ArithmeticError(f"roots at depth {depth}, {bits} bits: {error}") from error
    with ctx.workprec(2 * bits):
        precise = _middle(quantisation_polynomial(equation, contour, depth, 2 * bits))
        pairs = [(x, _refined(x, precise)) for x in found]
        to_omega = acb(equation.mass) / acb(0, 1)
        kept = [(y * to_omega).mid() for x, y in pairs if bool(abs(y - x) < _AGREEMENT * abs(y))]
        return AimRoots(sorted(kept, key=_by_damping), len(found) - len(kept))


def _refined(x: acb, polynomial: acb_poly) -> acb:
    """Newton from an isolated root."""
    slope = polynomial.derivative()
    for _ in range(_NEWTON_STEPS):
        x = (x - polynomial(x) / slope(x)).mid()
    return x


def _by_damping(omega: acb) -> tuple[float, float]:
    return (-float(omega.imag), float(omega.real))
