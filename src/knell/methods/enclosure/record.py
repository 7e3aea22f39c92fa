"""Proofs as plain dictionaries: enough to run every check again without the search that found them.

A record holds exact numbers as text (``mantissa p exponent``, ``9/10``), vertices as doubles (which JSON keeps
exactly), orders, bits and degrees. Reading one back runs the whole proof at these and demands at least what the
record claims."""

from __future__ import annotations

from collections.abc import Mapping
from fractions import Fraction
from typing import Any

from flint import acb, arb

from knell.methods.enclosure.certificate import Certificate, Proven, complete
from knell.methods.enclosure.count import Count, Edge, edge, region_factors, total
from knell.methods.enclosure.effort import Run
from knell.methods.enclosure.mismatch import Route
from knell.methods.enclosure.one_zero import shrink, uniqueness
from knell.methods.enclosure.printed import complex_text, read_dyadic, to_fraction
from knell.methods.enclosure.problem import MATCH_POINT, Problem
from knell.methods.enclosure.refusal import BadRecord
from knell.methods.enclosure.region import Region
from knell.methods.enclosure.statement import Statement, state
from knell.physics.background import PowerLaw

_MOST_BITS, _MOST_TERMS, _HIGHEST = 100_000, 200_000, 500
_CLAIMS = ("kind", "frequency_re", "frequency_im", "proven_radius", "unique_radius")


def problem_document(problem: Problem) -> dict[str, Any]:
    """Field, exponent (null for Schwarzschild), coupling and ``ℓ``."""
    exponent = None if problem.background.is_schwarzschild else problem.background.exponent
    coupling = str(problem.background.coupling)
    return {"field": problem.field, "exponent": exponent, "coupling": coupling, "ell": problem.ell}


def read_problem(document: Mapping[str, Any]) -> Problem:
    """The inverse of `problem_document`; raises `BadRecord`."""
    try:
        exponent, coupling = document["exponent"], Fraction(document["coupling"])
        return Problem(PowerLaw(2 if exponent is None else exponent, coupling), document["field"], document["ell"])
    except (KeyError, TypeError, ValueError) as error:
        raise BadRecord(f"the point of the record is not readable: {error}") from error


def zero_document(one: Proven) -> dict[str, Any]:
    """The proof of one zero, with what it claims."""
    first = one.zero.uniqueness
    share = to_fraction(first.r) / Fraction(first.run.radius)
    return {
        "point": problem_document(one.zero.problem),
        "claim": statement_document(one.statement),
        "digits": len(one.statement.frequency_re.partition(".")[2]) - 3,
        "match_point": [MATCH_POINT.real, MATCH_POINT.imag],
        "uniqueness": {**run_document(first.run), "share": float(share)},
        "value": run_document(one.zero.run),
    }


def statement_document(statement: Statement) -> dict[str, str]:
    """The decimal strings of a statement."""
    return {name: getattr(statement, name) for name in _CLAIMS}


def run_document(run: Run) -> dict[str, Any]:
    """One evaluation of ``D``: where, on which disc, along which routes, with which orders and bits."""
    return {
        "sigma": complex_text(run.sigma),
        "radius": run.radius,
        "degree": run.degree,
        "bits": run.bits,
        "cleared": list(run.cleared),
        "infinity": _route_document(run.infinity),
        "horizon": _route_document(run.horizon),
    }


def _route_document(route: Route) -> dict[str, Any]:
    return {"vertices": [[v.real, v.imag] for v in route.vertices], "orders": list(route.orders or ())}


def read_run(document: Mapping[str, Any]) -> Run:
    """The inverse of `run_document`; raises `BadRecord` for anything that is not whole numbers and doubles."""
    try:
        sigma = acb(*(read_dyadic(part) for part in document["sigma"]))
        radius = document["radius"]
        numbers = [document["degree"], document["bits"], *document["cleared"]]
        if not isinstance(radius, (int, float)) or not all(type(n) is int and n >= 0 for n in numbers):
            raise BadRecord("a run holds something that is not a number")
        if document["bits"] > _MOST_BITS or document["degree"] > _HIGHEST or document["bits"] < 2:
            raise BadRecord("the bits or the degree of a run are out of range")
        routes = [_read_route(document[name]) for name in ("infinity", "horizon")]
        anything = (arb(1), arb(1))
        cleared = tuple(document["cleared"])
        return Run(sigma, float(radius), document["degree"], document["bits"], anything, cleared, *routes)
    except (KeyError, TypeError, ValueError) as error:
        raise BadRecord(f"a run of the record is not readable: {error}") from error


