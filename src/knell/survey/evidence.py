"""Evidence: all runs that computed one mode, and the agreements between them.

    of a method with itself   aim_depth  aim_precision  aim_tilt  match_path  match_precision  spectral_tilt
    between two methods       aim_match  aim_spectral  match_spectral
    of the value with the search in doubles                       search

AIM's best run is the deepest, at its highest precision; ``aim_depth`` compares it with the
next depth, ``aim_precision`` the two most precise runs of the deepest depth that has two,
``aim_tilt`` a run with the same run on a second, differently tilted contour. The match's and
the spectral method's values are the most precise ones.

*Convergence* is the error a method admits: for AIM the agreement of its two deepest runs, in
the precision column where that is largest (tilted runs: of the two deepest tilted ones; in a
survey of one depth: of the two tilts); for the match that of two precisions; for the spectral
method that of two tilts. The best column, because truncation is an honest excuse and rounding
is not: a cell that claims more precision than it had agrees worse with its neighbours than
the other column's convergence allows.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable
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
        ladder = _ladder(self.aim, _plain)
        return ladder[0][2] if ladder else None

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
    aim, match, spectral = evidence.best_aim, evidence.best_match, evidence.spectral.value
    tilt = _digits(*_two_tilts(evidence.aim))
    plain = _convergence(evidence.aim, _plain)
    plain = tilt if plain is None else plain
    precise = _digits(evidence.match.value, evidence.match_more_precise.value)
    tilts = _digits(spectral, evidence.spectral_tilted.value)
    links = {
        "aim_depth": _link(*_two_deepest(evidence.aim), plain),
        "aim_precision": _link(*_two_most_precise(evidence.aim), plain),
        "aim_tilt": _link(*_two_tilts(evidence.aim), plain, _convergence(evidence.aim, _tilted)),
        "aim_spectral": _link(aim, spectral, plain, tilts),
        "aim_match": _link(aim, match, plain, precise),
        "match_path": _link(evidence.match_other_path.value, evidence.match.value, precise),
        "match_precision": _link(evidence.match.value, evidence.match_more_precise.value),
        "match_spectral": _link(spectral, match, precise, tilts),
        "spectral_tilt": _link(evidence.spectral_tilted.value, spectral),
    }
    return {name: link for name, link in links.items() if link is not None}


def _plain(run: AimRun) -> Run:
    return run.plain


def _tilted(run: AimRun) -> Run:
    return run.tilted


def _ladder(runs: Iterable[AimRun], contour: Callable[[AimRun], Run]) -> list[tuple[int, int, Frequency]]:
    """Depth, precision and value of the runs that are ok, best first."""
    values = [(run.depth, run.precision, contour(run).value) for run in runs]
    return sorted(((d, p, v) for d, p, v in values if v is not None), key=lambda x: x[:2], reverse=True)


def _two_deepest(runs: Iterable[AimRun]) -> tuple[Frequency | None, Frequency | None]:
    """The next depth's value, at the best run's precision if that is ok, and the best run's."""
    ladder = _ladder(runs, _plain)
    if not ladder:
        return None, None
    depth, precision, best = ladder[0]
    shallower = [x for x in ladder if x[0] < depth]
    next_depth = [x for x in shallower if x[0] == shallower[0][0]]
    same_column = [x for x in next_depth if x[1] == precision] or next_depth
    return (same_column[0][2] if same_column else None), best


def _two_most_precise(runs: Iterable[AimRun]) -> tuple[Frequency | None, Frequency | None]:
    """The less and the more precise value at the deepest depth that has both."""
    ladder = _ladder(runs, _plain)
    for more, less in pairwise(ladder):
        if more[0] == less[0]:
            return less[2], more[2]
    return None, None


def _two_tilts(runs: Iterable[AimRun]) -> tuple[Frequency | None, Frequency | None]:
    """The tilted and the plain value of the best run that has both."""
    both = [run for run in runs if run.plain.value and run.tilted.value]
    if not both:
        return None, None
    best = max(both, key=lambda run: (run.depth, run.precision))
    return best.tilted.value, best.plain.value


def _convergence(runs: Iterable[AimRun], contour: Callable[[AimRun], Run]) -> float | None:
    """The largest agreement of the two deepest runs over the precision columns; `None` without two depths."""
    columns: dict[int, list[Frequency]] = {}
    for _, precision, value in _ladder(runs, contour):
        columns.setdefault(precision, []).append(value)
    return max((agreement(column[1], column[0]) for column in columns.values() if len(column) > 1), default=None)


def _digits(a: Frequency | None, b: Frequency | None) -> float | None:
    return None if a is None or b is None else agreement(a, b)


def _link(a: Frequency | None, b: Frequency | None, *convergences: float | None) -> Link | None:
    """The link of two runs; without convergences it is a convergence itself, and nothing bounds it but the writing."""
    if a is None or b is None:
        return None
    known = [x for x in convergences if x is not None]
    return Link(agreement(a, b), min([carried(a, b), *known]), bool(convergences) and len(known) == len(convergences))
