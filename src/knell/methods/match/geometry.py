"""Where the match may go: singular points, routes, and a check that no path crosses a cut.

The two solutions are defined on the real segment ``0 < u < 1``. Carried along a complex path
they are the same functions only if the closed curve "path + real segment" winds about no root
of ``f``: that is checked for every path, never assumed.

How well a route does is read off the tortoise coordinate. Beside the negative imaginary axis the
outgoing and the ingoing wave differ by ``e^(2σr*)``, so where ``σ Re r*`` is large both solutions
are all but parallel to the one that grows there, and what tells them apart is lost. A path inside the
lower unit half disc cannot avoid ``Re r* ≈ 1``; one that passes outside it, through ``u ≈ -1.4i``
(``r`` near 0), stays at ``|Re r*| < 0.3``. *Measured*, Schwarzschild, ``Mω = 0.01 - 8.03i``: the two
solutions are parallel to 4e-24 at ``0.5 - 0.2i`` and to 0.1 at ``1 - 0.6i``.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from knell.physics import polynomial
from knell.physics.equation import Equation

# Up to this |u| the outgoing solution keeps to the ray.
KNEE = 0.5
_ARC_PIECES = 8
_SPIRAL_PIECE = 0.35


class PathError(ArithmeticError):
    """A path separates a root of ``f`` from the real segment, so its solutions are not the wanted ones."""


@dataclass(frozen=True)
class MatchRoute:
    """One way to carry the two solutions to a common point; two routes check each other.

    ``ray``: argument of ``u`` on which the outgoing solution leaves infinity, up to ``|u| = 1/2``.
    ``meeting``: the common point. ``through``: vertices between the two; none means along the circle
    ``|u| = 1/2``. ``ratio``: longest Taylor step in units of the distance to the nearest
    singular point. ``stiffness``: bound on ``|2σH/p| h``, without which the fast second solution eats
    the digits.
    """

    ray: float = -0.75 * np.pi
    meeting: complex = 0.5 - 0.2j
    through: tuple[complex, ...] = ()
    ratio: float = 0.4
    stiffness: float = 2.0

    @property
    def knee(self) -> complex:
        return complex(KNEE * np.exp(1j * self.ray))

    @property
    def outgoing(self) -> list[complex]:
        """Vertices of the outgoing solution's path after the knee, the meeting point last."""
        angles = np.linspace(self.ray, np.angle(self.meeting), _ARC_PIECES + 1)[1:-1]
        arc = [complex(KNEE * np.exp(1j * angle)) for angle in angles]
        return [*(self.through or arc), self.meeting]

    @property
    def from_horizon(self) -> complex:
        """Direction in ``x = 1 - u`` from the horizon to the meeting point."""
        return (1 - self.meeting) / abs(1 - self.meeting)


MAIN_ROUTE = MatchRoute()
OTHER_ROUTE = MatchRoute(ray=-0.69 * np.pi, meeting=0.44 - 0.27j, ratio=0.33, stiffness=1.5)
DEEP_ROUTE = MatchRoute(through=(-1.4j, 0.6 - 1.1j), meeting=1 - 0.6j)


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


def spiral(x: complex, route: MatchRoute) -> list[complex]:
    """Vertices in ``u`` of the logarithmic spiral in ``1 - u`` from ``x`` to the meeting point, both included.

    It turns the way that does not pass through negative ``x``: counter-clockwise from below.
    """
    target = 1 - route.meeting
    way = complex(np.log(abs(target / x)), np.angle(target) - np.angle(x))
    pieces = max(1, int(np.ceil(abs(way) / _SPIRAL_PIECE)))
    return [*(complex(1 - x * np.exp(way * k / pieces)) for k in range(pieces)), route.meeting]


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
