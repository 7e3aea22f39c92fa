"""Zeros on the axis that come from clearing, told apart exactly.

At a regular horizon the solution with ``a_0 = 1`` has poles at ``σ_j = p₁j/2`` (``ω = -ijκ_s``). With ``a_0 =
∏_{j∈J} (1 - 2σ/(p₁j))`` it is analytic there. Let ``S_{j-1}(σ)`` be the right side of the *uncleared* recurrence,
``j(p₁j - 2σ) a_j = -S_{j-1}(σ)``. When ``S_{j-1}(σ_j) = 0`` the uncleared ``φ_h`` has a limit at ``σ_j`` and no
pole, so the cleared one, which carries the factor ``1 - 2σ/(p₁j)``, vanishes identically at ``σ_j``: the cleared
``D`` has a zero exactly there that belongs to the clearing. If it is simple, the uncleared ``D`` does not vanish:
neither mode nor zero of the continued sheet. (Known cases: Schwarzschild axial ``ℓ = 2``, ``j = 8``, the
algebraically special frequency; ``n = 4``, ``q = 1/7``, ``j = 4``.)

``S_{j-1}(σ_j)`` is a polynomial in ``q`` with rational coefficients, since ``f`` is linear in ``q`` and ``p₁ = 1 -
(n-1)q``. ``q`` is a root of ``F(q) = q - 2c_nκ((1+q)/2)ⁿ``, so whether ``S`` vanishes is decided by their greatest
common divisor: exact for irrational ``q`` too."""

from __future__ import annotations

from fractions import Fraction
from typing import Any

from flint import arb, ctx, fmpq, fmpq_poly

from knell.methods.enclosure.problem import Problem
from knell.methods.enclosure.refusal import LostPrecision
from knell.physics.background import PowerLaw, to_fmpq
from knell.physics.equation import local, regularised

_X = fmpq_poly([0, 1])


def special_value(problem: Problem, j: int) -> fmpq_poly:
    """``∏_{i<j} i(i-j) · S_{j-1}(σ_j)`` up to powers of ``p₁``, as a polynomial in ``q`` reduced modulo ``F``.

    With ``2σ = p₁j`` the uncleared recurrence reads ``i(i-j) p₁ a_i = -S_{i-1}``; to stay in polynomials,
    ``b_i = p₁^i ∏_{m<=i} m(m-j) a_i`` is carried instead of ``a_i``, ``i < j``.
    """
    background = problem.background
    modulus = defining_polynomial(background)
    n = background.exponent
    one = fmpq_poly([1])
    f: list[Any] = [one, -(1 + _X), *[fmpq_poly([0])] * (n - 1)]
    f[n] = f[n] + _X
    parts = local(regularised(f, problem.field, problem.ell), 1, -1)
    slope = 1 - (n - 1) * _X
    sigma = slope * fmpq(j, 2)
    p, K, Q, W = (list(part) for part in (parts.p, parts.K, parts.Q, parts.W))
    zero = fmpq_poly([0])

    def coefficient(part: list[Any], i: int) -> Any:
        return part[i] if 0 <= i < len(part) else zero

    def shift_factor(s: int, k: int) -> Any:
        """``c_s(k)`` of the unscaled equation in ``x``."""
        total = (k + 1) * (k + 2 - s) * coefficient(p, s) + (2 * (k + 2 - s) + s - 1) * sigma * coefficient(K, s - 1)
        return total - sigma * sigma * coefficient(Q, s - 2) - coefficient(W, s - 2)

    length = max(len(p), len(K) + 1, len(Q) + 2, len(W) + 2)
    b = [one]
    for i in range(1, j + 1):
        total = zero
        for s in range(2, min(length, i + 1) + 1):
            earlier = i + 1 - s
            weight = one
            for m in range(earlier + 1, i):
                weight = weight * slope * (m * (m - j))
            total = total + shift_factor(s, i - 1) * weight * b[earlier]
        b.append((-total) % modulus if modulus.degree() > 0 else -total)
    return b[j]


def defining_polynomial(background: PowerLaw) -> fmpq_poly:
    """``F(q) = q - 2c_nκ((1+q)/2)ⁿ`` over the rationals."""
    half = fmpq_poly([fmpq(1, 2), fmpq(1, 2)])
    return _X - 2 * to_fmpq(Fraction(background.c_n * background.coupling)) * half**background.exponent


def vanishes_exactly(problem: Problem, j: int) -> bool:
    """Whether ``S_{j-1}(σ_j) = 0``; raises `LostPrecision` when that cannot be decided."""
    value, modulus = special_value(problem, j), defining_polynomial(problem.background)
    if value.degree() < 0:
        return True
    with ctx.workprec(400):
        q = problem.background.q(400)
        if not at(value, q).contains(0):
            return False
        common = modulus.gcd(value)
        if common.degree() < 1:
            return False
        # F is square-free at q (its slope there is not 0), so q is a root of the divisor or of the cofactor.
        if not at(modulus // common, q).contains(0):
            return True
        if not at(common, q).contains(0):
            return False
    raise LostPrecision(f"whether the zero at j = {j} belongs to the clearing is not decided")


def at(polynomial: fmpq_poly, q: arb) -> arb:
    """The polynomial's value at a ball."""
    value = arb(0)
    for c in reversed(polynomial.coeffs()):
        value = value * q + arb(c)
    return value
