"""Lemmas: how far a truncated series is from the solution it approximates.

Setting. On the straight segment from an exact point to the next one, ``ξ ∈ [0, 1]`` real, the
equation reads (see `segment.Segment` for the scaling)

    L φ = (P φ')' + 2σκ φ' + C φ = 0,     C = σκ' - σ²q - w,     primes d/dξ.

``φ_N`` is a polynomial in ``ξ`` whose residual ``L φ_N = Σ_{k>=m} r_k ξ^k`` is known exactly, in
balls, and ``ρ = Σ|r_k|``, so that ``|L φ_N| <= ρ ξ^m`` on the segment. The error ``e = φ - φ_N``
has ``L e = -R``, ``|R| <= ρ ξ^m``. Every bound below is a number that holds for all ``σ`` of
the disc at hand, because the suprema are taken over it. ``L`` is linear: residuals that start
at different powers are bounded apart and the errors added.

**Transport over an ordinary step** (``P ≠ 0`` on the segment; ``e(0)``, ``e'(0)`` known to lie within bounds).
On a piece of length ``δ`` let ``r >= sup Re(-(2σκ+P')/P)``, of either sign, ``c >= sup|C/P|`` and
``ρ' = ρ/inf|P|``. From ``e'' = -((2σκ+P')/P) e' - (C/P) e - R/P`` and ``|z|' <= Re(z̄z')/|z|``

    |e|' <= |e'|,      |e'|' <= r|e'| + c|e| + ρ'.

The off-diagonal entries of ``A = [[0, 1], [c, r]]`` are not negative, so (Kamke) ``(|e|, |e'|)`` stays below the
solution of ``z' = Az + (0, ρ')`` that starts from the bounds. With ``g(s) = (exp sA)_{01}``: ``(exp sA)_{11} = g'``,
``g`` increases from 0, and ``∫₀^δ exp(sA) (0, 1) ds = (∫g, g(δ)) <= (δ g(δ), g(δ))``, so

    (|e|, |e'|)(δ) <= exp(δA) (|e|, |e'|)(0) + ρ' (δ g(δ), g(δ)).

With ``λ± = (r ± Δ)/2``, ``Δ = √(r²+4c)``: ``g = (e^{λ₊δ} - e^{λ₋δ})/Δ``, ``(exp δA)_{00} = (λ₊e^{λ₋δ} -
λ₋e^{λ₊δ})/Δ``, ``(exp δA)_{10} = cg``, ``(exp δA)_{11} = (λ₊e^{λ₊δ} - λ₋e^{λ₋δ})/Δ``. No smallness is needed, and
where the path runs so that the unwanted solution dies (``r < 0``) errors die with it: one solution is carried, its
error beside it, and no fundamental matrix, whose fast column would cost twice the terms.

**Regular horizon** (``P = ξG``, ``G ≠ 0``; ``e = O(ξ^{m+1})`` analytic). For ``ψ = Pe'``:
``ψ' = -(2σκ/G)ψ/ξ - Ce - R``, hence ``|ψ|' <= α₊|ψ|/ξ + c|e| + ρξ^m`` with
``α₊ = max(0, sup Re(-2σκ/G))``, ``c = sup|C|``, ``γ_g = inf|G|``. Let ``S = sup|ψ|/ξ^{m+1}``; then
``|e'| <= Sξ^m/γ_g``, ``|e| <= Sξ^{m+1}/(γ_g(m+1))``. If ``m+1 > α₊``, ``ξ^{-α₊}|ψ| → 0`` at 0, and
integrating ``(ξ^{-α₊}|ψ|)'`` gives
``S <= S c/(γ_g(m+1)(m+2-α₊)) + ρ/(m+1-α₊)``. If ``d = 1 - c/(γ_g(m+1)(m+2-α₊)) > 0``:

    S <= ρ/((m+1-α₊) d),   |e(1)| <= S/(γ_g(m+1)),   |e'(1)| <= S/γ_g.

At ``ξ = 0``, ``-2σκ/G = 2σ/p₁`` with ``p₁ = |f_u(1)|``, so ``m+1 > α₊`` also makes every denominator
``p₁j - 2σ`` with ``j > m`` nonzero: the analytic solution with the coefficients already found exists
and is the only one.

**Irregular end** (``P = ξ²G``: infinity, and the degenerate horizon), where
``γ = inf Re(2σκ/G) > 0`` is needed. For ``ψ = Pe'``, ``|ψ|' <= -γ|ψ|/ξ² + c|e| + ρξ^m``. For bounded
``ψ``, ``e^{-γ/ξ}|ψ| → 0`` at 0, hence
``|ψ(ξ)| <= ∫₀^ξ exp(-γ(1/t - 1/ξ)) (c|e| + ρt^m) dt``, and with ``v = 1/t - 1/ξ``
``∫₀^ξ exp(-γ(1/t-1/ξ)) t^M dt = ∫₀^∞ e^{-γv} t^{M+2} dv <= ξ^{M+2}/γ``. Let ``E = sup|e|/ξ^{m+1}`` and
``Γ = γ inf|G|``. Then ``|e'| <= (cEξ^{m+1} + ρξ^m)/Γ``, and one more integration gives
``E <= cE/(Γ(m+2)) + ρ/(Γ(m+1))``. If ``d = 1 - c/(Γ(m+2)) > 0``:

    |e(1)| <= E <= ρ/(Γ(m+1) d),        |e'(1)| <= (cE + ρ)/Γ.

The same estimate makes ``e ↦ ∫ P⁻¹ ∫ …`` a contraction in the norm ``E``, so ``e`` exists and is
unique in it; the Wronskian times ``P`` grows at least like ``e^{γ/ξ}`` towards 0, so a second
bounded solution does not exist: the solution found depends neither on ``N`` nor, within the
sector where ``γ > 0``, on the ray, and as a uniform limit it is analytic in ``σ``. It is the
outgoing solution at infinity and the ingoing one at a degenerate horizon.
"""

