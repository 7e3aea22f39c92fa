"""Every mode of a window followed from Schwarzschild to the extremal hole: where labels come from.

A *principal* track starts at a Schwarzschild overtone and carries its number along ``q``; what the
window holds beside these at any ``q`` is the *near-axis* family, followed from where it is first seen,
both ways. At `CHECKS` values of ``q`` the whole window is searched and counted again, and every zero
found there must lie on exactly one track.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from fractions import Fraction

import numpy as np
from numpy.typing import NDArray

from knell.methods.continuation import Track, TrackLost, follow, newton
from knell.methods.match.search import search
from knell.methods.match.solutions import Matcher
from knell.physics.background import PowerLaw
from knell.physics.equation import Equation, equation_floats, regularised
from knell.physics.landmarks import Window, window

CHECKS = (0.0, 0.25, 0.45, 0.6, 0.7, 0.8, 0.87, 0.92, 0.96, 0.99)
# Doubles follow the principal family up to here; on to the extremal end it is smooth in q and extrapolated.
LAST_COUPLING = Fraction(995, 1000)
_ON_TRACK = 1e-6
_SPECIAL = 1e-7
# A near-axis zero this far out on the continued sheet is not followed further.
_FAR_BEHIND = -0.15
_BELOW = 0.15
_SCHWARZSCHILD_GRAVITY = 0.25
# A track lands on the zero it points at when that is this much nearer than the next one.
_LANDING = 0.05
_LANDING_DEGREE = 3
_SECANTS = 30


@dataclass
class Check:
    """One search of the whole window: zeros found and counted there, and how many lay on a track."""

    q: float
    found: int
    counted: int
    on_track: int


@dataclass
class TrackSet:
    """Tracks of one (field, exponent, ``ℓ``) and the searches that checked them.

    ``principal[k]`` is overtone ``k``; its last node is the extremal end where ``reached`` says so.
    """

    principal: list[Track] = field(default_factory=list)
    near_axis: list[Track] = field(default_factory=list)
    checks: list[Check] = field(default_factory=list)


@dataclass(frozen=True)
class Family:
    """The power law of one exponent in one field and ``ℓ``, over doubles, along ``q``."""

    exponent: int
    field: str
    ell: int

    def equation(self, q: float) -> Equation:
        f = [0.0] * (self.exponent + 1)
        f[0], f[1] = 1.0, -(1.0 + q)
        f[self.exponent] += q
        return regularised(f, self.field, self.ell)

    @property
    def extremal(self) -> Equation:
        return equation_floats(PowerLaw(self.exponent, Fraction(1)), self.field, self.ell)

    def coupling(self, q: float) -> float:
        """``κ = q / (2 c_n ((1+q)/2)^n)``."""
        c_n = float(PowerLaw(self.exponent, Fraction(0)).c_n)
        return q / (2 * c_n * ((1 + q) / 2) ** self.exponent)

    def q(self, coupling: Fraction) -> float:
        return float(PowerLaw(self.exponent, coupling).q(80))


def trace(exponent: int, field: str, ell: int, depth: Fraction) -> TrackSet:
    """All tracks of the window down to ``Im Mω = -depth``.

    Raises `TrackLost` where a zero cannot be followed or two tracks meet, and what `search` raises.
    """
    family = Family(exponent, field, ell)
    nodes = [family.q(Fraction(c).limit_denominator(1000)) for c in CHECKS]
    # Overtones rise with the coupling: start deeper, so that none enters from below without its number.
    deep = depth * Fraction(9, 8) + Fraction(1, 4)
    principal = follow(
        family.equation, [*nodes, family.q(LAST_COUPLING)], _overtones(family, _window(family, Fraction(0), deep))
    )
    near_axis: list[Track] = []
    checks: list[Check] = []

    def leaves(omega: complex) -> str:
        if omega.real < _FAR_BEHIND:
            return "far on the continued sheet"
        return "below the window" if omega.imag < -float(depth) - _BELOW else ""

    # From the extremal side, where the near-axis modes are born, down to Schwarzschild.
    for i in reversed(range(len(nodes))):
        found = search(family.equation(nodes[i]), _window(family, Fraction(CHECKS[i]).limit_denominator(1000), depth))
        new, on_track = _off_tracks(found.zeros, [*principal, *near_axis], nodes[i])
        checks.insert(0, Check(nodes[i], len(found.zeros), found.counted, on_track + len(new)))
        if len(new):
            down = follow(family.equation, nodes[i::-1], new, leaves)
            up = follow(family.equation, nodes[i:], new, leaves)
            near_axis += [_joined(a, b) for a, b in zip(down, up, strict=True)]
    _to_the_extremal_end(family, principal, deep)
    return TrackSet(principal, near_axis, checks)


def _overtones(family: Family, wide: Window) -> NDArray[np.complex128]:
    """Schwarzschild's modes by damping, the algebraically special point left out."""
    zeros = search(family.equation(0.0), wide).zeros
    poles = -1j * np.round(-zeros.imag / _SCHWARZSCHILD_GRAVITY) * _SCHWARZSCHILD_GRAVITY
    return zeros[(np.abs(zeros - poles) > _SPECIAL) & (zeros.real > 0)]


