"""The two physical solutions at the meeting point, and their Wronskian ``D(σ)``, in doubles.

``φ_∞`` is the outgoing solution, normalised to 1 at ``u = 0``; ``φ_h`` the ingoing one,
normalised to 1 at ``u = 1``; both are smooth at their end. ``D = φ_∞ φ_h' - φ_∞' φ_h`` at the
meeting point vanishes at the modes. ``φ_h`` has poles at ``ω = -i j κ_s``; with the factor
``1/Γ(1 - 2σ/p₁)``, ``p₁ = |f_u(1)|``, D is analytic across the negative imaginary axis, and a
zero that crosses it can be followed. A degenerate horizon has no such poles and no factor.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from knell.methods.match import transport
from knell.methods.match.gamma import log_reciprocal_gamma
from knell.methods.match.geometry import MAIN_ROUTE, MatchRoute, check_homotopy, horizon_gap, other_roots, outside_gap
from knell.methods.match.series import Complexes, coefficients, operator_beyond, operator_of
from knell.physics import polynomial
from knell.physics.equation import Equation, local

INFINITY_TERMS = 45
HORIZON_TERMS = 60
BEYOND_TERMS = 170
# Frequencies in one pass: more of them fall out of the processor's cache, fewer waste calls (measured: 200 is too few).
BATCH = 800
# Below this distance to the next root the plain horizon series loses its digits to cancellation.
SMALL_GAP = 0.35


class NeedsPrecision(ArithmeticError):
    """Doubles cannot carry the horizon series here: extended precision is needed."""


@dataclass(frozen=True)
class Matcher:
    """Evaluates ``D`` for one equation over doubles, along one route."""

    equation: Equation
    route: MatchRoute = MAIN_ROUTE

    @cached_property
    def roots(self) -> Complexes:
        return other_roots(self.equation)

    @cached_property
    def horizon_slope(self) -> float:
        """``p₁ = |f_u(1)|``, twice the surface gravity in units of r_h; zero when degenerate."""
        if self.equation.degenerate:
            return 0.0
        return abs(polynomial.evaluate(polynomial.derivative(self.equation.f), 1.0))

    def outgoing(self, sigma: Complexes) -> tuple[Complexes, Complexes]:
        """``φ_∞`` and its slope at the meeting point, shape of ``sigma`` (one-dimensional)."""
        size = np.abs(sigma)
        start = np.minimum(2 * size / INFINITY_TERMS, 0.25)
        direction = np.exp(1j * self.route.ray)
        one = np.ones_like(sigma)
        plain, moment = coefficients(
            operator_of(local(self.equation, 0)), sigma, start * direction, [one], 1, INFINITY_TERMS
        )
        value, slope = plain.sum(axis=0), moment.sum(axis=0) / (start * direction)
        knee = 0.5 * direction
        arc = [0.5 * np.exp(1j * a) for a in np.linspace(self.route.ray, np.angle(self.route.meeting), 9)[1:-1]]
        targets = [*arc, self.route.meeting]
        check_homotopy(self.equation, [knee, *targets], 0)
        value, slope = transport.along_each(
            self.equation, self.roots, sigma, start * direction, np.log(0.5 / start), 0, knee, value, slope, self.route
        )
        return transport.along(self.equation, self.roots, sigma, knee, targets, value, slope, self.route)

    def ingoing(self, sigma: Complexes) -> tuple[Complexes, Complexes]:
        """``φ_h`` and its slope in ``u`` at the meeting point."""
        if self.equation.degenerate:
            return self._degenerate(sigma)
        if min(outside_gap(self.equation), 10.0) < SMALL_GAP:
            return self._near_extremal(sigma)
        x_meeting = 1 - self.route.meeting
        x = 0.4 * min(1.0, horizon_gap(self.equation)) * x_meeting / abs(x_meeting)
        plain, moment = coefficients(
            operator_of(local(self.equation, 1, -1)), sigma, x, [np.ones_like(sigma)], 1, HORIZON_TERMS
        )
        targets = [self.route.meeting]
        check_homotopy(self.equation, [1 - x, *targets], 1)
        return transport.along(
            self.equation, self.roots, sigma, 1 - x, targets, plain.sum(axis=0), -moment.sum(axis=0) / x, self.route
        )

    def _near_extremal(self, sigma: Complexes) -> tuple[Complexes, Complexes]:
        gap = outside_gap(self.equation)
        # The series in y converges up to the nearest image of u = 0, of u = ∞ (y = 1) and of the other roots.
        others = 1 - np.array([0.0, *(z for z in self.roots if abs(z - 1 - gap) > 1e-9 * gap)])
        reach = min(1.0, float(np.min(np.abs(others / (others + gap)))))
        y = 0.75 * reach * np.exp(-0.4j)
        operator = operator_beyond(local(self.equation, 1, -1), gap, BEYOND_TERMS)
        plain, moment = coefficients(operator, sigma, y, [np.ones_like(sigma)], 1, BEYOND_TERMS)
        value, slope_y = plain.sum(axis=0), moment.sum(axis=0) / y
        if np.any(np.abs(plain[-1]) > 1e-13 * np.abs(value)):
            raise NeedsPrecision("the horizon series has not converged")
        x, x_meeting = gap * y / (1 - y), 1 - self.route.meeting
        vertices = [1 - x * (x_meeting / x) ** s for s in np.linspace(0, 1, 9)[1:-1]]
        targets = [*vertices, self.route.meeting]
        check_homotopy(self.equation, [1 - x, *targets], 1)
        slope = -slope_y * (1 - y) ** 2 / gap
        return transport.along(self.equation, self.roots, sigma, 1 - x, targets, value, slope, self.route)

    def _degenerate(self, sigma: Complexes) -> tuple[Complexes, Complexes]:
        curvature = 0.5 * polynomial.evaluate(
            polynomial.derivative(polynomial.derivative(self.equation.f)), 1.0
        )  # f = curvature (1-u)² + …
        size = np.minimum(2 * np.abs(sigma) / INFINITY_TERMS, 0.25) / max(curvature, 1.0)
        x = size * np.exp(-0.75j * np.pi)
        plain, moment = coefficients(
            operator_of(local(self.equation, 1, -1)), sigma, x, [np.ones_like(sigma)], 1, INFINITY_TERMS
        )
        value, slope = plain.sum(axis=0), -moment.sum(axis=0) / x
        x_meeting = 1 - self.route.meeting
        spiral = np.log(abs(x_meeting) / size) + 1j * (np.angle(x_meeting) + 0.75 * np.pi)
        longest = np.argmax(np.abs(spiral))
        vertices = 1 - x[longest] * np.exp(spiral[longest] * np.linspace(0, 1, 60))
        check_homotopy(self.equation, list(vertices), 1)
        return transport.along_each(
            self.equation, self.roots, sigma, 1 - x, spiral, 1, self.route.meeting, value, slope, self.route
        )

    def _cross_product(self, sigma: Complexes) -> Complexes:
        value, slope = self.outgoing(sigma)
        value_h, slope_h = self.ingoing(sigma)
        return value * slope_h - slope * value_h

    def wronskian(self, sigma: Complexes, scale_at: Complexes | None = None) -> Complexes:
        """``D(σ)`` times ``1/Γ(1 - 2σ/p₁)``, divided by the factor's modulus at ``scale_at``.

        The division (default: at ``σ`` itself) keeps the factor in range near the extremal end;
        values are samples of one analytic function where ``scale_at`` is the same.
        """
        if not self.equation.degenerate:
            sigma = _off_poles(sigma, self.horizon_slope)
        batches = np.array_split(sigma, max(1, -(-sigma.size // BATCH)))
        D = np.concatenate([self._cross_product(batch) for batch in batches])
        if self.equation.degenerate:
            return D
        reference = sigma if scale_at is None else scale_at
        p1 = self.horizon_slope
        return D * np.exp(log_reciprocal_gamma(1 - 2 * sigma / p1) - _log_scale(1 - 2 * reference / p1))


def _off_poles(sigma: Complexes, p1: float) -> Complexes:
    """``σ`` moved by 1e-9 of the spacing off the poles of ``φ_h``, where the product D is a limit."""
    order = 2 * sigma / p1
    near = (np.abs(order - np.round(order.real)) < 1e-9) & (order.real > 0.5)
    return np.where(near, sigma + 5e-10 * p1, sigma)


def _log_scale(z: Complexes) -> np.ndarray:
    """A smooth stand-in for the modulus of 1/Γ, never infinite: Stirling's for ``|z| + 1``."""
    size = np.abs(z) + 1
    return np.where(z.real < 0, size * np.log(size) - size, -(size * np.log(size) - size))
