"""The blind search: every zero of ``D`` in a window, found, polished, counted and sorted by side.

No seeds and no table of known values: tiles of the window give Taylor models of D, their roots
are polished together, and the winding of D round the window's outline counts what must be there.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from knell.methods.match.geometry import MAIN_ROUTE, MatchRoute
from knell.methods.match.region import PAST_THE_AXIS, Region, winding
from knell.methods.match.solutions import Matcher, off_poles
from knell.methods.match.tiles import Logarithms, Seed, seeds
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


def search(
    equation: Equation, window: Window, route: MatchRoute = MAIN_ROUTE, extended: Logarithms | None = None
) -> SearchResult:
    """All zeros of D in the window (``equation`` over doubles).

    Where doubles are noise, ``extended`` gives logarithms of D in more precision. Raises `Unresolved` or
    `NeedsPrecision` where there is none and doubles are not enough, `CountFailed` when
    the outline cannot be followed.
    """
    matcher, region = Matcher(equation, route), Region.of(window)
    to_sigma = 1j / float(equation.mass)

    def logarithms(omega: Complexes) -> Complexes:
        return matcher.log_wronskian(omega * to_sigma)

    polished, error = _polish(seeds(region, logarithms, extended), logarithms)
    zeros, error = _merge(polished, error)
    inside = region.contains(zeros)
    return SearchResult(zeros[inside], error[inside], count(matcher, region))


def count(matcher: Matcher, region: Region) -> int:
    """Zeros of ``D/Γ(1 - s)`` in the region: the winding of D and the number of its poles ``s = 1, 2, …``.

    Near the extremal end the argument of Γ turns too fast to be followed. Poles next to where the
    outline crosses the axis are multiplied out.
    """
    to_sigma = 1j / float(matcher.equation.mass)
    spacing = matcher.horizon_slope / 2 * float(matcher.equation.mass)
    depths = spacing * np.arange(1, int(region.depth / spacing) + 3) if spacing else np.zeros(0)
    reach = max(1.5 * spacing, PAST_THE_AXIS)
    near = (np.abs(depths - region.depth) < reach) | (np.abs(depths - region.hole) < reach)
    inside = (depths > region.hole) & (depths <= region.depth)

    def logarithms(omega: Complexes) -> Complexes:
        sigma = off_poles(omega * to_sigma, matcher.horizon_slope) if spacing else omega * to_sigma
        factors = sigma / to_sigma - -1j * depths[near, None]
        return matcher.log_plain_wronskian(sigma) + np.sum(np.log(factors), axis=0)

    # A factor put in for a pole outside adds no zero inside.
    return winding(region, logarithms) + int(np.sum(inside & ~near))


def _polish(found: list[Seed], logarithms: Logarithms) -> tuple[Complexes, NDArray[np.float64]]:
    """Newton for all roots together; the slopes are those of the models, good to many digits already."""
    omega = np.asarray([seed.omega for seed in found], dtype=complex)
    log_slope = np.asarray([seed.log_slope for seed in found], dtype=complex)
    error = np.full(omega.shape, np.inf)
    active = np.arange(omega.size)
    for _ in range(_POLISH_ROUNDS):
        if not active.size:
            break
        step = np.exp(logarithms(omega[active]) - log_slope[active])
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
