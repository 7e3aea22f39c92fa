"""Evidence: all runs that computed one mode, and the agreements between them.

    of a method with itself   aim_depth  aim_precision  aim_tilt  match_path  match_precision  spectral_tilt
    between two methods       aim_match  aim_spectral  match_spectral
    of the value with the search in doubles                       search

AIM's best run is the deepest, at its highest precision. ``aim_depth`` compares it with the
next depth and ``aim_tilt`` with the same cell on a second, differently tilted contour (or the
best cell that has both). ``aim_precision`` is the worst agreement of the two most precise runs of
a depth and contour: they differ by rounding alone. The match's and the spectral method's
values are the most precise ones.

*Convergence* is the error a run admits. For the match it is the agreement of two precisions, for
the spectral method that of two tilts. For an AIM run it is the best agreement with AIM at
another depth or on the other contour: truncation differs there, so what the two share is
not truncated. The contour is chosen anew for each depth, hence a deeper run may be the worse
one. Rounding is no excuse: a run that is ok says that its precision was enough. An AIM run
without a second depth or tilt does not know its convergence; the agreement with another
method must not excuse itself.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace
from itertools import groupby

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
        plain = [rung for rung in _ladder(self.aim) if not rung.tilted]
        return plain[0].value if plain else None

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
    rungs = _ladder(evidence.aim)
    best = next((rung for rung in rungs if not rung.tilted), None)
    aim, convergence = (best.value, _convergence(best, rungs)) if best else (None, None)
    links = {
        "aim_depth": _pair(_two_deepest(rungs), rungs),
        "aim_precision": _two_most_precise(rungs),
        "aim_tilt": _pair(_two_tilts(rungs), rungs),
        "aim_spectral": _link(aim, spectral, convergence, tilts),
        "aim_match": _link(aim, match, convergence, precise),
        "match_path": _link(evidence.match_other_path.value, evidence.match.value, precise),
        "match_precision": _link(evidence.match.value, evidence.match_more_precise.value),
        "match_spectral": _link(spectral, match, precise, tilts),
        "spectral_tilt": _link(evidence.spectral_tilted.value, spectral),
    }
    return {name: link for name, link in links.items() if link}


@dataclass(frozen=True)
class _Rung:
    """One AIM run that is ok."""

    depth: int
    precision: int
    tilted: bool
    value: Frequency

    @property
    def truncation(self) -> tuple[int, bool]:
        """Runs that differ here have independent truncation errors, others differ by rounding alone."""
        return self.depth, self.tilted


def _ladder(runs: Iterable[AimRun]) -> list[_Rung]:
    """The runs that are ok: deepest first, the plain contour before the tilted, precise before less so."""
    rungs = [
        _Rung(run.depth, run.precision, tilted, each.value)
        for run in runs
        for tilted, each in ((False, run.plain), (True, run.tilted))
        if each.value is not None
    ]
    return sorted(rungs, key=lambda rung: (-rung.depth, rung.tilted, -rung.precision))


def _two_deepest(rungs: list[_Rung]) -> tuple[_Rung, _Rung] | None:
    """On the plain contour the next depth's rung, at the best one's precision if that is ok, and the best."""
    plain = [rung for rung in rungs if not rung.tilted]
    shallower = [rung for rung in plain if rung.depth < plain[0].depth]
    if not shallower:
        return None
    next_depth = [rung for rung in shallower if rung.depth == shallower[0].depth]
    same_column = [rung for rung in next_depth if rung.precision == plain[0].precision]
    return (same_column or next_depth)[0], plain[0]


def _two_tilts(rungs: list[_Rung]) -> tuple[_Rung, _Rung] | None:
    """The tilted and the plain rung of the best cell that has both."""
    tilted = {(rung.depth, rung.precision): rung for rung in rungs if rung.tilted}
    plain = ((rung, (rung.depth, rung.precision)) for rung in rungs if not rung.tilted)
    return next(((tilted[cell], rung) for rung, cell in plain if cell in tilted), None)


def _two_most_precise(rungs: list[_Rung]) -> Link | None:
    """The worst agreement of the two most precise rungs over depths and contours: they differ by rounding."""
    columns = (list(column) for _, column in groupby(rungs, key=lambda rung: rung.truncation))
    links = [_link(column[1].value, column[0].value) for column in columns if len(column) > 1]
    worst = min((link for link in links if link), key=lambda link: link.digits, default=None)
    return worst and replace(worst, whole=True)


def _convergence(rung: _Rung, rungs: list[_Rung]) -> float | None:
    """The best agreement of ``rung`` with one of another depth or contour; None where there is none."""
    others = (other for other in rungs if other.truncation != rung.truncation)
    return max((agreement(rung.value, other.value) for other in others), default=None)


def _pair(pair: tuple[_Rung, _Rung] | None, rungs: list[_Rung]) -> Link | None:
    return pair and _link(pair[0].value, pair[1].value, *(_convergence(rung, rungs) for rung in pair))


def _digits(a: Frequency | None, b: Frequency | None) -> float | None:
    return None if a is None or b is None else agreement(a, b)


def _link(a: Frequency | None, b: Frequency | None, *convergences: float | None) -> Link | None:
    """The link of two runs; without convergences it is a convergence itself, and nothing bounds it but the writing."""
    if a is None or b is None:
        return None
    known = [x for x in convergences if x is not None]
    return Link(agreement(a, b), min([carried(a, b), *known]), bool(convergences) and len(known) == len(convergences))