def _read_route(document: Mapping[str, Any]) -> Route:
    vertices = tuple(complex(re, im) for re, im in document["vertices"])
    orders = tuple(document["orders"])
    if len(orders) != len(vertices) or not all(type(n) is int and 0 < n <= _MOST_TERMS for n in orders):
        raise BadRecord("a route needs one whole order for each vertex")
    return Route(vertices, orders)


def recheck_zero(document: Mapping[str, Any]) -> Proven:
    """Run the proof of one zero again; raises `BadRecord` when it yields less than the record claims."""
    problem = read_problem(document.get("point", {}))
    try:
        claim, share, digits = document["claim"], document["uniqueness"]["share"], document["digits"]
        first_run, run = read_run(document["uniqueness"]), read_run(document["value"])
        if complex(*document["match_point"]) != MATCH_POINT:
            raise BadRecord("the record uses another match point")
    except (KeyError, TypeError, ValueError) as error:
        raise BadRecord(f"the record of a zero is not readable: {error}") from error
    first = uniqueness(problem, first_run, float(share))
    zero, _ = shrink(problem, first, run)
    statement = state(zero, digits)
    _compare(statement, claim)
    return Proven(zero, statement)


def _compare(statement: Statement, claim: Mapping[str, str]) -> None:
    """The proof must give at least the claim: the same centre and kind, no larger a radius, no smaller a disc."""
    try:
        same = all(getattr(statement, name) == claim[name] for name in ("kind", "frequency_re", "frequency_im"))
        small = Fraction(statement.proven_radius) <= Fraction(claim["proven_radius"])
        wide = Fraction(statement.unique_radius) >= Fraction(claim["unique_radius"])
    except (KeyError, TypeError, ValueError) as error:
        raise BadRecord(f"the claim of the record is not readable: {error}") from error
    if not (same and small and wide):
        raise BadRecord(f"the check gives {statement_document(statement)}, the record claims {dict(claim)}")


def count_document(count: Count) -> dict[str, Any]:
    """The proof of a count: the region and every edge with its run."""
    region = count.region
    corners = {"re_max": region.re_max, "depth": region.depth, "excluded": region.excluded, "past": region.past}
    edges = [
        {"start": [str(c) for c in e.start], "end": [str(c) for c in e.end], "run": run_document(e.run)}
        for e in count.edges
    ]
    named = {name: str(value) for name, value in corners.items()}
    return {"region": {**named, "growing": region.growing}, "number": count.number, "edges": edges}


def recheck_count(problem: Problem, document: Mapping[str, Any]) -> Count:
    """Run the count again; raises `BadRecord` when the number differs."""
    try:
        box = document["region"]
        sides = [Fraction(box[name]) for name in ("re_max", "depth", "excluded", "past")]
        region = Region(*sides, growing=bool(box["growing"]))
        pieces = [(_corner(item["start"]), _corner(item["end"]), read_run(item["run"])) for item in document["edges"]]
        claimed = document["number"]
    except (KeyError, TypeError, ValueError) as error:
        raise BadRecord(f"the record of a count is not readable: {error}") from error
    factors = region_factors(problem, region)
    edges: list[Edge] = [edge(problem, a, b, run, factors) for a, b, run in pieces]
    count = total(region, edges, factors)
    if count.number != claimed:
        raise BadRecord(f"the check counts {count.number} zeros, the record claims {claimed}")
    return count


def _corner(texts: Any) -> tuple[Fraction, Fraction]:
    re, im = texts
    return Fraction(re), Fraction(im)


def certificate_document(certificate: Certificate) -> dict[str, Any]:
    """The proof of a complete list: the count and every zero."""
    return {
        "point": problem_document(certificate.problem),
        "count": count_document(certificate.count),
        "zeros": [zero_document(one) for one in certificate.zeros],
    }


def recheck_certificate(document: Mapping[str, Any]) -> Certificate:
    """Run a complete list again; raises `BadRecord` or `Incomplete` when it does not hold."""
    problem = read_problem(document.get("point", {}))
    count = recheck_count(problem, document.get("count", {}))
    zeros = [recheck_zero(item) for item in document.get("zeros", ())]
    if any(one.zero.problem != problem for one in zeros):
        raise BadRecord("a zero of the record belongs to another point")
    return complete(problem, count, zeros)
