"""Lemmas: how far a truncated series is from the solution it approximates.

Setting. On the straight segment from an exact point to the next one, ``ξ ∈ [0, 1]`` real, the
equation reads (see `segment.Segment` for the scaling)

    L φ = (P φ')' + 2σκ φ' + C φ = 0,     C = σκ' - σ²q - w,     primes d/dξ.

``φ_N`` is a polynomial in ``ξ`` whose residual ``L φ_N = Σ_{k>=m} r_k ξ^k`` is known exactly, in
balls, and ``ρ = Σ|r_k|``, so that ``|L φ_N| <= ρ ξ^m`` on the segment. The error ``e = φ - φ_N``
has ``L e = -R``, ``|R| <= ρ ξ^m``. Every bound below is a number that holds for all ``σ`` of
the disc at hand, because the suprema are taken over it. ``L`` is linear: residuals that start
at different powers are bounded apart and the errors added.

**Transport over an ordinary step** (``P ≠ 0`` on the segment; bounds of ``e(0)``, ``e'(0)`` given). Take a piece of
length ``δ`` and any complex number ``λ``. With ``B = (2σκ+P')/P`` and ``z = e' - λe``, ``e'' = -Be' - (C/P)e - R/P``
becomes

    e' = λe + z,      z' = -(B+λ) z - [(B+λ)λ + C/P] e - R/P.

Let ``r >= sup Re(-(B+λ))``, of either sign, ``c >= sup|(B+λ)λ + C/P|``, ``ρ' = ρ/inf|P|``. As ``|y|' <=
Re(ȳy')/|y|``, ``|e|' <= Re(λ)|e| + |z|`` and ``|z|' <= r|z| + c|e| + ρ'``. The off-diagonal entries of ``A = [[Re λ,
1], [c, r]]`` are not negative, so (Kamke) ``(|e|, |z|)`` stays below the solution of ``y' = Ay + (0, ρ')`` that
starts from the bounds. With ``μ± = (Re λ + r ± Δ)/2``, ``Δ = √((Re λ - r)² + 4c)`` and ``g(s) = (e^{μ₊s} -
e^{μ₋s})/Δ``

    exp(sA) = e^{μ₋s} + g(s) (A - μ₋),    no entry negative, since μ₋ <= Re λ, r.

The source adds ``ρ'(∫g, ∫e^{μ₋s} + (r-μ₋)∫g)`` over the piece, where ``g(s) <= e^{max(μ₊,0)δ} min(δ, 1/Δ)`` and
``∫e^{μ₋s} <= δ max(1, e^{μ₋δ})``, ``<= 1/|μ₋|`` for ``μ₋ < 0``. From one piece to the next ``|z|`` grows by
``|λ - λ_next||e|``.

Every ``λ`` gives a true bound, at each ``σ`` a different one if that helps. ``λ = λ₀ + λ₁τ`` is taken, with the root
of ``λ² + Bλ + C/P = 0`` nearer to 0 and its slope in ``τ`` in the middle of the piece: the local exponent of the
slow solution. ``-(B+λ)`` is then that of the fast one, and ``c`` holds only what varies over the piece and to second
order in ``τ``. With ``B = B₀ + B₁τ``, ``C/P = C₀ + C₁τ + C₂τ²`` and ``|τ| <= 1``, over the piece

    c >= |(B₀+λ₀)λ₀ + C₀| + |(B₀+λ₀)λ₁ + (B₁+λ₁)λ₀ + C₁| + |(B₁+λ₁)λ₁ + C₂|,
    r >= Re(-(B₀+λ₀)) + |B₁+λ₁|,      Re λ <= Re λ₀ + |λ₁|.

No smallness is needed, and where the path runs so that the unwanted solution dies (``r < 0``), errors die with it.
So one solution is carried with its error beside it, and no fundamental matrix, whose fast column would cost twice
the terms.

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
from dataclasses import dataclass

from flint import acb, arb

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


@dataclass(frozen=True)
class Piece:
    """Bounds on one piece of a step: the exact numbers ``λ₀`` and ``λ₁``, ``r``, ``c`` and ``inf|P|``."""

    slow: acb
    bend: acb
    rate: arb
    coupling: arb
    least: arb


def transport(errors: tuple[arb, arb], rho: arb, pieces: Sequence[Piece], length: arb) -> tuple[arb, arb]:
    """Bounds of ``|e|``, ``|e'|`` after a step cut into equal pieces of ``length``.

    ``errors`` bound ``|e|``, ``|e'|`` before it and ``rho`` bounds ``|R|`` on all of it.
    """
    value, excess, slow, bend = errors[0], errors[1], acb(0), acb(0)
    for piece in pieces:
        excess = excess + ((piece.slow - slow).abs_upper() + (piece.bend - bend).abs_upper()) * value
        slow, bend = piece.slow, piece.bend
        source = _above(rho / _positive(piece.least, "inf|p|"), "the residual")
        value, excess = _transport_piece(value, excess, source, piece, length)
    return value, _above(excess + (slow.abs_upper() + bend.abs_upper()) * value, "the error")


def _transport_piece(value: arb, excess: arb, source: arb, piece: Piece, length: arb) -> tuple[arb, arb]:
    # A larger c is a weaker bound, and keeps Δ away from 0.
    c = _above(piece.coupling + _LEAST_COUPLING, "a coupling")
    r, drift = _above(piece.rate, "a growth rate"), _above(piece.slow.real + abs(piece.bend), "a growth rate")
    delta = ((drift - r) ** 2 + 4 * c).sqrt()
    high, low = (drift + r + delta) / 2, (drift + r - delta) / 2
    up, down = (high * length).exp(), (low * length).exp()
    g = (up - down) / delta
    grown = _above(up, "a growth") if bool(high > 0) else arb(1).max(up)
    integral_g = length * grown * length.min(1 / delta)
    integral_down = length * arb(1).max(down)
    if bool(low < 0):
        integral_down = integral_down.min(-1 / low)
    return (
        _above((down + g * (drift - low)) * value + g * excess + source * integral_g, "the error"),
        _above(
            c * g * value + (down + g * (r - low)) * excess + source * (integral_down + (r - low) * integral_g),
            "the error",
        ),
    )


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
