"""The region of the ``Mω`` plane that a search covers, its outline, and the zeros counted inside."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from knell.physics.landmarks import Window

# How far the region reaches past the negative imaginary axis, so that a zero a hair on either side
# of it is seen, counted and put on its side.
PAST_THE_AXIS = 0.02
_SPACING = 0.02
_TURN = 1.0
_ROUNDS = 10
_PARTS = 3
_FINEST = 1e-10


class CountFailed(ArithmeticError):
    """The argument of D along the outline could not be followed; there is no count, not a smaller one."""


@dataclass(frozen=True)
class Region:
    """``-PAST_THE_AXIS <= Re Mω <= right``, ``-depth <= Im Mω <= 0`` less the corner about the branch point 0.

    The corner is what has ``Re Mω < hole`` and ``Im Mω > -hole``.
    """

    right: float
    depth: float
    hole: float
    left: float = -PAST_THE_AXIS

    @classmethod
    def of(cls, window: Window) -> Region:
        return cls(float(window.re_max), float(window.depth), float(window.excluded))

    def contains(self, omega: NDArray[np.complex128]) -> NDArray[np.bool_]:
        x, y = omega.real, omega.imag
        outside_corner = (x >= self.hole) | (y <= -self.hole)
        return (x > self.left) & (x <= self.right) & (y >= -self.depth) & (y <= 0) & outside_corner

    @property
    def outline(self) -> list[complex]:
        """Corners, counter-clockwise."""
        left = self.left
        return [
            complex(left, -self.depth),
            complex(self.right, -self.depth),
            complex(self.right, 0.0),
            complex(self.hole, 0.0),
            complex(self.hole, -self.hole),
            complex(left, -self.hole),
        ]


def winding(region: Region, logarithms: Callable[[NDArray[np.complex128]], NDArray[np.complex128]]) -> int:
    """Zeros less poles, in the region, of a function that is meromorphic there: how often it winds along the outline.

    ``logarithms(ω)`` gives logarithms of its values, on any branch. Points are added until the argument turns
    by less than one radian between neighbours; what lies nearest to the outline decides how many.
    Raises `CountFailed` where that does not happen.
    """
    points = np.concatenate([_between(a, b) for a, b in pairwise([*region.outline, region.outline[0]])])
    argument = logarithms(points).imag
    for _ in range(_ROUNDS):
        turns = np.angle(np.exp(1j * (np.roll(argument, -1) - argument)))
        wide = ~(np.abs(turns) <= _TURN)
        if not np.any(wide):
            return round(float(np.sum(turns)) / (2 * np.pi))
        # A long turn may hide a full one, and so may its neighbours: refine them too.
        at = np.flatnonzero(wide | np.roll(wide, 1) | np.roll(wide, -1))
        gap = (np.roll(points, -1)[at] - points[at]) / (_PARTS + 1)
        if np.min(np.abs(gap)) < _FINEST:
            break
        added = (points[at] + gap * np.arange(1, _PARTS + 1)[:, None]).T.ravel()
        points = np.insert(points, np.repeat(at + 1, _PARTS), added)
        argument = np.insert(argument, np.repeat(at + 1, _PARTS), logarithms(added).imag)
    raise CountFailed("the argument of D could not be followed along the outline")


def _between(a: complex, b: complex) -> NDArray[np.complex128]:
    """Points from ``a`` to ``b``, without ``b``."""
    pieces = max(2, int(np.ceil(abs(b - a) / _SPACING)))
    return a + (b - a) * np.arange(pieces) / pieces
