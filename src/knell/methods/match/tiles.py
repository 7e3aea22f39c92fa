"""Taylor models of ``D`` on tiles of the region, and the roots they show."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from knell.methods.match.region import Region

Complexes = NDArray[np.complex128]
Values = Callable[[Complexes, Complexes], Complexes]

# Measured: side 0.2 with 40 samples resolves every tile up to κ = 0.99 at a third of the cost of
# side 0.1 with 32, since D is entire but for the branch point and its models converge fast.
SIDE = 0.2
SMALLEST_SIDE = 0.01
SAMPLES = 40
# Radius of the sampling circle in units of the side: a little more than the half diagonal.
CIRCLE = 0.75
TAIL = 8
ACCEPTED_TAIL = 1e-4
MARGIN = 1.04
CLEAR_OF_ZERO = 1.25
_NOISE = 1e-13


class Unresolved(ArithmeticError):
    """A tile at which doubles do not resolve D: extended precision is needed there."""


@dataclass(frozen=True)
class Tile:
    """A square of the ``Mω`` plane, ``centre`` and ``side``, and the tail its parent had."""

    centre: complex
    side: float
    parent_tail: float = np.inf

    @property
    def radius(self) -> float:
        return CIRCLE * self.side

    def quarters(self, tail: float = np.inf) -> list[Tile]:
        step = self.side / 4
        return [Tile(self.centre + step * complex(x, y), self.side / 2, tail) for x in (-1, 1) for y in (-1, 1)]

    def touches(self, region: Region) -> bool:
        """Whether any of the tile lies in the region."""
        half = self.side / 2
        x0, x1 = self.centre.real - half, self.centre.real + half
        y0, y1 = self.centre.imag - half, self.centre.imag + half
        inside_hole = x0 >= -region.hole and x1 <= region.hole and y0 >= -region.hole and y1 <= region.hole
        return x1 > region.left and x0 < region.right and y1 > -region.depth and y0 < 0 and not inside_hole


@dataclass(frozen=True)
class Seed:
    """A root of a tile's model: ``omega``, the model's ``slope`` dD/dω there, and the tile's centre."""

    omega: complex
    slope: complex
    scale_at: complex


def cover(region: Region) -> list[Tile]:
    """Tiles of side 0.2 from the region's left and top edge, split while their circle holds the branch point 0."""
    columns = int(np.ceil((region.right - region.left) / SIDE))
    rows = int(np.ceil(region.depth / SIDE))
    tiles = [
        Tile(complex(region.left + (i + 0.5) * SIDE, -(j + 0.5) * SIDE), SIDE)
        for j in range(rows)
        for i in range(columns)
    ]
    settled: list[Tile] = []
    while tiles:
        tiles = [tile for tile in tiles if tile.touches(region)]
        settled += [tile for tile in tiles if abs(tile.centre) >= CLEAR_OF_ZERO * tile.radius]
        tiles = [part for tile in tiles if abs(tile.centre) < CLEAR_OF_ZERO * tile.radius for part in tile.quarters()]
    return settled


def _roots(tile: Tile, scaled: Complexes) -> list[Seed] | None:
    """Roots of the model inside the tile with 4 % margin; None where their number inside the circle is
    not the winding of the model round it, so that the tile counts as unresolved."""
    significant = np.flatnonzero(np.abs(scaled) > _NOISE * np.max(np.abs(scaled)))
    model = scaled[: significant[-1] + 1]
    if len(model) < 2:
        return []
    z = np.roots(model[::-1])
    circle = np.polyval(model[::-1], np.exp(2j * np.pi * np.arange(128) / 128))
    winding = round(float(np.sum(np.angle(np.roll(circle, -1) / circle))) / (2 * np.pi))
    if winding != int(np.sum(np.abs(z) < 1)):
        return None
    limit = 0.5 / CIRCLE * MARGIN
    inside = z[(np.abs(z.real) <= limit) & (np.abs(z.imag) <= limit)]
    slopes = np.polyval(np.polyder(model[::-1]), inside) / tile.radius
    return [Seed(tile.centre + tile.radius * a, b, tile.centre) for a, b in zip(inside, slopes, strict=True)]


def seeds(region: Region, values: Values) -> list[Seed]:
    """Every root of D in the region, from models of D on tiles, each tile resolved or split.

    ``values(ω, scale_at)`` gives D on flat arrays, as samples of one analytic function for equal
    ``scale_at``. Raises `Unresolved` when a tile cannot be resolved.
    """
    queue, found = cover(region), []
    unit = np.exp(2j * np.pi * (np.arange(SAMPLES) + 0.5) / SAMPLES)
    untwist = np.exp(-2j * np.pi * 0.5 * np.arange(SAMPLES) / SAMPLES)
    while queue:
        ready, queue = queue, []
        centres = np.asarray([tile.centre for tile in ready])
        radii = np.asarray([tile.radius for tile in ready])
        points = centres[:, None] + radii[:, None] * unit
        d = values(points.ravel(), np.repeat(centres, SAMPLES)).reshape(points.shape)
        coefficients = np.fft.fft(d, axis=1) / SAMPLES * untwist
        sizes = np.abs(coefficients)
        tails = np.max(sizes[:, -TAIL:], axis=1) / np.max(sizes, axis=1)
        for tile, tail, scaled in zip(ready, tails, coefficients, strict=True):
            roots = _roots(tile, scaled) if tail < ACCEPTED_TAIL else None
            if roots is not None:
                found.extend(roots)
            elif tile.side / 2 < SMALLEST_SIDE or ACCEPTED_TAIL < tail > 0.5 * tile.parent_tail:
                raise Unresolved(f"tile at {tile.centre:.4f}, side {tile.side:.4f}: extended precision here")
            else:
                queue.extend(part for part in tile.quarters(float(tail)) if part.touches(region))
    return found