def _window(family: Family, coupling: Fraction, depth: Fraction) -> Window:
    return window(PowerLaw(family.exponent, coupling), family.ell, depth)


def _off_tracks(zeros: NDArray[np.complex128], tracks: list[Track], q: float) -> tuple[NDArray[np.complex128], int]:
    """Zeros at ``q`` that lie on no track, and how many do. Raises `TrackLost` if two tracks share one."""
    on = np.asarray([track.omega[track.q.index(q)] for track in tracks if q in track.q], dtype=complex)
    distance = np.abs(zeros[:, None] - on[None, :]) if len(on) else np.full((len(zeros), 1), np.inf)
    owners = np.sum(distance < _ON_TRACK, axis=1)
    if np.any(owners > 1):
        raise TrackLost(f"two tracks on the zero {zeros[np.argmax(owners)]:.6f} at parameter {q:.6f}")
    return zeros[owners == 0], int(np.sum(owners))


def _joined(down: Track, up: Track) -> Track:
    """One track from where it came to where it goes, ``q`` rising; ``began`` and ``ended`` keep both reasons."""
    return Track(down.q[::-1] + up.q[1:], down.omega[::-1] + up.omega[1:], ended=up.ended, began=down.ended)


def _to_the_extremal_end(family: Family, principal: list[Track], depth: Fraction) -> None:
    """Give each principal track the zero of the degenerate horizon that its last nodes point at.

    Raises `TrackLost` if two point at the same one; a track whose zero lies outside the window
    searched there, or that has gone beside the axis, ends at its last node and says so.
    """
    end = 1.0 / (family.exponent - 1)
    zeros = search(family.extremal, _window(family, Fraction(1), depth)).zeros
    taken: set[int] = set()
    for track in principal:
        near_end = np.asarray(track.q) > 0.75 * end
        q, omega = np.asarray(track.q)[near_end], np.asarray(track.omega)[near_end]
        aim = np.polyval(np.polyfit(q / end - 1, omega, _LANDING_DEGREE), 0.0)
        nearest, second = np.argsort(np.abs(zeros - aim))[:2]
        if abs(zeros[nearest] - aim) > _LANDING * abs(zeros[second] - aim):
            track.ended = "beside the axis: a near-axis mode at the extremal end"
            continue
        if nearest in taken:
            raise TrackLost(f"two tracks point at the zero {zeros[nearest]:.6f} of the extremal end")
        taken.add(int(nearest))
        track.q.append(end)
        track.omega.append(complex(zeros[nearest]))


@dataclass(frozen=True)
class Crossing:
    """Where a track meets the imaginary axis: ``q``, ``Im Mω`` there, and ``2 |Im ω| / f'(r_h)``."""

    q: float
    im: float
    order: float


def crossings(family: Family, track: Track) -> list[Crossing]:
    """Every sign change of ``Re ω`` along a track, located by secants in ``q`` with Newton at each."""
    out = []
    for i in range(len(track.q) - 1):
        a, b = track.q[i], track.q[i + 1]
        if track.omega[i].real * track.omega[i + 1].real < 0 and b < 1.0 / (family.exponent - 1):
            out.append(_locate(family, a, b, track.omega[i], track.omega[i + 1]))
    return out


def _locate(family: Family, a: float, b: float, at_a: complex, at_b: complex) -> Crossing:
    for _ in range(_SECANTS):
        t = at_a.real / (at_a.real - at_b.real)
        q = a + t * (b - a)
        omega = complex(newton(Matcher(family.equation(q)), np.asarray([at_a + t * (at_b - at_a)]))[0][0])
        if abs(omega.real) < 1e-12 or abs(b - a) < 1e-10:
            break
        if omega.real * at_a.real > 0:
            a, at_a = q, omega
        else:
            b, at_b = q, omega
    equation = family.equation(q)
    slope = abs(sum(k * c for k, c in enumerate(equation.f)))
    return Crossing(q, omega.imag, -2 * omega.imag / (slope * equation.mass))
