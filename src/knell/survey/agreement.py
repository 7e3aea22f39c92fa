"""Agreement of two frequencies given as decimal strings, in digits.

    agreement(a, b) = -log10(|a - b| / |b|),     at most what the strings carry

The modulus is that of the complex number, so the real part of a mode beside the axis is
known to fewer digits of its own than the mode: `rounded` prints both parts to the same
decimal place. Differences are taken in decimals, because a double holds sixteen digits.
"""

from __future__ import annotations

import decimal
import math
from dataclasses import dataclass
from decimal import ROUND_HALF_EVEN, Decimal
from functools import cached_property

# Far more digits than any run writes, so that no difference is rounded.
_CONTEXT = decimal.Context(prec=5000, Emax=decimal.MAX_EMAX, Emin=decimal.MIN_EMIN)


@dataclass(frozen=True)
class Frequency:
    """One complex ``Mω``, its parts as decimal strings."""

    re: str
    im: str

    @cached_property
    def parts(self) -> tuple[Decimal, Decimal]:
        """Real and imaginary part, exactly as written. Raises `ValueError` for text that is no finite number."""
        try:
            values = Decimal(self.re), Decimal(self.im)
        except decimal.InvalidOperation:
            raise ValueError(f"({self.re!r}, {self.im!r}) is not a frequency in decimals") from None
        if not all(x.is_finite() for x in values):
            raise ValueError(f"({self.re!r}, {self.im!r}) is not a finite frequency")
        return values

    def __complex__(self) -> complex:
        """The nearest doubles."""
        re, im = self.parts
        return complex(float(re), float(im))


def carried(a: Frequency, b: Frequency) -> float:
    """Digits of ``|b|`` that both ``a`` and ``b`` write out, rounded down to hundredths, never below 0.

    The coarsest last decimal place of the four parts decides; a part that is exactly zero says
    nothing of its last place. Raises `ValueError` for text that is no number, and when ``b`` is zero.
    """
    last_place = max(int(x.as_tuple().exponent) for x in (*a.parts, *b.parts) if x)
    return _hundredths(_log10_modulus(b.parts) - last_place)


def agreement(a: Frequency, b: Frequency) -> float:
    """``-log10(|a - b|/|b|)``, at most `carried`, rounded down to hundredths, never below 0.

    Raises what `carried` raises.
    """
    bound = carried(a, b)
    (a_re, a_im), (b_re, b_im) = a.parts, b.parts
    gap = _CONTEXT.subtract(a_re, b_re), _CONTEXT.subtract(a_im, b_im)
    if not any(gap):
        return bound
    return min(bound, _hundredths(_log10_modulus(b.parts) - _log10_modulus(gap)))


def rounded(value: Frequency, digits: float) -> Frequency:
    """``value`` with both parts rounded to the last decimal place that ``digits`` of ``|value|`` reach.

    Never coarser than whole numbers; empty strings when there is no whole digit. Plain decimals,
    no exponents.
    """
    if digits < 1:
        return Frequency("", "")
    leading = math.floor(_log10_modulus(value.parts))
    place = Decimal(1).scaleb(min(0, leading + 1 - int(digits)))
    re, im = (x.quantize(place, ROUND_HALF_EVEN, _CONTEXT) for x in value.parts)
    return Frequency(f"{re:f}", f"{im:f}")


def _log10_modulus(parts: tuple[Decimal, Decimal]) -> float:
    """``log10 |re + i im|``, also where the modulus itself is no double. Raises `ValueError` at zero."""
    if not any(parts):
        raise ValueError("digits are relative to |b|, and b is zero")
    scale = max(x.adjusted() for x in parts if x)
    return scale + math.log10(math.hypot(*(float(x.scaleb(-scale, _CONTEXT)) for x in parts)))


def _hundredths(digits: float) -> float:
    return max(0.0, math.floor(100 * digits) / 100)
