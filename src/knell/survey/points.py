"""Points of a survey: one black hole seen in one field at one ``ℓ``.

A coupling of zero is Schwarzschild whatever the exponent, so it has no exponent and
occurs once for each (field, ``ℓ``). A point has a slug, its file name, which reads back:
``axial-l2-schwarzschild``, ``axial-l2-n4-k9_10``, ``scalar-l0-n3-km1_2``.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from fractions import Fraction
from typing import TYPE_CHECKING, Any

from knell.physics.exact import from_slug, parse_rational, rational_slug, rational_text
from knell.physics.field import check_field

if TYPE_CHECKING:
    from knell.physics.background import PowerLaw

_SLUG = re.compile(r"(?P<field>[a-z]+)-l(?P<ell>\d+)-(schwarzschild|n(?P<exponent>\d+)-k(?P<coupling>m?\d+(_\d+)?))")


@dataclass(frozen=True)
class Point:
    """One (field, exponent, coupling, ``ℓ``); ``exponent`` is None exactly when ``coupling`` is 0.

    Raises `ValueError` for parameters that describe no black hole or no perturbation, and
    for a Schwarzschild point with an exponent (`canonical` drops it).
    """

    field: str
    exponent: int | None
    coupling: Fraction
    ell: int

    def __post_init__(self) -> None:
        check_field(self.field, self.ell)
        if (self.exponent is None) != (self.coupling == 0):
            raise ValueError(f"exponent {self.exponent} with coupling {self.coupling}: only coupling 0 has no exponent")
        check_background(self.exponent, self.coupling)

    @classmethod
    def canonical(cls, field: str, exponent: int | None, coupling: Fraction, ell: int) -> Point:
        """The point of these parameters; coupling 0 is Schwarzschild for every exponent."""
        check_background(exponent, coupling)
        return cls(field, exponent if coupling else None, coupling, ell)

    @classmethod
    def from_slug(cls, slug: str) -> Point:
        """The inverse of `slug`; raises `ValueError` for any other text."""
        match = _SLUG.fullmatch(slug)
        if not match:
            raise ValueError(f"{slug!r} names no point; points look like axial-l2-n4-k9_10 or axial-l2-schwarzschild")
        exponent, coupling = match["exponent"], match["coupling"]
        point = cls(
            field=match["field"],
            exponent=int(exponent) if exponent else None,
            coupling=from_slug(coupling) if coupling else Fraction(0),
            ell=int(match["ell"]),
        )
        if point.slug != slug:
            raise ValueError(f"{slug!r} is written {point.slug}")
        return point

    @property
    def slug(self) -> str:
        """The file-name form."""
        hole = "schwarzschild" if self.is_schwarzschild else f"n{self.exponent}-k{rational_slug(self.coupling)}"
        return f"{self.field}-l{self.ell}-{hole}"

    @property
    def is_schwarzschild(self) -> bool:
        return self.exponent is None

    @property
    def reference(self) -> Point:
        """The Schwarzschild point of the same field and ``ℓ``, against which shifts are taken."""
        return Point(self.field, None, Fraction(0), self.ell)

    def background(self) -> PowerLaw:
        """The metric of the point; any exponent serves Schwarzschild."""
        from knell.physics.background import PowerLaw

        return PowerLaw(self.exponent or 2, self.coupling)

    def document(self) -> dict[str, Any]:
        """The JSON form: ``{"field", "exponent", "coupling": "9/10", "ell"}``."""
        return {
            "field": self.field,
            "exponent": self.exponent,
            "coupling": rational_text(self.coupling),
            "ell": self.ell,
        }

    @classmethod
    def from_document(cls, document: Mapping[str, Any]) -> Point:
        """The inverse of `document`; raises `ValueError` or `KeyError` for anything else."""
        coupling = parse_rational(document["coupling"])
        return cls(document["field"], document["exponent"], coupling, document["ell"])


def check_background(exponent: int | None, coupling: Fraction) -> None:
    """Raise `ValueError` where `PowerLaw` would, without the arithmetic it imports."""
    if exponent is not None and (isinstance(exponent, bool) or not isinstance(exponent, int) or exponent < 2):
        raise ValueError(f"exponent {exponent}: must be a whole number, 2 or more")
    if coupling > 1:
        raise ValueError(f"coupling {coupling}: must be at most 1; above 1 there is no horizon")


def grid(
    ells: Mapping[str, Iterable[int]], exponents: Iterable[int], couplings: Iterable[Fraction]
) -> tuple[Point, ...]:
    """Every point of a survey once, the Schwarzschild point of each (field, ``ℓ``) first."""
    points: dict[Point, None] = {}
    for field, values in ells.items():
        for ell in values:
            points[Point(field, None, Fraction(0), ell)] = None
            for exponent in exponents:
                for coupling in couplings:
                    points[Point.canonical(field, exponent, coupling, ell)] = None
    return tuple(points)
