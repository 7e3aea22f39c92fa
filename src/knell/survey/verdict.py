"""Verdicts: what the evidence says of a mode.

`evidence` names the agreements between runs and the convergence each method admits. Only runs
with status ``ok`` take part.

An agreement is *explained* when the convergence of the weaker of its two runs, or the digits
these write out, account for it to within `SLACK` digits. Below the required digits, an
agreement with another method that is explained is *excused*: that run has not got there, which
says nothing against the mode. Below the required digits, any agreement that is not explained
though both convergences are known is a *contradiction*: one run is wrong, and nothing says which.

Each *basis* has its agreements: ``aim`` the two deepest, the two most precise, the two tilts,
AIM-spectral and AIM-match; ``match`` two paths, two precisions, match-spectral and AIM-match.
A method's agreements with itself count always, those with another method unless excused,
contradictions whatever the basis. At least two must count, and the digits of the basis are
the smallest that counts. The basis is ``aim`` where that reaches the required digits, else the
one with more digits. So where AIM reaches 6 digits at its depth, and the match has 20 on two
paths, at two precisions and against the spectral method, the mode has 20 on the basis
``match``, with an aim_depth of 6 beside it; but where AIM agrees with itself to 15 digits and
with the match to 6, the mode has 6 and drifts.

The search saw the mode first, in doubles. A run that agrees with it to fewer than
`SAME_MODE` digits has gone to another mode: then ``search`` counts too.

A rigorous enclosure, where there is one, is the judge of the digits: a value has at most those
that its distance from the proven disc leaves it (see `enclosed`). What is settled and singled out
by an enclosure is ``proven``.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from enum import IntEnum

from knell.survey.agreement import Frequency, agreement
from knell.survey.enclosed import Enclosure, enclosing
from knell.survey.evidence import AGREEMENTS, Evidence, Link, compare

# A difference of two runs falls short of their error by a factor of 30 once in a thousand.
SLACK = 1.5
SAME_MODE = 4.0
# A genuine mode keeps at least three digits when the tilt or the path changes; a root of the cut keeps none.
MOVED = 3.0
# The search writes eight decimals; a surface gravity in doubles is good to 1e-13.
_LOCATED = (7.0, 13.0)

_OWN = {"aim": ("aim_depth", "aim_precision", "aim_tilt"), "match": ("match_path", "match_precision")}
_CROSS = {"aim": ("aim_spectral", "aim_match"), "match": ("match_spectral", "aim_match")}
BASES = tuple(_OWN)
ROLES = ("absent", "beside", "excused", "counted", "contradiction")


class Verdict(IntEnum):
    """What the evidence says of a mode; only the last two are ever shown without a mark."""

    missing = 1
    artefact = 2
    special = 3
    drifting = 4
    settled = 5
    proven = 6


MEANINGS = {
    Verdict.missing: "the survey asks for it and the search did not see it in its window",
    Verdict.artefact: "no mode: moves with the tilt or the path, or lies on the continued sheet",
    Verdict.special: "at -i m surface_gravity, where smoothness at the horizon does not select the ingoing wave",
    Verdict.drifting: "found, but the agreements do not reach the required digits",
    Verdict.settled: "at least two agreements, all that count reach the required digits",
    Verdict.proven: "settled, and proven in ball arithmetic: exactly one mode lies in a disc that holds the value",
}


@dataclass(frozen=True)
class Judgement:
    """A verdict with its reasons.

    ``agreements`` and ``roles`` hold the same names (see `evidence.AGREEMENTS`), absent ones left
    out. A role is one of `ROLES`; ``beside`` is an agreement that is not of the basis.
    ``digits`` is 0 where there is no agreement. ``enclosure`` is the proven disc of the mode, if there is one.
    """

    verdict: Verdict
    value: Frequency
    basis: str
    digits: float
    agreements: dict[str, float]
    roles: dict[str, str]
    enclosure: Enclosure | None = None


def judge(
    evidence: Evidence,
    required_digits: float,
    surface_gravity: float = 0.0,
    enclosures: Iterable[Enclosure] = (),
) -> Judgement:
    """The verdict on one mode the search found.

    ``surface_gravity`` is ``M κ_s`` (0 at the extremal end); ``enclosures`` are those of all modes of
    the point. Raises `ValueError` for text that is no frequency.
    """
    links = compare(evidence)
    bases = {basis: _roles(links, basis, required_digits) for basis in BASES}
    basis = _choose(links, bases, evidence, required_digits)
    value = _value(evidence, basis)
    roles = bases[basis]
    if value is not evidence.search:
        seen = agreement(evidence.search, value)
        links["search"] = Link(seen, seen, whole=False)
        roles["search"] = "beside" if seen >= SAME_MODE else "contradiction"
    counted = _counted(links, roles)
    digits = min(counted, default=0.0)
    enclosure = enclosing(value, enclosures)
    if enclosure:
        digits = min(digits, enclosure.digits_at_most(value))
    enough = len(counted) >= 2 and digits >= required_digits
    return Judgement(
        verdict=_verdict(links, value, digits, enough, surface_gravity, enclosure),
        value=value,
        basis=basis,
        digits=digits,
        agreements={name: links[name].digits for name in AGREEMENTS if name in links},
        roles={name: roles[name] for name in AGREEMENTS if name in roles},
        enclosure=enclosure,
    )


def _roles(links: Mapping[str, Link], basis: str, required_digits: float) -> dict[str, str]:
    roles = {}
    for name, link in links.items():
        short = link.digits < required_digits
        explained = link.digits >= link.allowed - SLACK
        if short and link.whole and not explained:
            roles[name] = "contradiction"
        elif name in _OWN[basis]:
            roles[name] = "counted"
        elif name in _CROSS[basis]:
            roles[name] = "excused" if short and explained else "counted"
        else:
            roles[name] = "beside"
    return roles


def _counted(links: Mapping[str, Link], roles: Mapping[str, str]) -> list[float]:
    return [links[name].digits for name, role in roles.items() if role in ("counted", "contradiction")]


def _choose(
    links: Mapping[str, Link], bases: Mapping[str, Mapping[str, str]], evidence: Evidence, required_digits: float
) -> str:
    """``aim`` where it reaches the required digits, else the basis with more of them."""
    digits = {}
    for basis, has_value in (("aim", evidence.best_aim), ("match", evidence.best_match)):
        counted = _counted(links, bases[basis])
        digits[basis] = min(counted) if has_value and len(counted) >= 2 else -1.0
    if digits["aim"] < 0 and digits["match"] < 0:
        return "match" if evidence.best_match or not evidence.best_aim else "aim"
    return "aim" if digits["aim"] >= min(required_digits, digits["match"]) else "match"


def _value(evidence: Evidence, basis: str) -> Frequency:
    """The basis's best value; the search's where no other run is ok."""
    best = evidence.best_aim if basis == "aim" else evidence.best_match
    return best or evidence.search


def _verdict(
    links: Mapping[str, Link],
    value: Frequency,
    digits: float,
    enough: bool,
    surface_gravity: float,
    enclosure: Enclosure | None,
) -> Verdict:
    if _is_special(value, digits, surface_gravity):
        return Verdict.special
    moves = [links[name].digits for name in ("match_path", "aim_tilt", "spectral_tilt") if name in links]
    # Doubles hold these: 1e-300 of a frequency is as good as nothing.
    error = abs(complex(value)) * 10.0**-digits
    real = complex(value).real
    if (moves and max(moves) < MOVED) or (digits >= MOVED and real < -error):
        return Verdict.artefact
    # A mode closer to the axis than its error may belong to the continued sheet.
    if not enough or real <= error:
        return Verdict.drifting
    return Verdict.proven if enclosure and enclosure.singles_out(value, digits) else Verdict.settled


def _is_special(value: Frequency, digits: float, surface_gravity: float) -> bool:
    """Whether ``value`` is ``-i m κ_s`` for a whole ``m >= 1``, to its own error."""
    if not surface_gravity:
        return False
    omega = complex(value)
    order = max(1, round(-omega.imag / surface_gravity))
    located = min(max(digits, _LOCATED[0]), _LOCATED[1])
    return abs(omega + 1j * order * surface_gravity) <= abs(omega) * 10.0**-located
