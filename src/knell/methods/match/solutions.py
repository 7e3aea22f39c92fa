"""The two physical solutions at the meeting point, and their Wronskian ``D(σ)``, in doubles.

``φ_∞`` is the outgoing solution, normalised to 1 at ``u = 0``; ``φ_h`` the ingoing one,
normalised to 1 at ``u = 1``; both are smooth at their end. ``D = φ_∞ φ_h' - φ_∞' φ_h`` at the
meeting point vanishes at the modes. ``φ_h`` has poles at ``ω = -i j κ_s``, ``j = 1, 2, …``, that
is at ``s = 2σ/p₁ = j`` with ``p₁ = |f_u(1)|``; with the factor ``1/Γ(1 - s)`` D is analytic across
the negative imaginary axis, and a zero that crosses it can be followed. A degenerate horizon has
no such poles and no factor.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from knell.methods.match import transport
from knell.methods.match.beyond import horizon_series
from knell.methods.match.gamma import log_reciprocal_gamma
from knell.methods.match.geometry import (
    KNEE,
    MAIN_ROUTE,
    MatchRoute,
    check_homotopy,
    horizon_gap,
    other_roots,
    outside_gap,
    spiral,
)
from knell.methods.match.series import Complexes, coefficients, operator_of
from knell.physics import polynomial
from knell.physics.equation import Equation, local

INFINITY_TERMS = 45
HORIZON_TERMS = 60
LONGEST_START = 0.25
# Below this distance to the next root the series in 1-u reaches too short a way.
SMALL_GAP = 0.35
# Near the extremal end: errors may grow by e^9 on leaving the series, which takes some 4s terms for that;
# where s is below 30, some 130 terms are enough for less.
AMPLIFICATION = 9.0
FASTEST_FALL = 0.29
# Argument of -y where the series is left. A larger one starts further in, from where errors grow more.
TURN = 0.1


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
        start = np.minimum(2 * np.abs(sigma) / INFINITY_TERMS, LONGEST_START)
        u = start * np.exp(1j * self.route.ray)
        operator = operator_of(local(self.equation, 0))
        plain, moment = coefficients(operator, sigma, u, [np.ones_like(sigma)], 1, INFINITY_TERMS)
        data = plain.sum(axis=0), moment.sum(axis=0) / u
        knee, targets = self.route.knee, self.route.outgoing
        check_homotopy(self.equation, [knee, *targets], 0)
        to_knee = np.log(KNEE / start)
        data = transport.along_each(self.equation, self.roots, sigma, u, to_knee, 0, knee, *data, self.route)
        return transport.along(self.equation, self.roots, sigma, knee, targets, *data, self.route)

    def ingoing(self, sigma: Complexes) -> tuple[Complexes, Complexes]:
        """``φ_h`` and its slope in ``u`` at the meeting point."""
        if self.equation.degenerate:
            return self._from_degenerate_horizon(sigma)
        if outside_gap(self.equation) < SMALL_GAP:
            return self._from_beyond(sigma)
        x = 0.4 * min(1.0, horizon_gap(self.equation)) * self.route.from_horizon
        operator = operator_of(local(self.equation, 1, -1))
        plain, moment = coefficients(operator, sigma, x, [np.ones_like(sigma)], 1, HORIZON_TERMS)
        return self._to_meeting(sigma, [1 - x, self.route.meeting], plain.sum(axis=0), -moment.sum(axis=0) / x)

    def _from_beyond(self, sigma: Complexes) -> tuple[Complexes, Complexes]:
        """Near the extremal end: a series past the next root, long enough for the largest ``s``."""
        gap = outside_gap(self.equation)
        # It converges up to the nearest image of u = 0, of u = ∞ (y = 1) and of the other roots.
        others = 1 - np.array([0.0, *(z for z in self.roots if abs(z - 1 - gap) > 1e-9 * gap)])
        reach = min(1.0, float(np.min(np.abs(others / (others + gap)))))
        fall = min(FASTEST_FALL, AMPLIFICATION / max(2 * float(np.max(sigma.real)) / self.horizon_slope, 1.0))
        y = reach * np.exp(-fall - 1j * TURN)
        value, moment = horizon_series(local(self.equation, 1, -1), gap, sigma, y)
        path = spiral(gap * y / (1 - y), self.route)
        return self._to_meeting(sigma, path, value, -moment / y * (1 - y) ** 2 / gap)

    def _to_meeting(
        self, sigma: Complexes, path: list[complex], value: Complexes, slope: Complexes
    ) -> tuple[Complexes, Complexes]:
        check_homotopy(self.equation, path, 1)
        return transport.along(self.equation, self.roots, sigma, path[0], path[1:], value, slope, self.route)

    def _from_degenerate_horizon(self, sigma: Complexes) -> tuple[Complexes, Complexes]:
        second = polynomial.derivative(polynomial.derivative(self.equation.f))
        curvature = 0.5 * polynomial.evaluate(second, 1.0)  # f = curvature (1-u)² + …
        size = np.minimum(2 * np.abs(sigma) / (INFINITY_TERMS * max(curvature, 1.0)), LONGEST_START)
        x = size * np.exp(-0.75j * np.pi)
        operator = operator_of(local(self.equation, 1, -1))
        plain, moment = coefficients(operator, sigma, x, [np.ones_like(sigma)], 1, INFINITY_TERMS)
        data = plain.sum(axis=0), -moment.sum(axis=0) / x
        x_meeting = 1 - self.route.meeting
        log_way = np.log(abs(x_meeting) / size) + 1j * (np.angle(x_meeting) + 0.75 * np.pi)
        longest = int(np.argmax(np.abs(log_way)))
        check_homotopy(self.equation, list(1 - x[longest] * np.exp(log_way[longest] * np.linspace(0, 1, 60))), 1)
        return transport.along_each(
            self.equation, self.roots, sigma, 1 - x, log_way, 1, self.route.meeting, *data, self.route
        )

    def log_plain_wronskian(self, sigma: Complexes) -> Complexes:
        """A logarithm (any branch) of ``D(σ)`` without the factor ``1/Γ(1 - s)``; ``-inf`` at a zero."""
        value, slope = self.outgoing(sigma)
        value_h, slope_h = self.ingoing(sigma)
        with np.errstate(divide="ignore"):
            return np.log(value * slope_h - slope * value_h)

    def log_wronskian(self, sigma: Complexes) -> Complexes:
        """A logarithm (any branch) of ``D(σ)/Γ(1 - s)``: a logarithm, for near the extremal end Γ leaves the range."""
        if self.equation.degenerate:
            return self.log_plain_wronskian(sigma)
        sigma = off_poles(sigma, self.horizon_slope)
        return self.log_plain_wronskian(sigma) + log_reciprocal_gamma(1 - 2 * sigma / self.horizon_slope)

    def wronskian(self, sigma: Complexes, scale_at: Complexes | None = None) -> Complexes:
        """``D(σ)/Γ(1 - s)``, divided by the factor's modulus at ``scale_at`` (default: at ``σ`` itself).

        Values are samples of one analytic function where ``scale_at`` is the same.
        """
        log = self.log_wronskian(sigma)
        if not self.equation.degenerate:
            log = log - _log_scale(1 - 2 * (sigma if scale_at is None else scale_at) / self.horizon_slope)
        return np.exp(log)


def off_poles(sigma: Complexes, p1: float) -> Complexes:
    """``σ`` moved by 1e-9 of the spacing off the poles of ``φ_h``, where the product D/Γ is a limit."""
    order = 2 * sigma / p1
    near = (np.abs(order - np.round(order.real)) < 1e-9) & (order.real > 0.5)
    return np.where(near, sigma + 5e-10 * p1, sigma)


def _log_scale(z: Complexes) -> NDArray[np.float64]:
    """A smooth stand-in for the modulus of 1/Γ, never infinite: Stirling's for ``|z| + 1``."""
    size = np.abs(z) + 1
    return np.where(z.real < 0, 1.0, -1.0) * (size * np.log(size) - size)
