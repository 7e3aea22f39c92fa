"""Regions of the ``Mω`` plane whose corners are exact rationals.

The window of a point is ``0 < Re Mω <= x``, ``-y <= Im Mω <= 0`` without the square of half-side ``e`` about the
branch point 0. Zeros are counted in the region that reaches past the axis,

    {-δ < Re Mω < x, -y < Im Mω < 0} \\ {|Re Mω| <= e, |Im Mω| <= e},      0 < δ <= e,

whose outline is a closed polygon with exactly the window's own right, lower and upper edges.
"""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction

from flint import acb, arb

from knell.methods.enclosure.printed import ball
from knell.methods.enclosure.refusal import BadStructure

Corner = tuple[Fraction, Fraction]


@dataclass(frozen=True)
class Region:
    """The region above; ``growing`` mirrors it to ``0 < Im Mω < y``."""

    re_max: Fraction
    depth: Fraction
    excluded: Fraction
    past: Fraction
    growing: bool = False

    def __post_init__(self) -> None:
        if not (0 < self.past <= self.excluded < min(self.re_max, self.depth)):
            raise BadStructure("a region needs 0 < δ <= e < x and e < y")

    def outline(self) -> tuple[Corner, ...]:
        """Corners, counter-clockwise, without repeating the first."""
        x, y, e, d = self.re_max, self.depth, self.excluded, self.past
        damped = ((-d, -y), (x, -y), (x, Fraction(0)), (e, Fraction(0)), (e, -e), (-d, -e))
        if self.growing:
            return tuple((re, -im) for re, im in reversed(damped))
        return damped

    def contains(self, centre: acb, radius: arb) -> bool:
        """Whether the closed disc (in ``Mω``) is proven to lie inside; False proves nothing."""
        re, im = centre.real, centre.imag if self.growing else -centre.imag
        x, y, e, d = (ball(side) for side in (self.re_max, self.depth, self.excluded, self.past))
        within = (re - radius > -d, re + radius < x, im - radius > 0, im + radius < y)
        beside = (re - radius > e, im - radius > e)
        return all(bool(test) for test in within) and any(bool(test) for test in beside)

    def misses(self, centre: acb, radius: arb) -> bool:
        """Whether the closed disc is proven to lie outside; False proves nothing."""
        re, im = centre.real, centre.imag if self.growing else -centre.imag
        x, y, e, d = (ball(side) for side in (self.re_max, self.depth, self.excluded, self.past))
        beyond = (re + radius < -d, re - radius > x, im + radius < 0, im - radius > y)
        hole = (abs(re) + radius < e, im + radius < e)
        return any(bool(test) for test in beyond) or all(bool(test) for test in hole)
