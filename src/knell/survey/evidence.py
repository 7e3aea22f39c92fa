"""Evidence: all runs that computed one mode, and the agreements between them.

    of a method with itself   aim_depth  aim_precision  aim_tilt  match_path  match_precision  spectral_tilt
    between two methods       aim_match  aim_spectral  match_spectral
    of the value with the search in doubles                       search

AIM's best run is the deepest, at its highest precision; ``aim_depth`` compares it with the
next depth, ``aim_precision`` the two most precise runs of the deepest depth that has two,
``aim_tilt`` a run with the same run on a second, differently tilted contour. The match's and
the spectral method's values are the most precise ones.

*Convergence* is the error a run admits. For the match it is the agreement of two precisions, for
the spectral method that of two tilts. For AIM at one depth it is the best agreement of any run
of that depth or of a shallower one with the next depth, with the other contour or with another
method: truncation is an honest excuse, but deepening does not make it worse, and rounding is
none. A cell that had less precision than it says agrees worse with its neighbours than their
convergence allows.
It is unknown where AIM has neither a second depth nor a second tilt, because the agreement
with another method must not excuse itself.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from itertools import pairwise

from knell.survey.agreement import Frequency, agreement, carried

AGREEMENTS = (
    "aim_depth",
    "aim_precision",
    "aim_tilt",
    "aim_spectral",
    "aim_match",
    "match_path",
    "match_precision",
    "match_spectral",
    "spectral_tilt",
    "search",
)


@dataclass(frozen=True)
class Run:
    """One computation of a mode; ``value`` is set exactly when ``status`` is ``ok``."""

    status: str
    value: Frequency | None = None

    def __post_init__(self) -> None:
        if (self.status == "ok") != (self.value is not None):
            raise ValueError(f"a run with status {self.status!r} and value {self.value!r} contradicts itself")


ABSENT = Run("absent")


@dataclass(frozen=True)
class AimRun:
    """AIM at one depth and precision, on two contours."""

    depth: int
    precision: int
    plain: Run
    tilted: Run = ABSENT


@dataclass(frozen=True)
class Evidence:
    """All runs for one mode. ``search`` is the value in doubles, always present."""

    search: Frequency
    aim: tuple[AimRun, ...] = ()
    match: Run = ABSENT
    match_other_path: Run = ABSENT
    match_more_precise: Run = ABSENT
    spectral: Run = ABSENT
    spectral_tilted: Run = ABSENT

    @property
    def best_aim(self) -> Frequency | None:
        """The deepest AIM run that is ok, at its highest precision."""
        ladder = _ladder((run.depth, run.precision, run.plain) for run in self.aim)
        return ladder[0].value if ladder else None

    @property
    def best_match(self) -> Frequency | None:
        return self.match_more_precise.value or self.match.value


@dataclass(frozen=True)
class Link:
    """An agreement, and the digits it could have had.

    ``allowed`` is the smallest of the known convergences of its two runs and of the digits
    both write out; ``whole`` says that neither convergence is unknown.
    """

    digits: float
    allowed: float
    whole: bool


def compare(evidence: Evidence) -> dict[str, Link]:
    """Every agreement the evidence allows, by name in the order of `AGREEMENTS`."""
    match, spectral = evidence.best_match, evidence.spectral.value
    precise = _digits(evidence.match.value, evidence.match_more_precise.value)
    tilts = _digits(evidence.spectral_tilted.value, spectral)
    plain = _ladder((run.depth, run.precision, run.plain) for run in evidence.aim)
    tilted = _ladder((run.depth, run.precision, run.tilted) for run in evidence.aim)
    tilt_pair = _same_cell(tilted, plain)
    expected = _expected(plain, tilted, (match, spectral))
    expected_tilted = _expected(tilted, plain, (match, spectral))

    def rungs(pair: tuple[_Rung, _Rung] | None, first: Mapping[int, float] = expected) -> Link | None:
        return pair and _link(pair[0].value, pair[1].value, first.get(pair[0].depth), expected.get(pair[1].depth))

    def best(other: Frequency | None, convergence: float | None) -> Link | None:
        return _link(plain[0].value, other, expected.get(plain[0].depth), convergence) if plain else None

    links = {
        "aim_depth": rungs(_two_deepest(plain)),
        "aim_precision": rungs(_two_most_precise(plain)),
        "aim_tilt": rungs(tilt_pair, expected_tilted),
        "aim_spectral": best(spectral, tilts),
        "aim_match": best(match, precise),
        "match_path": _link(evidence.match_other_path.value, evidence.match.value, precise),
        "match_precision": _link(evidence.match.value, evidence.match_more_precise.value),
        "match_spectral": _link(spectral, match, precise, tilts),
        "spectral_tilt": _link(evidence.spectral_tilted.value, spectral),
    }
    return {name: link for name, link in links.items() if link}


@dataclass(frozen=True)
class _Rung:
    """One AIM run that is ok, on one contour."""

    depth: int
    precision: int
    value: Frequency


def _ladder(runs: Iterable[tuple[int, int, Run]]) -> list[_Rung]:
    """The runs that are ok, best first."""
    rungs = [_Rung(depth, precision, run.value) for depth, precision, run in runs if run.value is not None]
    return sorted(rungs, key=lambda rung: (rung.depth, rung.precision), reverse=True)


def _two_deepest(ladder: list[_Rung]) -> tuple[_Rung, _Rung] | None:
    """The next depth's rung, at the best one's precision if that is ok, and the best."""
    shallower = [rung for rung in ladder if rung.depth < ladder[0].depth]
    if not shallower:
        return None
    next_depth = [rung for rung in shallower if rung.depth == shallower[0].depth]
    same_column = [rung for rung in next_depth if rung.precision == ladder[0].precision]
    return (same_column or next_depth)[0], ladder[0]


def _two_most_precise(ladder: list[_Rung]) -> tuple[_Rung, _Rung] | None:
    """The less and the more precise rung of the deepest depth that has both."""
    return next(((less, more) for more, less in pairwise(ladder) if more.depth == less.depth), None)


def _same_cell(tilted: list[_Rung], plain: list[_Rung]) -> tuple[_Rung, _Rung] | None:
    """The tilted and the plain rung of the best cell that has both."""
    others = {(rung.depth, rung.precision): rung for rung in tilted}
    pairs = ((others.get((rung.depth, rung.precision)), rung) for rung in plain)
    return next(((other, rung) for other, rung in pairs if other is not None), None)


def _expected(ladder: list[_Rung], turned: list[_Rung], witnesses: Iterable[Frequency | None]) -> dict[int, float]:
    """Digits each depth of a ladder can be expected to have; empty where AIM knows nothing of its own error.

    ``turned`` is the ladder on the other contour.
    """
    depths = sorted({rung.depth for rung in ladder})
    other_contour = {(rung.depth, rung.precision): rung.value for rung in turned}
    if len(depths) < 2 and not any((rung.depth, rung.precision) in other_contour for rung in ladder):
        return {}
    others = [value for value in witnesses if value is not None]
    expected, best = {}, 0.0
    for depth, deeper in zip(depths, [*depths[1:], None], strict=True):
        beyond = others + [rung.value for rung in ladder if rung.depth == deeper]
        for rung in (rung for rung in ladder if rung.depth == depth):
            turned_value = other_contour.get((rung.depth, rung.precision))
            compared = beyond if turned_value is None else [*beyond, turned_value]
            best = max([best, *(agreement(rung.value, other) for other in compared)])
        expected[depth] = best
    return expected


def _digits(a: Frequency | None, b: Frequency | None) -> float | None:
    return None if a is None or b is None else agreement(a, b)


def _link(a: Frequency | None, b: Frequency | None, *convergences: float | None) -> Link | None:
    """The link of two runs; without convergences it is a convergence itself, and nothing bounds it but the writing."""
    if a is None or b is None:
        return None
    known = [x for x in convergences if x is not None]
    return Link(agreement(a, b), min([carried(a, b), *known]), bool(convergences) and len(known) == len(convergences))