from __future__ import annotations

from collections.abc import Sequence

from flint import arb

from knell.methods.enclosure.refusal import LostPrecision, WeakBound

_LEAST_COUPLING = arb(2) ** -20


def _positive(value: arb, name: str) -> arb:
    """A lower bound of ``value``; raises `WeakBound` unless it is positive."""
    if not value.is_finite():
        raise LostPrecision(f"{name} is not finite: raise the precision")
    bound = value.lower()
    if not bool(bound > 0):
        raise WeakBound(f"{name} is not positive: shorten the step or lengthen the series")
    return bound


def _above(value: arb, name: str) -> arb:
    if not value.is_finite():
        raise LostPrecision(f"{name} is not finite: raise the precision")
    return value.upper()


def transport(
    errors: tuple[arb, arb], rho: arb, pieces: Sequence[tuple[arb, arb, arb]], length: arb
) -> tuple[arb, arb]:
    """Bounds of ``|e|``, ``|e'|`` after a step cut into equal pieces of ``length``, each with ``(r, c, inf|P|)``.

    ``errors`` bound ``|e|``, ``|e'|`` before it and ``rho`` bounds ``|R|`` on all of it.
    """
    value, slope = errors
    for rate, coupling, least in pieces:
        # A larger c is a weaker bound, and keeps Δ away from 0.
        c = (coupling + _LEAST_COUPLING).upper()
        r = _above(rate, "a growth rate")
        source = _above(rho / _positive(least, "inf|p|"), "the residual")
        delta = (r * r + 4 * c).sqrt()
        fast, slow = (r - delta) / 2, (r + delta) / 2
        down, up = (fast * length).exp(), (slow * length).exp()
        g = (up - down) / delta
        value, slope = (
            (slow * down - fast * up) / delta * value + g * slope + source * length * g,
            c * g * value + (slow * up - fast * down) / delta * slope + source * g,
        )
        value, slope = _above(value, "the error"), _above(slope, "the error")
    return value, slope


def regular_tail(rho: arb, alpha: arb, c: arb, inf_g: arb, m: int) -> tuple[arb, arb]:
    """Bounds of ``|e(1)|``, ``|e'(1)|`` at a regular horizon; ``alpha`` is ``α₊``."""
    least = _positive(inf_g, "inf|g|")
    room = _positive(m + 1 - alpha, "N+1-α (regular horizon)")
    d = _positive(1 - c / (least * (m + 1) * (room + 1)), "d (regular horizon)")
    flux = rho / (room * d)
    return _above(flux / (least * (m + 1)), "the tail"), _above(flux / least, "the tail")


def irregular_tail(rho: arb, gamma: arb, c: arb, inf_g: arb, m: int) -> tuple[arb, arb]:
    """Bounds of ``|e(1)|``, ``|e'(1)|`` at an irregular end."""
    weight = _positive(_positive(gamma, "γ (irregular end)") * _positive(inf_g, "inf|g|"), "γ inf|g|")
    d = _positive(1 - c / (weight * (m + 2)), "d (irregular end)")
    value = rho / (weight * (m + 1) * d)
    return _above(value, "the tail"), _above((c * value + rho) / weight, "the tail")
