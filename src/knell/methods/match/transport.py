"""Carrying solutions along a path by Taylor steps, many frequencies at once."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from knell.methods.match.geometry import MatchRoute
from knell.methods.match.series import Complexes, coefficients, operator_at
from knell.physics import polynomial
from knell.physics.equation import Equation

TAYLOR_TERMS = 36
# Leaving a singular end the second solution dies along the way, so what a longer step loses is not
# carried on; longer steps with a few more terms are the cheaper ones there.
LEAVING_TERMS = 46
LEAVING_STIFFNESS = 2.0


def longest_step(
    equation: Equation, roots: Complexes, u: NDArray, largest: NDArray | float, route: MatchRoute
) -> NDArray:
    """The step allowed at ``u``: a fraction of the distance to a singular point, and ``|2σH/p| h <= stiffness``."""
    distance = np.minimum(np.abs(u), np.abs(u - 1))
    for root in roots:
        distance = np.minimum(distance, np.abs(u - root))
    growth = np.abs(2 * largest * polynomial.evaluate(equation.H, u) / polynomial.evaluate(equation.p, u))
    return np.minimum(route.ratio * distance, route.stiffness / np.maximum(growth, 1e-300))


def taylor_step(
    equation: Equation,
    sigma: Complexes,
    u: complex | Complexes,
    h: complex | Complexes,
    value: Complexes,
    slope: Complexes,
    terms: int,
) -> tuple[Complexes, Complexes]:
    """``φ`` and ``φ_u`` at ``u + h`` from those at ``u``; ``u`` and ``h`` are shared or one per frequency."""
    plain, moment = coefficients(operator_at(equation, u), sigma, h, [value, slope * h], 2, terms)
    return plain.sum(axis=0), moment.sum(axis=0) / h


def along(
    equation: Equation,
    roots: Complexes,
    sigma: Complexes,
    start: complex,
    targets: Iterable[complex],
    value: Complexes,
    slope: Complexes,
    route: MatchRoute,
) -> tuple[Complexes, Complexes]:
    """Carry ``φ``, ``φ_u`` from ``start`` along straight lines through ``targets``, steps shared by all ``σ``."""
    largest = float(np.max(np.abs(sigma)))
    u = complex(start)
    for target in targets:
        while u != target:
            allowed = float(longest_step(equation, roots, np.asarray(u), largest, route))
            left = target - u
            pieces = max(1, int(np.ceil(abs(left) / allowed)))
            h = left / pieces if pieces <= 2 else allowed * left / abs(left)
            value, slope = taylor_step(equation, sigma, u, h, value, slope, TAYLOR_TERMS)
            u = complex(target) if pieces == 1 else u + h
    return value, slope


def along_each(
    equation: Equation,
    roots: Complexes,
    sigma: Complexes,
    start: Complexes,
    spiral: complex,
    centre: int,
    target: complex,
    value: Complexes,
    slope: Complexes,
    route: MatchRoute,
) -> tuple[Complexes, Complexes]:
    """Carry each frequency from its own ``start`` to one ``target`` on a logarithmic spiral about ``centre``.

    ``spiral = log(x_target / x_start)`` per frequency, ``x = u - centre``; a purely real value is a
    straight ray. Each frequency takes its own steps; those that have arrived rest.
    """
    route = replace(route, stiffness=LEAVING_STIFFNESS * route.stiffness)
    x, aim = start - centre, complex(target - centre)
    log_left = np.asarray(spiral, dtype=complex) + 0 * x
    direction = log_left / np.maximum(np.abs(log_left), 1e-300)
    active = np.arange(sigma.size)
    value, slope = value.copy(), slope.copy()
    while active.size:
        u = x[active] + centre
        allowed = longest_step(equation, roots, u, np.abs(sigma[active]), route)
        fraction = allowed / np.abs(x[active])
        arriving = np.abs(log_left[active]) <= fraction
        move = np.where(arriving, log_left[active], direction[active] * fraction)
        target_x = np.where(arriving, aim, x[active] * np.exp(move))
        h = target_x - x[active]
        value[active], slope[active] = taylor_step(
            equation, sigma[active], u, h, value[active], slope[active], LEAVING_TERMS
        )
        x[active] = target_x
        log_left[active] -= move
        active = active[~arriving]
    return value, slope
