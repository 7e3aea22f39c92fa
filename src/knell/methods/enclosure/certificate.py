"""Certificates: *these are all the modes of the window, and each is where we say*.

The count of `count` says how many zeros the region holds; `one_zero` encloses each that a search
proposes. When the proven zeros, pairwise apart and each inside the region, are as many as were counted, the list is
complete, wherever the proposals came from. Zeros with ``Re ω > 0`` are modes, those with ``Re ω < 0`` lie on the
continued sheet, and the exact zeros of cleared factors on the axis are neither.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from fractions import Fraction

from flint import ctx

from knell.methods.enclosure.count import Count, count_zeros
from knell.methods.enclosure.effort import mass
from knell.methods.enclosure.one_zero import Zero, enclose_zero
from knell.methods.enclosure.problem import Problem
from knell.methods.enclosure.refusal import Incomplete, LostPrecision, NoCount, Refusal
from knell.methods.enclosure.region import Region
from knell.methods.enclosure.seeds import proposals
from knell.methods.enclosure.statement import Statement, enclosure, state
from knell.physics.landmarks import Window

# How far the counted region reaches past the axis: the next is tried when a zero is too near the edge.
PAST = (Fraction(1, 20), Fraction(3, 80), Fraction(1, 16), Fraction(1, 32))


@dataclass(frozen=True)
class Proven:
    """A zero with what is printed of it."""

    zero: Zero
    statement: Statement


@dataclass(frozen=True)
class Certificate:
    """All zeros of the window's region, by damping: ``len(zeros)`` equals ``count.number``."""

    problem: Problem
    count: Count
    zeros: tuple[Proven, ...]

    @property
    def modes(self) -> tuple[Proven, ...]:
        return tuple(z for z in self.zeros if z.statement.is_mode)


def prove_zero(problem: Problem, omega: complex, digits: int) -> Proven:
    """Enclose the zero near ``Mω`` and say of which kind it is; more digits are spent where the axis is close.

    Raises a `Refusal` when there is none, or it cannot be proven.
    """
    refusal: Refusal | None = None
    for effort in (digits, digits + 20, 2 * digits + 60):
        zero = enclose_zero(problem, 1j * omega / mass(problem), effort)
        try:
            return Proven(zero, state(zero, effort))
        except LostPrecision as reason:
            refusal = reason
    raise refusal or LostPrecision("not proven")


def count_window(problem: Problem, window: Window) -> Count:
    """The count of the window's region, past the axis by the first ``δ`` that works; raises `NoCount`."""
    refusal: NoCount | None = None
    for past in PAST:
        try:
            return count_zeros(problem, Region(window.re_max, window.depth, window.excluded, past))
        except NoCount as reason:
            refusal = reason
    raise refusal or NoCount("no region to count in")


def certify_window(
    problem: Problem,
    window: Window,
    digits: int = 30,
    proposed: Iterable[complex] = (),
    proven: Iterable[Proven] = (),
) -> Certificate:
    """The complete list of a window, from zeros proposed as ``Mω``; where they fall short, models propose more.

    Zeros of the problem that are ``proven`` already are not proven again. Raises `NoCount` or `Incomplete`.
    """
    count = count_window(problem, window)
    found: list[Proven] = []
    failures: list[str] = []
    for one in proven:
        _admit(count.region, found, one)
    _add(problem, count.region, found, failures, proposed, digits)
    if len(found) < count.number:
        _add(problem, count.region, found, failures, proposals(problem, count.region), digits)
    return complete(problem, count, found, failures)


def complete(problem: Problem, count: Count, found: list[Proven], failures: Iterable[str] = ()) -> Certificate:
    """The certificate of a count and of zeros that are all inside and apart; raises `Incomplete`."""
    if len(found) != count.number:
        reasons = "; ".join(sorted(set(failures)))
        raise Incomplete(f"{count.number} zeros counted, {len(found)} proven{': ' if reasons else ''}{reasons}")
    for i, one in enumerate(found):
        if not _inside(count.region, one):
            raise Incomplete("a proven zero is not proven to lie inside the region")
        if any(not apart(one, other) for other in found[:i]):
            raise Incomplete("two enclosures may hold the same zero")
    ordered = sorted(found, key=lambda z: (-Fraction(z.statement.frequency_im), Fraction(z.statement.frequency_re)))
    return Certificate(problem, count, tuple(ordered))


def _add(
    problem: Problem,
    region: Region,
    found: list[Proven],
    failures: list[str],
    proposed: Iterable[complex],
    digits: int,
) -> None:
    for omega in proposed:
        if any(near(one, omega) for one in found):
            continue
        try:
            one = prove_zero(problem, complex(omega), digits)
        except Refusal as reason:
            failures.append(f"{complex(omega):.6f}: {reason}")
            continue
        _admit(region, found, one)


def _admit(region: Region, found: list[Proven], one: Proven) -> None:
    if all(apart(one, other) for other in found) and not _outside(region, one):
        found.append(one)


def near(one: Proven, omega: complex) -> bool:
    """Planning: whether a proposal is the zero that is already proven."""
    here = complex(float(Fraction(one.statement.frequency_re)), float(Fraction(one.statement.frequency_im)))
    return abs(here - omega) < 1e-9


def apart(one: Proven, other: Proven) -> bool:
    """Whether two enclosures are proven to be disjoint."""
    (a, ra), (b, rb) = enclosure(one.zero), enclosure(other.zero)
    with ctx.workprec(max(one.zero.run.bits, other.zero.run.bits)):
        return bool((a - b).abs_lower() > ra + rb)


def _inside(region: Region, one: Proven) -> bool:
    centre, radius = enclosure(one.zero)
    with ctx.workprec(one.zero.run.bits):
        return region.contains(centre, radius)


def _outside(region: Region, one: Proven) -> bool:
    centre, radius = enclosure(one.zero)
    with ctx.workprec(one.zero.run.bits):
        return region.misses(centre, radius)
