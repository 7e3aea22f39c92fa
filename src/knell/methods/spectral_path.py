"""Polygonal paths from infinity ``u = 0`` to the horizon ``u = 1`` for the spectral method.

On a straight side the coefficients of the equation stay polynomials of their own low
degree, and each side carries a Chebyshev series of its own, so the path may turn as the
geometry asks. The rule, with ``t`` the tilt and ``δ`` the distance from the horizon to the
next root of ``f``:

- the path leaves ``u = 0`` to ``0.5 exp(-it)``, where the other solution, ``exp(-2σ/u)``, grows towards ``u = 0``
  for every wanted ``σ``: it is that growth which tells the two apart;
- a degenerate horizon is irregular too and mirrors this: the last corner is ``1 - 0.3 exp(-it)``, above the axis;
- at a simple horizon the other solution is ``(1-u)^(2σ/|f'(1)|)``, which a short last side tells apart: few
  polynomials represent the wanted solution there, and none the power. The last corner is ``1 - min(0.3, 0.8 δ)``;
- a nearly degenerate horizon, ``δ < 0.15``, looks degenerate from afar. The path comes in from above, over
  ``1 - 0.2 exp(-iπ/4)`` and ``1 + 0.8 iδ``. Here and above the last corner turns with the tilt about ``u = 1``;
- an inner side is halved as long as that lowers the number of coefficients it takes.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise
from math import lgamma, log, log10, pi

import numpy as np

from knell.physics import polynomial
from knell.physics.equation import Equation

TILT = 5 * pi / 12
OTHER_TILT = pi / 3
_FAR = 0.5
_NEAR = 0.3
_SHARE = 0.8
_NARROW = 0.15
_ABOVE = 0.2


class PathError(ValueError):
    """The path does not join infinity to the horizon as the boundary conditions ask."""


@dataclass(frozen=True)
class Path:
    """Corners in ``u``, the first 0 and the last 1, with what the equation says about them.

    ``singular`` are its singular points. With ``x = 1 - u`` and ``c`` the ``steepness``, the second solution at the
    horizon is ``x^(2σ/c)``, ``c = |f'(1)|``, or ``exp(-2σ/cx)``, ``c = f''(1)/2``, where that is ``degenerate``.
    """

    corners: tuple[complex, ...]
    singular: tuple[complex, ...]
    steepness: float
    degenerate: bool

    @property
    def sides(self) -> list[tuple[complex, complex]]:
        return list(pairwise(self.corners))


def singular_points(equation: Equation) -> tuple[complex, ...]:
    """``u = 0``, ``u = 1`` and the other roots of ``f``, nearest to the horizon first."""
    f = np.array([complex(x) for x in equation.f])
    for _ in range(2 if equation.degenerate else 1):  # divide by (1 - u): partial sums
        f = np.cumsum(f)[:-1]
    others = sorted(np.roots(np.trim_zeros(f, "b")[::-1]), key=lambda z: abs(z - 1))
    return (0j, 1 + 0j, *(complex(z) for z in others))


def bernstein(left: complex, right: complex, point: complex) -> float:
    """``ρ`` of the ellipse with foci ``left``, ``right`` through ``point``: coefficients fall as ``ρ^-k``."""
    z = (2 * point - left - right) / (right - left)
    root = np.sqrt(complex(z * z - 1))
    return float(max(abs(z + root), abs(z - root)))


def bent_path(equation: Equation, tilt: float = TILT) -> Path:
    """The path of the module's rule, ``tilt`` in radians; ``equation`` over doubles.

    Raises `PathError` when a root of ``f`` other than the horizon lies between it and the real segment.
    """
    singular, slope = singular_points(equation), polynomial.derivative(equation.f)
    steepness = (
        polynomial.evaluate(polynomial.derivative(slope), 1) / 2
        if equation.degenerate
        else polynomial.evaluate(slope, 1)
    )
    turns = [_FAR * _turn(-tilt), *_horizon_corners(singular, equation.degenerate, tilt)]
    inner = [turns[0]]
    for left, right in pairwise(turns):
        inner += _halved(left, right, singular)[1:]
    path = Path((0j, *inner, 1 + 0j), singular, abs(float(steepness)), equation.degenerate)
    for root in singular[2:]:
        if _winding(path.corners, root) != 0:
            raise PathError(f"the root {root:.6g} of f lies between the path and the real segment: take a smaller tilt")
    return path


def _turn(angle: float) -> complex:
    return complex(np.exp(1j * angle))


def _horizon_corners(singular: tuple[complex, ...], degenerate: bool, tilt: float) -> list[complex]:
    """The last corners, before the horizon itself."""
    if degenerate:
        return [1 - _NEAR * _turn(-tilt)]
    gap = min((abs(z - 1) for z in singular[2:]), default=1.0)
    if gap > _NARROW:
        return [1 - min(_NEAR, _SHARE * gap) * _turn(tilt - TILT)]
    return [1 - _ABOVE * _turn(-pi / 4), 1 - _SHARE * gap * _turn(tilt - TILT - pi / 2)]


def orders(path: Path, digits: float, frequencies: tuple[float, float]) -> tuple[int, ...]:
    """Degree of the series on each side for a truncation of about ``10^-digits``.

    ``frequencies``: the least and the greatest ``|σ|`` wanted. On inner sides coefficients fall as ``ρ^-k``. On a side
    of length ``L`` that ends in an irregular point with second solution ``exp(-2σ/cx)`` they fall as
    ``exp(-2.38 (4|σ|/cL)^(1/3) k^(2/3))`` (saddle point of ``-2σ/cx - k arcosh``), slowest for the least ``|σ|``.
    Beside a simple horizon the nearest root of ``f`` carries about the power ``-s = -2σ/|f'(1)|``, so that they fall as
    ``(k+s)!/(k! s!) ρ^-k``; telling the solution apart from ``(1-u)^s`` costs about the same factor again.
    """
    least, greatest = frequencies
    counts = []
    for left, right in path.sides:
        cost = _side_cost(left, right, path.singular)
        count, length = digits * cost, abs(right - left)
        if left == 0:
            count = max(count, _irregular_order(digits, least / length))
        elif right == 1 and path.degenerate:
            count = max(count, _irregular_order(digits, least / (path.steepness * length)))
        elif right == 1:
            count = _regular_order(digits, cost, 2 * greatest / path.steepness)
        counts.append(int(count) + 4)
    return tuple(counts)


def _regular_order(digits: float, cost: float, power: float) -> int:
    order = 4
    while order / cost - 2 * (lgamma(order + power + 1) - lgamma(order + 1) - lgamma(power + 1)) / log(10) < digits:
        order += 1
    return order


def _irregular_order(digits: float, strength: float) -> float:
    return (digits * log(10) / (2.38 * (4 * strength) ** (1 / 3))) ** 1.5


def _side_cost(left: complex, right: complex, singular: tuple[complex, ...]) -> float:
    """Coefficients per digit: ``1/log10 ρ`` of the nearest singular point that is not an end of the side."""
    return 1 / log10(min(bernstein(left, right, z) for z in singular if z not in (left, right)))


def _halved(left: complex, right: complex, singular: tuple[complex, ...]) -> list[complex]:
    """Corners from ``left`` to ``right``, a side halved while its halves together are cheaper."""
    middle = (left + right) / 2
    halves = _side_cost(left, middle, singular) + _side_cost(middle, right, singular)
    if _side_cost(left, right, singular) <= halves:
        return [left, right]
    return _halved(left, middle, singular)[:-1] + _halved(middle, right, singular)


def _winding(corners: tuple[complex, ...], point: complex) -> int:
    """Winding number of the closed polygon (the real segment closes it) about ``point``."""
    around = [*corners, corners[0]]
    turns = sum(float(np.angle((b - point) / (a - point))) for a, b in pairwise(around))
    return round(turns / (2 * pi))
