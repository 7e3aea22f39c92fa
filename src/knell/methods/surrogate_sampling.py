"""The couplings a surrogate asks for, solved one by one next to what is known already.

Labels come from continuation: the Schwarzschild overtones are followed together along ``q`` (`continuation.follow`),
and every later value starts from interpolation between its neighbours, of which there are more and more. Values come
from the spectral method, and from the match over balls next to the extremal hole, where that is quicker. The
surrogate's error is measured by the match at couplings that it has not seen.
"""

from __future__ import annotations

from bisect import bisect_left
from collections.abc import Sequence
from fractions import Fraction

import numpy as np
from flint import acb, arb, ctx, fmpq

from knell.methods import spectral_refine as spectral
from knell.methods.continuation import Track, follow
from knell.methods.match import digits
from knell.methods.match.search import search
from knell.methods.surrogate import Surrogate
from knell.methods.tracks import Family
from knell.physics.background import PowerLaw
from knell.physics.landmarks import window

TRAIL = (0, Fraction(1, 4), Fraction(1, 2), Fraction(3, 4), Fraction(9, 10), Fraction(97, 100), Fraction(995, 1000))
_SPECTRAL_DIGITS, _MATCH_DIGITS, _CHECK_DIGITS = 12, 24, 12
# Values are rounded here, so that the same value gives the same surrogate on every processor.
_DECIMALS = 18
_BITS = 128
# From here to the extremal hole the spectral method needs long series.
_NEARLY_EXTREMAL = Fraction(98, 100)
_NEIGHBOURS = 6
_APART = 1e-6
_DEPTHS = (Fraction(3, 2), Fraction(5, 2), Fraction(7, 2))
_SURFACE_GRAVITY = 0.25
_SPECIAL = 1e-7
BEHIND = "crosses the imaginary axis: beyond, it is no mode"


class NotSampled(ArithmeticError):
    """No solver gives the mode at a coupling; the message says which and why."""


def trail(family: Family, overtones: Sequence[int]) -> list[Track]:
    """The Schwarzschild ``overtones`` followed along ``q``; a track ends where ``Re ω`` changes sign.

    Raises `NotSampled` when the search at Schwarzschild does not reach an overtone, `TrackLost` when one is lost.
    """
    schwarzschild = PowerLaw(family.exponent, Fraction(0))
    for depth in _DEPTHS:
        zeros = search(family.equation(0.0), window(schwarzschild, family.ell, depth)).zeros
        order = np.round(-zeros.imag / _SURFACE_GRAVITY)
        special = np.abs(zeros + 1j * order * _SURFACE_GRAVITY) < _SPECIAL
        modes = zeros[~special & (zeros.real > 0)]
        if len(modes) > max(overtones):
            nodes = [family.q(Fraction(coupling)) for coupling in TRAIL]
            wanted = np.array([modes[k] for k in overtones])
            return follow(family.equation, nodes, wanted, lambda omega: BEHIND if omega.real < 0 else "")
    raise NotSampled(f"overtone {max(overtones)} lies deeper than {float(depth):g}, where the search ends")


class Sampler:
    """``Mω`` of one overtone at couplings from 0 to ``end``, from its trail; callable as `surrogate.fit` asks."""

    def __init__(self, family: Family, track: Track) -> None:
        self.family = family
        self.ended = track.ended
        self.samples = 0
        # The node at which a track ended is no mode any more.
        count = len(track.q) - bool(track.ended)
        self._known = [family.coupling(q) for q in track.q[:count]]
        self._values = list(track.omega[:count])
        self._solved: dict[float, acb] = {}
        self.end = self._known[-1] if track.ended else 1.0

    def __call__(self, couplings: Sequence[float]) -> list[acb]:
        # From Schwarzschild on: what lies beyond the trail is reached from its end.
        for coupling in sorted(set(couplings) - self._solved.keys()):
            self._solve(coupling)
        return [self._solved[coupling] for coupling in couplings]

    def predict(self, coupling: float) -> complex:
        """The polynomial through the nearest known values."""
        middle = bisect_left(self._known, coupling)
        first = max(0, min(middle - _NEIGHBOURS // 2, len(self._known) - _NEIGHBOURS))
        x = np.array(self._known[first : first + _NEIGHBOURS])
        weights = [np.prod((coupling - np.delete(x, i)) / (x[i] - np.delete(x, i))) for i in range(len(x))]
        return complex(np.dot(weights, self._values[first : first + _NEIGHBOURS]))

    def _solve(self, coupling: float) -> None:
        value = solve(self.family, Fraction(coupling), self.predict(coupling))
        self.samples += 1
        self._solved[coupling] = value
        # Two nodes all but on top of each other would blow up the noise of their difference: the new one replaces them.
        first, last = (bisect_left(self._known, coupling + reach) for reach in (-_APART, _APART))
        self._known[first:last] = [coupling]
        self._values[first:last] = [complex(value)]


def solve(family: Family, coupling: Fraction, seed: complex) -> acb:
    """The mode next to ``seed``, rounded to `_DECIMALS` decimals.

    Both solvers refuse a mode that is not within one part in a thousand of the seed, so that no other one is taken
    for it. Raises `NotSampled` when both fail.
    """
    background, reasons = PowerLaw(family.exponent, coupling), []
    if coupling < _NEARLY_EXTREMAL or background.is_extremal:
        problem = spectral.SpectralProblem.of(background, family.field, family.ell, _SPECTRAL_DIGITS)
        run = spectral.refine(problem, seed)
        if run.status == "ok" and run.frequency is not None:
            return _rounded(run.frequency)
        reasons.append(f"spectral: {run.reason}")
    match = digits.refine(background, family.field, family.ell, seed, _MATCH_DIGITS)
    if match.status == "ok" and match.frequency is not None:
        return _rounded(match.frequency)
    reasons.append(f"match: {match.reason}")
    raise NotSampled(f"coupling {float(coupling):.6g}, mode next to {seed:.6f}: {'; '.join(reasons)}")


def measured_error(family: Family, surrogate: Surrogate, couplings: Sequence[Fraction]) -> float:
    """The largest distance of the surrogate from the match over balls, at ``couplings``.

    Raises `NotSampled` when the match fails at one of them.
    """
    worst = 0.0
    for coupling in couplings:
        claimed = complex(surrogate(float(coupling)))
        background = PowerLaw(family.exponent, coupling)
        run = digits.refine(background, family.field, family.ell, claimed, _CHECK_DIGITS)
        if run.status != "ok" or run.frequency is None:
            raise NotSampled(f"coupling {float(coupling):.6g}: the match fails: {run.reason}")
        worst = max(worst, abs(complex(run.frequency) - claimed))
    return worst


def _rounded(value: acb) -> acb:
    with ctx.workprec(_BITS):
        scale = 10**_DECIMALS
        parts = ((part.mid() * scale + 0.5).floor().unique_fmpz() for part in (value.real, value.imag))
        return acb(*(arb(fmpq(part, scale)) for part in parts))
