"""Taylor models of ``D`` on tiles of the region, and the roots they show."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from knell.methods.match.region import Region

Complexes = NDArray[np.complex128]
# Logarithms of D (any branch) at an array of frequencies ``Mω``.
Logarithms = Callable[[Complexes], Complexes]

# Measured: side 0.2 with 40 samples resolves every tile up to κ = 0.99 at a third of the cost of
# side 0.1 with 32, since D is entire but for the branch point and its models converge fast.
SIDE = 0.2
SMALLEST_SIDE = 0.002
SAMPLES = 40
# Radius of the sampling circle in units of the side: a little more than the half diagonal.
CIRCLE = 0.75
TAIL = 8
ACCEPTED_TAIL = 1e-4
# A root is trusted where the tail cannot move it by more than this, in units of the circle's radius.
ACCEPTED_SHIFT = 0.05
# Coefficients that fall less than this from one octet to the next are rounding noise and not a tail,
# once they are that small.
NOISE_LEVEL = 0.05
NOISE_FALL = 0.3
MARGIN = 1.04
CLEAR_OF_ZERO = 1.25
_NEGLIGIBLE = 1e-13
# Rounding of a tile's edges: what sticks out by less is covered by the margin of its neighbour.
_SLIVER = 1e-9


class Unresolved(ArithmeticError):
    """A tile at which D is not resolved: what was computed there is noise."""


@dataclass(frozen=True)
class Tile:
    """A square of the ``Mω`` plane, ``centre`` and ``side``; ``extended`` where doubles have failed."""

    centre: complex
    side: float
    extended: bool = False

    @property
    def radius(self) -> float:
        return CIRCLE * self.side

    def quarters(self) -> list[Tile]:
        step = self.side / 4
        corners = [complex(x, y) for x in (-step, step) for y in (-step, step)]
        return [Tile(self.centre + corner, self.side / 2, self.extended) for corner in corners]

    def touches(self, region: Region) -> bool:
        """Whether any of the tile lies in the region."""
        half = self.side / 2
        x0, x1 = self.centre.real - half, self.centre.real + half
        y0, y1 = self.centre.imag - half, self.centre.imag + half
        in_corner = x1 < region.hole + _SLIVER and y0 > -region.hole - _SLIVER
        overlaps = x1 > region.left and x0 < region.right and y1 > -region.depth and y0 < -_SLIVER
        return overlaps and not in_corner


@dataclass(frozen=True)
class Seed:
    """A root of a tile's model: ``omega``, a logarithm of the model's slope dD/dω there, and where it comes from."""

    omega: complex
    log_slope: complex
    extended: bool


@dataclass(frozen=True)
class Model:
    """``D(ω) ≈ e^(height + trend z) Σ c_k z^k``, ``z = (ω - centre)/radius``, on one tile.

    The exponential has no zeros. It takes out what D grows by across the tile (many orders of magnitude near
    the extremal end), which the samples themselves tell: the first harmonic of ``log |D|`` on the circle.
    """

    tile: Tile
    height: float
    trend: complex
    coefficients: Complexes

    @property
    def tail(self) -> float:
        """The last coefficients relative to the largest; NaN where samples are out of range."""
        sizes = np.abs(self.coefficients)
        return float(np.max(sizes[-TAIL:]) / np.max(sizes))

    @property
    def noisy(self) -> bool:
        """Whether the coefficients have stopped falling, so that a smaller tile would not help."""
        sizes = np.abs(self.coefficients)
        flat = np.max(sizes[-TAIL:]) > NOISE_FALL * np.max(sizes[-2 * TAIL : -TAIL])
        return bool(flat) and self.tail < NOISE_LEVEL

    def seeds(self) -> list[Seed] | None:
        """Roots in the tile with 4 % margin, or None where the model does not say which there are."""
        if not self.tail < ACCEPTED_TAIL:
            return None
        sizes = np.abs(self.coefficients)
        if sizes[0] > np.sum(sizes[1:]):
            return []
        significant = np.flatnonzero(sizes > _NEGLIGIBLE * np.max(sizes))
        polynomial = self.coefficients[: significant[-1] + 1][::-1]
        z = np.roots(polynomial)
        if _winding(polynomial) != int(np.sum(np.abs(z) < 1)):
            return None
        limit = 0.5 / CIRCLE * MARGIN
        z = z[(np.abs(z.real) <= limit) & (np.abs(z.imag) <= limit)]
        slope = np.polyval(np.polyder(polynomial), z)
        if np.any(np.max(sizes[-TAIL:]) > ACCEPTED_SHIFT * np.abs(slope)):
            return None
        log_slope = np.log(slope / self.tile.radius) + self.height + self.trend * z
        omega = self.tile.centre + self.tile.radius * z
        return [Seed(complex(a), complex(b), self.tile.extended) for a, b in zip(omega, log_slope, strict=True)]


def _winding(polynomial: Complexes) -> int:
    """How often a polynomial winds about 0 on the unit circle."""
    circle = np.polyval(polynomial, np.exp(2j * np.pi * np.arange(128) / 128))
    return round(float(np.sum(np.angle(np.roll(circle, -1) / circle))) / (2 * np.pi))


def models(tiles: list[Tile], logarithms: Logarithms) -> list[Model]:
    """A model on each tile, all sampled together."""
    half_way = np.arange(SAMPLES) + 0.5
    unit = np.exp(2j * np.pi * half_way / SAMPLES)
    points = np.array([tile.centre for tile in tiles])[:, None] + np.array([t.radius for t in tiles])[:, None] * unit
    logs = logarithms(points.ravel()).reshape(points.shape)
    height = np.mean(logs.real, axis=1)
    trend = 2 * np.mean(logs.real * unit.conj(), axis=1)
    with np.errstate(over="ignore", invalid="ignore"):
        samples = np.exp(logs - height[:, None] - trend[:, None] * unit)
        coefficients = np.fft.fft(samples, axis=1) / SAMPLES * np.exp(-1j * np.pi * np.arange(SAMPLES) / SAMPLES)
    return [Model(*parts) for parts in zip(tiles, height.tolist(), trend.tolist(), coefficients, strict=True)]


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


def seeds(region: Region, doubles: Logarithms, extended: Logarithms | None = None) -> list[Seed]:
    """Every root of D in the region, from models of D on tiles, each tile resolved or split.

    A tile that is noise in ``doubles`` is sampled in ``extended`` precision. Raises `Unresolved` when
    there is none, or when a tile cannot be resolved in that either.
    """
    queue, found = cover(region), []
    while queue:
        ready, queue = queue, []
        for precise, logarithms in ((False, doubles), (True, extended)):
            tiles = [tile for tile in ready if tile.extended is precise]
            if not tiles:
                continue
            if logarithms is None:
                raise Unresolved(f"{_place(tiles[0])} and {len(tiles) - 1} more: doubles do not resolve D")
            for model in models(tiles, logarithms):
                roots = model.seeds()
                if roots is not None:
                    found += roots
                else:
                    queue += [tile for tile in _next(model) if tile.touches(region)]
    return found


def _next(model: Model) -> list[Tile]:
    """What to try where a model fails: the same tile in extended precision, or its quarters."""
    tile = model.tile
    exhausted = model.noisy or tile.side / 2 < SMALLEST_SIDE
    if exhausted and tile.extended:
        raise Unresolved(f"{_place(tile)}: extended precision does not resolve D")
    return [Tile(tile.centre, tile.side, True)] if exhausted else tile.quarters()


def _place(tile: Tile) -> str:
    return f"tile at {tile.centre:.4f} of side {tile.side:.4f}"
