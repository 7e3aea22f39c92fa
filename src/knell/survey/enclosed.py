"""Values against proven discs.

An enclosure says: exactly one mode lies within ``unique_radius`` of the centre, and it lies within
``proven_radius`` of it. A value ``v`` belongs to the enclosure whose disc of uniqueness holds it, the nearest
where several do, whatever the order in which modes were listed. The mode being within ``r`` of the centre ``c``,
``v`` is wrong by at least ``|v - c| - r``: it has at most

    -log10((|v - c| - r)/|v|)

digits, without limit where it lies in the proven disc itself.
"""

from __future__ import annotations

import decimal
import math
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from decimal import Decimal
from functools import cached_property
from typing import Any

from knell.survey.agreement import Frequency

# Values carry some tens of digits, distances need a few.
_CONTEXT = decimal.Context(prec=300, Emin=decimal.MIN_EMIN, Emax=decimal.MAX_EMAX)


@dataclass(frozen=True)
class Enclosure:
    """A proven disc of ``Mω``; the radii are decimal strings, as they were proven."""

    centre: Frequency
    proven_radius: str
    unique_radius: str

    @classmethod
    def from_document(cls, entry: Mapping[str, Any]) -> Enclosure:
        """The enclosure of an entry of a file of proofs."""
        centre = Frequency(entry["frequency_re"], entry["frequency_im"])
        return cls(centre, entry["proven_radius"], entry["unique_radius"])

    @cached_property
    def radii(self) -> tuple[float, float]:
        """Both radii as doubles that stay true: the proven one no smaller, the unique one no larger."""
        return _no_smaller(self.proven_radius), _no_larger(self.unique_radius)

    def distance(self, value: Frequency) -> Decimal:
        """``|v - c|``."""
        gaps = [_CONTEXT.subtract(a, b) for a, b in zip(value.parts, self.centre.parts, strict=True)]
        return _modulus(*gaps)

    def digits_at_most(self, value: Frequency) -> float:
        """The digits that ``value`` can have, rounded down to hundredths; infinite inside the proven disc."""
        beyond = _CONTEXT.subtract(self.distance(value), Decimal(self.proven_radius))
        if beyond <= 0:
            return math.inf
        ratio = _CONTEXT.divide(beyond, _modulus(*value.parts))
        return max(0.0, math.floor(-100 * float(_CONTEXT.log10(ratio))) / 100)

    def singles_out(self, value: Frequency, digits: float) -> bool:
        """Whether all that ``value`` stands for to its digits lies within the disc of uniqueness."""
        error = _CONTEXT.multiply(_modulus(*value.parts), Decimal(10) ** Decimal(-digits))
        return _CONTEXT.add(self.distance(value), error) <= Decimal(self.unique_radius)


def enclosing(value: Frequency, enclosures: Iterable[Enclosure]) -> Enclosure | None:
    """The enclosure that ``value`` belongs to, None if it belongs to none."""
    around = [one for one in enclosures if one.distance(value) < Decimal(one.unique_radius)]
    return min(around, key=lambda one: one.distance(value), default=None)


def _modulus(re: Decimal, im: Decimal) -> Decimal:
    return _CONTEXT.sqrt(_CONTEXT.add(_CONTEXT.multiply(re, re), _CONTEXT.multiply(im, im)))


def _no_smaller(text: str) -> float:
    nearest = float(text)
    return nearest if Decimal(nearest) >= Decimal(text) else math.nextafter(nearest, math.inf)


def _no_larger(text: str) -> float:
    nearest = float(text)
    return nearest if Decimal(nearest) <= Decimal(text) else math.nextafter(nearest, 0.0)
