"""Local series of the original equation in the areal radius, over FLINT numbers.

With ``g = r^n f``, ``h = r^(n+1) f'`` and ``P = r^(n+2) U`` the equation ``f (f Ψ')' + (ω² - f U) Ψ = 0`` is

    A Ψ'' + B Ψ' + C Ψ = 0,    A = r² g²,  B = r g h,  C = ω² r^(2n+2) - g P.

Four series solve it: the tail at infinity, the one at a simple horizon, the one at a degenerate horizon, and the
Taylor series at an ordinary point. `recurrence.summed` runs the recurrence of each.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from flint import acb, acb_poly

from knell.methods.original import HorizonRoots, OriginalEquation
from knell.methods.recurrence import summed

_I = acb(0, 1)


@dataclass(frozen=True)
class Jet:
    """``Ψ`` and ``dΨ/dr`` at one point."""

    value: Any
    slope: Any


class RadialSeries:
    """The series of one equation at one frequency ``omega`` (``Mω``, exact) and one working precision, in bits.

    Every method must be called inside ``ctx.workprec(bits)`` and raises `recurrence.SeriesError` when its series
    does not reach that precision where it is summed.
    """

    def __init__(self, equation: OriginalEquation, roots: HorizonRoots, omega: Any, bits: int) -> None:
        self.equation, self.omega, self.bits = equation, omega, bits
        self.r_h, self.degenerate = roots.horizon.mid(), roots.degenerate
        self.g, self.h = acb_poly(equation.horizon_polynomial), acb_poly(equation.slope_polynomial)
        self.P = acb_poly(equation.potential_polynomial)
        r = acb_poly([0, 1])
        self.A = r**2 * self.g**2
        self.B = r * self.g * self.h
        self.C = omega**2 * r ** (2 * equation.exponent + 2) - self.g * self.P

    def taylor(self, centre: Any, jet: Jet, step: Any) -> Jet:
        """``Ψ`` carried from ``centre`` to ``centre + step``, inside the circle through the nearest singular point."""
        A, B, C = (_shifted(part, centre) for part in (self.A, self.B, self.C))
        columns = []
        for j in range(1, max(len(A), len(B) + 1, len(C) + 2)):
            a, b, c = _entry(A, j), _entry(B, j - 1), _entry(C, j - 2)
            columns.append((a, b - (2 * j + 1) * a, j * (j + 1) * a - j * b + c))
        start = [jet.value, jet.slope * step]
        value, weighted = summed(columns, A[0], lambda k: k * (k - 1), start, step, self.bits)
        return Jet(value, weighted / step)

    def infinity(self, log_r: Any) -> Jet:
        """Outgoing ``Ψ = e^(iωr) r^(2iω) Σ b_k r^-k``, ``b_0 = 1``, at ``r = exp(log_r)`` on the sheet of ``log_r``."""
        n, r = self.equation.exponent, log_r.exp()
        i_omega = _I * self.omega
        exponent = 2 * i_omega
        # A y'' + B y' + C y = 0 for y = Σ b_k u^k, u = 1/r, primes in r; f, r f'/u and U/u² as polynomials in u
        u = acb_poly([0, 1])
        f, slope, U = (_reversed(part, n) for part in (self.g, self.h, self.P))
        wave = acb_poly([i_omega, exponent])
        A = list(f**2)
        B = list(2 * wave * f**2 + u * f * slope)
        C = list(f**2 * (wave**2 - exponent * u**2) + u * f * slope * wave + self.omega**2 - u**2 * f * U)
        columns = []
        for j in range(1, max(len(A) + 1, len(B), len(C) - 1)):
            a, b, c = _entry(A, j - 1), _entry(B, j), _entry(C, j + 1)
            columns.append((a, (1 - 2 * j) * a - b, j * (j - 1) * a + j * b + c))
        value, weighted = summed(columns, -2 * i_omega, lambda k: k, [acb(1)], 1 / r, self.bits, asymptotic=True)
        front = (i_omega * r + exponent * log_r).exp()
        return Jet(front * value, front * ((i_omega + exponent / r) * value - weighted / r))

    def horizon(self, log_x: Any) -> Jet:
        """Ingoing ``Ψ`` at ``r = r_h + exp(log_x)``: `simple_horizon` or `degenerate_horizon`."""
        return self.degenerate_horizon(log_x) if self.degenerate else self.simple_horizon(log_x)

    def simple_horizon(self, log_x: Any) -> Jet:
        """``Ψ = x^ρ Σ a_k x^k / Γ(1 + 2ρ)``, ``ρ = -iω/f'(r_h)``, ``a_0 = 1``.

        Without ``1/Γ`` the coefficients have poles at ``ω = -i j f'(r_h)/2``, ``j = 1, 2, …``
        """
        alpha, beta, gamma = self._about_horizon(order=1)
        rho = (-_I * self.omega * self.r_h ** (self.equation.exponent + 1) / self.h(self.r_h)).mid()
        columns = []
        for j in range(1, max(len(alpha), len(beta), len(gamma))):
            a, b, c, e = _entry(alpha, j), _entry(beta, j), _entry(gamma, j), rho - j
            columns.append((a, (2 * e - 1) * a + b, e * (e - 1) * a + e * b + c))
        x = log_x.exp()
        value, weighted = summed(columns, alpha[0], lambda k: k * (k + 2 * rho), [acb(1)], x, self.bits)
        front = (rho * log_x).exp() * (1 + 2 * rho).rgamma()
        return Jet(front * value, front * (rho * value + weighted) / x)

    def degenerate_horizon(self, log_x: Any) -> Jet:
        """``Ψ = e^(λ/x) x^ρ Σ a_k x^k``, ``a_0 = 1``; ``λ = iω/F₀``, ``ρ = iωF₁/F₀²`` where ``f = F₀x² + F₁x³ + …``"""
        n, x = self.equation.exponent, log_x.exp()
        alpha, beta, gamma = (acb_poly(part) for part in self._about_horizon(order=2))
        g = _shifted(self.g, self.r_h)
        F0 = g[2] / self.r_h**n
        F1 = (_entry(g, 3) - n * g[2] / self.r_h) / self.r_h**n
        lam, rho = (_I * self.omega / F0).mid(), (_I * self.omega * F1 / F0**2).mid()
        # x⁴α y'' + x²B y' + C y = 0; the first two coefficients of C vanish by the choice of λ and ρ
        x_ = acb_poly([0, 1])
        front = acb_poly([-lam, rho])
        A = list(alpha)
        B = list(2 * alpha * front + x_ * beta)
        C = list(alpha * (front**2 + acb_poly([0, 2 * lam, -rho])) + x_ * beta * front + gamma)
        columns = []
        for j in range(1, max(len(A) + 1, len(B), len(C) - 1)):
            a, b, c = _entry(A, j - 1), _entry(B, j), _entry(C, j + 1)
            columns.append((a, b - (2 * j + 1) * a, j * (j + 1) * a - j * b + c))
        value, weighted = summed(columns, B[0], lambda k: k, [acb(1)], x, self.bits, asymptotic=True)
        scale = (lam / x + rho * log_x).exp()
        return Jet(scale * value, scale * ((rho / x - lam / x**2) * value + weighted / x))

    def _about_horizon(self, order: int) -> tuple[list[Any], list[Any], list[Any]]:
        """``A/x^(2·order)``, ``B/x^(2·order-1)`` and ``C`` in powers of ``x``; the zeros divided out are structural."""
        A, B, C = (_shifted(part, self.r_h) for part in (self.A, self.B, self.C))
        return A[2 * order :], B[2 * order - 1 :], C


def _shifted(polynomial: Any, centre: Any) -> list[Any]:
    """Coefficients in ``x`` of ``polynomial(centre + x)``, midpoints."""
    return [x.mid() for x in polynomial(acb_poly([centre, 1]))]


def _reversed(polynomial: Any, degree: int) -> Any:
    """``r^-degree polynomial(r)`` as a polynomial in ``1/r``."""
    coefficients = list(polynomial)
    return acb_poly([_entry(coefficients, degree - k) for k in range(degree + 1)])


def _entry(coefficients: Sequence[Any], index: int) -> Any:
    return coefficients[index] if 0 <= index < len(coefficients) else acb(0)
