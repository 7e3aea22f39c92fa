"""Where the match may go: singular points, paths, and a check that no path crosses a cut.

The solutions of section "match" are defined on the real segment ``0 < u < 1``. Carried along
a complex path they are the same functions only if the closed curve "path + real segment"
winds about no root of ``f``: that is checked for every path, never assumed.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from knell.physics import polynomial
from knell.physics.equation import Equation


class PathError(ArithmeticError):
    """A path separates a root of ``f`` from the real segment, so its solutions are not the wanted ones."""


@dataclass(frozen=True)
class MatchRoute:
    """One way to carry the two solutions to a common point; two routes check each other.

    ``ray``: argument of ``u`` on which the outgoing solution leaves infinity.
    ``meeting``: the common point. ``ratio``: longest Taylor step in units of the distance
    to the nearest singular point. ``stiffness``: bound on ``|2σH/p| h``, without which the
    fast second solution eats the digits.
    """

    ray: float = -0.75 * np.pi
    meeting: complex = 0.5 - 0.2j
    ratio: float = 0.4
    stiffness: float = 2.0


MAIN_ROUTE = MatchRoute()
OTHER_ROUTE = MatchRoute(ray=-0.69 * np.pi, meeting=0.44 - 0.27j, ratio=0.33, stiffness=1.5)


def other_roots(equation: Equation) -> NDArray[np.complex128]:
    """Roots of ``f`` but the horizon ``u = 1``, in doubles; the horizon is divided out first."""
    quotient = polynomial.divide_by_root([float(x) for x in equation.f], 1.0)
    if equation.degenerate:
        quotient = polynomial.divide_by_root(quotient, 1.0)
    return np.roots(quotient[::-1]).astype(complex)


def horizon_gap(equation: Equation) -> float:
    """Distance from ``u = 1`` to the nearest other root of ``f`` (infinite when there is none)."""
    roots = other_roots(equation)
    return float(np.min(np.abs(roots - 1))) if roots.size else float("inf")


def outside_gap(equation: Equation) -> float:
    """Distance from ``u = 1`` to the next real root beyond it (infinite when there is none)."""
    beyond = [z.real for z in other_roots(equation) if abs(z.imag) < 1e-9 * abs(z) and z.real > 1]
    return min(beyond) - 1 if beyond else float("inf")


def winding_number(polygon: Sequence[complex], point: complex) -> int:
    """How often the closed polygon winds about a point that does not lie on it."""
    relative = np.asarray([*polygon, polygon[0]]) - point
    return round(float(np.sum(np.angle(relative[1:] / relative[:-1]))) / (2 * np.pi))


def check_homotopy(equation: Equation, vertices: Sequence[complex], end: int) -> None:
    """Raise `PathError` unless the path from the singular end (0 or 1) closes with the real segment
    about no root of ``f`` but the ends. The path may touch the real axis only inside the segment."""
    closed = [complex(end), *vertices, complex(0.5)]
    for root in other_roots(equation):
        if winding_number(closed, complex(root)) != 0:
            raise PathError(f"the path from u = {end} separates the root {root:.4g} of f from the real segment")
