"""The blind search: every zero of ``D`` in a window, found, polished, counted and sorted by side.

No seeds and no table of known values: tiles of the window give Taylor models of D, their roots
are polished together, and the winding of D round the window's outline counts what must be there.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from knell.methods.match.geometry import MAIN_ROUTE, MatchRoute
from knell.methods.match.region import Region, count_zeros
from knell.methods.match.solutions import Matcher
from knell.methods.match.tiles import Seed, Values, seeds
from knell.physics.equation import Equation
from knell.physics.landmarks import Window

Complexes = NDArray[np.complex128]

_MERGE = 1e-7
_POLISH_ROUNDS = 8
# The models' slopes are good to 1e-4 at least, so after a step of this size the next would be 1e-12.
_POLISHED = 1e-8


@dataclass(frozen=True)
class SearchResult:
    """Zeros of D in the region as ``Mω``, by damping, each with the last Newton step as ``error``.

    ``counted`` is the winding number round the region; the search is complete when it equals
    ``len(zeros)``. The region reaches a little past the axis: zeros with ``Re ω < 0`` belong to
    the continued sheet and are no modes.
    """

    zeros: Complexes
    error: NDArray[np.float64]
    counted: int

    @property
    def complete(self) -> bool:
        return self.counted == len(self.zeros)


def search(equation: Equation, window: Window, route: MatchRoute = MAIN_ROUTE) -> SearchResult:
    """All zeros of D in the window (``equation`` over doubles).

    Raises `Unresolved` or `NeedsPrecision` where doubles are not enough, `CountFailed` when
    the outline cannot be followed.
    """
    matcher, region = Matcher(equation, route), Region.of(window)
    to_sigma = 1j / float(equation.mass)

    def values(omega: Complexes, scale_at: Complexes) -> Complexes:
        return matcher.wronskian(omega * to_sigma, scale_at * to_sigma)

    polished, error = _polish(seeds(region, values), values)
    zeros, error = _merge(polished, error)
    inside = region.contains(zeros)
    counted = count_zeros(region, lambda omega: values(omega, omega))
    return SearchResult(zeros[inside], error[inside], counted)


def _polish(found: list[Seed], values: Values) -> tuple[Complexes, NDArray[np.float64]]:
    """Newton for all roots together; the slopes are those of the models, good to many digits already."""
    omega = np.asarray([seed.omega for seed in found], dtype=complex)
    slope = np.asarray([seed.slope for seed in found], dtype=complex)
    scale_at = np.asarray([seed.scale_at for seed in found], dtype=complex)
    error = np.full(omega.shape, np.inf)
    active = np.arange(omega.size)
    for _ in range(_POLISH_ROUNDS):
        if not active.size:
            break
        step = values(omega[active], scale_at[active]) / slope[active]
        omega[active] -= step
        size = np.abs(step)
        # Once rounding decides, steps stop shrinking: the last one is the error.
        done = (size < _POLISHED) | (size > 0.3 * error[active]) & (size < 1e-5)
        error[active] = size
        active = active[~done]
    return omega, error


def _merge(omega: Complexes, error: NDArray[np.float64]) -> tuple[Complexes, NDArray[np.float64]]:
    """One entry per zero, in order of damping; neighbouring tiles see the same root twice."""
    order = np.lexsort((omega.real, -omega.imag))
    kept: list[int] = []
    for i in order:
        if all(abs(omega[i] - omega[j]) > _MERGE for j in kept):
            kept.append(int(i))
    return omega[kept], error[kept]
