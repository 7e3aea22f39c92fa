"""Proofs of a point: proposals from the search, enclosures and certificates from `methods.enclosure`.

The documents here are plain JSON. Each proven mode carries the record from which the proof can be run again
(`recheck`), which trusts neither the search nor this module.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from fractions import Fraction
from time import perf_counter
from typing import Any

from knell.methods.enclosure import record
from knell.methods.enclosure.certificate import Proven, certify_window, prove_zero
from knell.methods.enclosure.count import Count
from knell.methods.enclosure.growing import prove_stable
from knell.methods.enclosure.problem import Problem
from knell.methods.enclosure.refusal import BadRecord, NotAMode, Refusal
from knell.methods.enclosure.region import Region
from knell.methods.enclosure.seeds import proposals
from knell.methods.enclosure.statement import CLEARING, CONTINUED, MODE
from knell.physics.landmarks import Window, window
from knell.survey import solve
from knell.survey.points import Point

PROVEN, REFUSED = "proven", "refused"
# Overtones lie about a quarter apart in |Im Mω|; a window this much deeper is tried when too few were found.
_SPACING, _TRIES = Fraction(1, 4), 4


def problem_of(point: Point) -> Problem:
    """What the enclosures need to know of a point."""
    return Problem(point.background(), point.field, point.ell)


def prove_overtones(point: Point, overtones: int, digits: int) -> list[dict[str, Any]]:
    """The first principal modes, by damping, each with its proof or the reason why there is none.

    The search says which they are; that none was missed between them is not proven here but by `prove_window`.
    """
    depth = max(_SPACING * (overtones + 1), Fraction(1, 2))
    found: list[complex] = []
    for _ in range(_TRIES):
        found = [w for w in _proposed(point, depth) if w.real > solve.PRINCIPAL_RE]
        if len(found) >= overtones:
            break
        depth += 2 * _SPACING
    return prove_listed(point, sorted(found, key=lambda w: -w.imag)[:overtones], digits)


def prove_listed(point: Point, frequencies: Iterable[complex], digits: int) -> list[dict[str, Any]]:
    """One entry for each ``Mω``: ``status`` ``proven`` with statement and record, or ``refused`` with the reason."""
    problem, entries = problem_of(point), []
    for omega in frequencies:
        begun = perf_counter()
        try:
            one = prove_zero(problem, complex(omega), digits)
            if not one.statement.is_mode:
                raise NotAMode(f"the zero found is of the kind {one.statement.kind}")
            entry = {"status": PROVEN, "reason": "", **_statement(one), "proof": record.zero_document(one)}
        except Refusal as reason:
            entry = {"status": REFUSED, "reason": f"{reason.reason}: {reason}", "near": [omega.real, omega.imag]}
        entries.append({**entry, "seconds": perf_counter() - begun})
    return _number(entries)


def prove_window(
    point: Point, depth: Fraction, digits: int, proposed: Sequence[complex] | None = None
) -> dict[str, Any]:
    """The complete list of the point's window of this depth; raises a `Refusal` when it is not proven.

    ``count`` is the proven number of zeros in the region that reaches past the axis: ``modes``, zeros of the
    ``continued`` sheet and of the ``clearing`` together.
    """
    problem, here, begun = problem_of(point), window(point.background(), point.ell, depth), perf_counter()
    certificate = certify_window(problem, here, digits, _proposed(point, depth) if proposed is None else proposed)
    lists: dict[str, list[dict[str, Any]]] = {MODE: [], CONTINUED: [], CLEARING: []}
    for one in certificate.zeros:
        lists[one.statement.kind].append(_statement(one))
    return {
        "point": point.document(),
        "window": {name: str(getattr(here, name)) for name in ("re_max", "depth", "excluded")},
        "complete": True,
        "count": certificate.count.number,
        "modes": _number(lists[MODE]),
        "continued": lists[CONTINUED],
        "clearing": lists[CLEARING],
        "proof": record.certificate_document(certificate),
        "seconds": perf_counter() - begun,
    }


def prove_no_growth(point: Point) -> dict[str, Any]:
    """That no mode grows: by the sign of the potential, or by a count, or that neither was proven."""
    try:
        stability = prove_stable(problem_of(point))
    except Refusal as reason:
        return {"method": "none", "says": f"not proven: {reason}"}
    if stability.count is None:
        return {"method": "energy", "says": "V >= 0 outside the horizon: no growing mode at all"}
    box = stability.count.region
    return {
        "method": "count",
        "says": f"no growing mode but perhaps with |Re Mω|, |Im Mω| <= {box.excluded}",
        "proof": record.count_document(stability.count),
    }


def recheck(document: Any) -> list[str]:
    """Run every proof of a document again, as printed by ``knell prove --json``; a line for each.

    Raises a `Refusal` (`BadRecord` when the proof gives less than is claimed).
    """
    if isinstance(document, list):
        return [_recheck_entry(entry) for entry in document]
    if not isinstance(document, Mapping) or "proof" not in document:
        raise BadRecord("the file holds no proof: write one with knell prove --json")
    certificate = record.recheck_certificate(document["proof"])
    proven = {kind: [z for z in certificate.zeros if z.statement.kind == kind] for kind in (MODE, CONTINUED, CLEARING)}
    for name, kind in (("modes", MODE), ("continued", CONTINUED), ("clearing", CLEARING)):
        if len(document.get(name, ())) != len(proven[kind]):
            raise BadRecord(f"the list {name} has another length than its proof")
        for entry, one in zip(document[name], proven[kind], strict=True):
            _same(entry, _statement(one))
    if document.get("count") != certificate.count.number:
        raise BadRecord("the count differs from that of its proof")
    _same_window(document, certificate.count)
    lines = [line(one) for one in certificate.zeros]
    return [*lines, f"{certificate.count.number} zeros counted, {len(certificate.zeros)} proven: complete"]


def _recheck_entry(entry: Any) -> str:
    if not isinstance(entry, Mapping) or "proof" not in entry:
        raise BadRecord("an entry holds no proof")
    one = record.recheck_zero(entry["proof"])
    _same(entry, _statement(one))
    return line(one)


def _same(entry: Mapping[str, Any], proven: Mapping[str, str]) -> None:
    if any(entry.get(name) != text for name, text in proven.items()):
        raise BadRecord(f"an entry says {[entry.get(name) for name in proven]}, its proof {list(proven.values())}")


def _same_window(document: Mapping[str, Any], count: Count) -> None:
    region: Region = count.region
    stated = {name: str(getattr(region, name)) for name in ("re_max", "depth", "excluded")}
    if document.get("window") != stated or region.growing:
        raise BadRecord("the window differs from that of its proof")


def line(one: Proven) -> str:
    s = one.statement
    return f"{s.kind} {s.frequency_re} {s.frequency_im}i: within {s.proven_radius}, unique within {s.unique_radius}"


def _statement(one: Proven) -> dict[str, str]:
    s = one.statement
    return {
        "frequency_re": s.frequency_re,
        "frequency_im": s.frequency_im,
        "proven_radius": s.proven_radius,
        "unique_radius": s.unique_radius,
    }


def _number(entries: list[dict[str, Any]]) -> list[dict[str, Any]]:
    """Family and index by damping within the family, in front of each entry."""
    counters: dict[str, int] = {}
    numbered = []
    for entry in entries:
        re = float(entry["frequency_re"]) if "frequency_re" in entry else entry["near"][0]
        family = solve.PRINCIPAL if re > solve.PRINCIPAL_RE else solve.NEAR_AXIS
        index = counters.setdefault(family, 0)
        counters[family] += 1
        overtone = index if family == solve.PRINCIPAL else None
        numbered.append({"family": family, "overtone": overtone, "index": index, **entry})
    return numbered


def _proposed(point: Point, depth: Fraction) -> list[complex]:
    """Zeros proposed by the search in doubles, or by models where it gives up."""
    document = solve.search(point, depth)
    listed = [entry for name in ("modes", "continued", "undetermined") for entry in document.get(name, ())]
    if document.get("status") == "ok" and listed:
        return [complex(float(entry["re"]), float(entry["im"])) for entry in listed]
    here: Window = window(point.background(), point.ell, depth)
    return proposals(problem_of(point), Region(here.re_max, here.depth, here.excluded, Fraction(1, 20)))
