"""Proofs of one point as the survey stores them: its modes, its window, and that no mode grows.

A proof that fails is a status with a reason, never an error: the point keeps whatever else was proven. Every
proven zero carries the record from which its proof runs again (`recheck`), and so does the count of the window.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from time import perf_counter
from typing import Any

from knell.methods.enclosure import record
from knell.methods.enclosure.certificate import Certificate, Proven, certify_window, complete, prove_zero
from knell.methods.enclosure.problem import Problem
from knell.methods.enclosure.refusal import BadRecord, Refusal
from knell.methods.enclosure.region import Region
from knell.physics.exact import parse_rational
from knell.physics.landmarks import Window
from knell.survey import proofs, solve
from knell.survey.points import Point

MODES, WINDOWS = "modes", "windows"
PROVEN, REFUSED, NOT_ASKED = "proven", "refused", "not asked"
# Decimals asked for: radii come out at about a tenth of the last one, hence 1e-30 and 1e-20 with room.
FUNDAMENTAL_DIGITS, DIGITS = 31, 21


@dataclass
class Timings:
    """Seconds of each mode, of the window's count and what it needed beyond them, and of the growing modes."""

    modes: list[float] = field(default_factory=list)
    certificate: float = 0.0
    growing: float = 0.0

    def document(self) -> dict[str, Any]:
        return {
            "modes": [round(seconds, 3) for seconds in self.modes],
            "certificate": round(self.certificate, 3),
            "growing": round(self.growing, 3),
        }


def prove_point(point: Point, search: Mapping[str, Any], extent: str, timings: Timings | None = None) -> dict[str, Any]:
    """Prove every mode of a search; with ``extent`` ``windows``, also that the window holds no other.

    The body of the JSON file: ``modes`` has an entry for each mode of the search, in its order, ``others`` the
    proven zeros of the window that are none of them (of the continued sheet, of a cleared factor, or modes that the
    search did not list), ``certificate`` the status and count of the window, ``growing`` how growing modes are
    excluded. ``timings``, if given, is filled.
    """
    problem, timings = proofs.problem_of(point), timings or Timings()
    modes, proven = _prove_modes(problem, search, timings)
    certificate: dict[str, Any] = {"status": NOT_ASKED, "reason": ""}
    everything: Sequence[Proven] = proven
    if extent == WINDOWS:
        begun = perf_counter()
        certificate, everything = _certify(problem, search, proven)
        timings.certificate = sum(timings.modes) + perf_counter() - begun
    begun = perf_counter()
    growing = proofs.prove_no_growth(point)
    timings.growing = perf_counter() - begun
    listed = [id(one) for one in proven if one.statement.is_mode]
    return {
        "point": dict(search["point"]),
        "window": dict(search["window"]),
        "extent": extent,
        "modes": modes,
        "others": [_zero(one) for one in everything if id(one) not in listed],
        "certificate": certificate,
        "growing": growing,
    }


def _prove_modes(
    problem: Problem, search: Mapping[str, Any], timings: Timings
) -> tuple[list[dict[str, Any]], list[Proven]]:
    """An entry for each mode of the search, and the zeros proven, those that turned out to be no modes included."""
    entries, proven = [], []
    for mode in search["modes"]:
        begun = perf_counter()
        entry = {"family": mode["family"], "index": mode["index"], "status": REFUSED}
        fundamental = (mode["family"], mode["index"]) == (solve.PRINCIPAL, 0)
        try:
            one = prove_zero(problem, _omega(mode), FUNDAMENTAL_DIGITS if fundamental else DIGITS)
            proven.append(one)
            if one.statement.is_mode:
                entry |= {"status": PROVEN, "reason": "", **_zero(one)}
            else:
                entry["reason"] = f"no mode: the zero found is of the kind {one.statement.kind}"
        except ArithmeticError as refusal:
            entry["reason"] = _reason(refusal)
        entries.append(entry)
        timings.modes.append(perf_counter() - begun)
    return entries, proven


def _certify(
    problem: Problem, search: Mapping[str, Any], proven: list[Proven]
) -> tuple[dict[str, Any], Sequence[Proven]]:
    """The certificate of the window and all its zeros; where it is refused, the zeros that were proven before."""
    here = Window(*(parse_rational(search["window"][name]) for name in ("re_max", "depth", "excluded")))
    beside = [_omega(zero) for name in ("continued", "undetermined") for zero in search[name]]
    try:
        found = certify_window(problem, here, DIGITS, beside, proven)
    except ArithmeticError as refusal:
        return {"status": REFUSED, "reason": _reason(refusal)}, proven
    number = found.count.number
    stored = {"status": PROVEN, "reason": "", "count": number, "proof": record.count_document(found.count)}
    return stored, found.zeros


def recheck(document: Mapping[str, Any]) -> list[str]:
    """Run every proof of a file of the survey again; a line for each, and one for the window.

    Raises a `Refusal`: `BadRecord` when a proof gives less than the file claims, `Incomplete` when the window's
    zeros do not add up.
    """
    problem = proofs.problem_of(Point.from_document(document["point"]))
    entries = [entry for entry in document["modes"] if entry["status"] == PROVEN]
    zeros, lines = [], []
    for entry in (*entries, *document["others"]):
        one = record.recheck_zero(entry["proof"])
        if one.zero.problem != problem or _statement(one) != {name: entry[name] for name in _statement(one)}:
            raise BadRecord(f"an entry at {entry['frequency_re']} {entry['frequency_im']}i differs from its proof")
        zeros.append(one)
        lines.append(proofs.line(one))
    if any(not one.statement.is_mode for one in zeros[: len(entries)]):
        raise BadRecord("a zero that is no mode is listed with the modes")
    certificate = document["certificate"]
    if certificate["status"] == PROVEN:
        lines.append(_recheck_window(problem, document, zeros))
    growing = document["growing"]
    if "proof" in growing:
        count = record.recheck_count(problem, growing["proof"])
        if count.number or not count.region.growing:
            raise BadRecord("the count of growing modes is not zero")
    elif growing != proofs.prove_no_growth(Point.from_document(document["point"])):
        raise BadRecord("what is said of growing modes is not what is proven")
    return [*lines, f"growing modes: {growing['says']}"]


def _recheck_window(problem: Problem, document: Mapping[str, Any], zeros: list[Proven]) -> str:
    count = record.recheck_count(problem, document["certificate"]["proof"])
    region: Region = count.region
    stated = {name: str(getattr(region, name)) for name in ("re_max", "depth", "excluded")}
    if region.growing or dict(document["window"]) != stated or count.number != document["certificate"]["count"]:
        raise BadRecord("the window or its count differs from its proof")
    found: Certificate = complete(problem, count, zeros)
    return f"{count.number} zeros counted, {len(found.zeros)} proven, {len(found.modes)} of them modes: complete"


def _omega(zero: Mapping[str, Any]) -> complex:
    return complex(float(zero["re"]), float(zero["im"]))


def _zero(one: Proven) -> dict[str, Any]:
    return {**_statement(one), "proof": record.zero_document(one)}


def _statement(one: Proven) -> dict[str, str]:
    return record.statement_document(one.statement)


def _reason(refusal: ArithmeticError) -> str:
    return f"{refusal.reason}: {refusal}" if isinstance(refusal, Refusal) else str(refusal)
