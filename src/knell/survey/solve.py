"""What the survey computes for one point: the search, one AIM cell, the witnesses.

Each function returns the body of one JSON file (see `knell.survey.layout`), plain values only.
Frequencies are ``Mω`` as decimal strings. The same inputs give the same bytes: the search's
doubles are rounded to `SEED_DECIMALS` before anything exact starts from them, and every digit
beyond comes from arbitrary-precision arithmetic. Numeric modules are imported where they are
used, because hundreds of cells start in processes of their own.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from fractions import Fraction
from typing import Any

from knell.survey.points import Point

# The search is good to 1e-8 or better wherever doubles resolve it; further digits could differ
# from one processor to the next.
SEED_DECIMALS = 8
# A principal mode oscillates; below this Re Mω a mode is listed with the near-axis family.
PRINCIPAL_RE = 1e-2
# Closer to the axis than this, the side is decided by balls and not by doubles.
_SIDE_IN_DOUBLES = 1e-7
_SIDE_DIGITS = 30
_ON_THE_AXIS = 1e-24
_SPECIAL = 1e-7

MATCH_DIGITS = 24
MORE_PRECISE_DIGITS = 32
SPECTRAL_DIGITS = 16
WRITTEN_DIGITS = 32

PRINCIPAL, NEAR_AXIS, SPECIAL = "principal", "near-axis", "special"


def _head(point: Point, window: Any) -> dict[str, Any]:
    edges = {"re_max": str(window.re_max), "depth": str(window.depth), "excluded": str(window.excluded)}
    return {"point": point.document(), "window": edges}


def search(point: Point, window_depth: Fraction) -> dict[str, Any]:
    """Every mode of the point's window, blind, with the count that says the list is complete.

    ``status`` is ``ok`` when as many zeros were found as counted, else ``failed`` with a reason.
    """
    from knell.methods.match.geometry import MAIN_ROUTE, OTHER_ROUTE
    from knell.methods.match.search import search as find
    from knell.physics.equation import equation_floats
    from knell.physics.landmarks import window as window_of

    background = point.background()
    window = window_of(background, point.ell, window_depth)
    equation = equation_floats(background, point.field, point.ell)
    reason = ""
    for route in (MAIN_ROUTE, OTHER_ROUTE):
        try:
            result = find(equation, window, route)
        except ArithmeticError as error:
            reason = str(error)
            continue
        if result.complete:
            listed = _sort_by_side(point, [complex(z) for z in result.zeros])
            counts = {"counted": result.counted, "found": len(result.zeros)}
            return {**_head(point, window), "status": "ok", "reason": "", **counts, **listed}
        reason = f"{len(result.zeros)} zeros found, {result.counted} counted"
    empty: dict[str, Any] = {"modes": [], "continued": [], "undetermined": []}
    return {**_head(point, window), "status": "failed", "reason": reason, "counted": 0, "found": 0, **empty}


def _sort_by_side(point: Point, zeros: list[complex]) -> dict[str, Any]:
    """Zeros by damping into modes (with family and index), the continued sheet and the undetermined."""
    from knell.physics.landmarks import surface_gravity

    gravity = surface_gravity(point.background())
    modes: list[dict[str, Any]] = []
    others: dict[str, list[dict[str, str]]] = {"continued": [], "undetermined": []}
    counters = dict.fromkeys((PRINCIPAL, NEAR_AXIS, SPECIAL), 0)
    for omega in zeros:
        text = {"re": _decimal(omega.real), "im": _decimal(omega.imag)}
        order = max(1, round(-omega.imag / gravity)) if gravity else 0
        if gravity and abs(omega + 1j * order * gravity) < _SPECIAL:
            family = SPECIAL
        elif abs(omega.real) < _SIDE_IN_DOUBLES:
            side = _side_in_balls(point, omega)
            if side == 0:
                others["undetermined"].append(text)
                continue
            family = NEAR_AXIS if side > 0 else ""
        else:
            family = PRINCIPAL if omega.real > PRINCIPAL_RE else NEAR_AXIS if omega.real > 0 else ""
        if not family:
            others["continued"].append(text)
            continue
        modes.append({"family": family, "index": counters[family], **text})
        counters[family] += 1
    return {"modes": modes, **others}


def _side_in_balls(point: Point, omega: complex) -> int:
    """The sign of ``Re ω`` from thirty digits; 0 where these do not decide it."""
    from knell.methods.match.digits import refine

    run = refine(point.background(), point.field, point.ell, omega, _SIDE_DIGITS)
    if run.status != "ok" or run.frequency is None:
        return 0
    real = float(run.frequency.real)
    return 0 if abs(real) < max(_ON_THE_AXIS, 10 * run.error) else (1 if real > 0 else -1)


def _decimal(x: float) -> str:
    return f"{round(x, SEED_DECIMALS) + 0.0:.{SEED_DECIMALS}f}"


def witness(point: Point, search_document: Mapping[str, Any]) -> dict[str, Any]:
    """The modes of a search by the match over balls (two routes, two precisions) and by the spectral method."""
    return _body(search_document, modes=witness_modes(point, search_document["modes"]))


def witness_modes(point: Point, modes: Iterable[Mapping[str, Any]]) -> list[dict[str, Any]]:
    """The witnesses' runs for some modes of a search."""
    from knell.methods import spectral_refine as spectral
    from knell.methods.match.digits import refine
    from knell.methods.match.geometry import OTHER_ROUTE
    from knell.methods.spectral_path import OTHER_TILT, TILT

    background, field, ell = point.background(), point.field, point.ell
    problem, tilted = (
        spectral.SpectralProblem.of(background, field, ell, SPECTRAL_DIGITS, tilt) for tilt in (TILT, OTHER_TILT)
    )
    entries = []
    for mode in modes:
        seed = _seed(mode)
        match = refine(background, field, ell, seed, MATCH_DIGITS)
        better = match.frequency if match.frequency is not None else seed
        runs = {
            "match": match,
            "match_other_path": refine(background, field, ell, better, MATCH_DIGITS, OTHER_ROUTE),
            "match_more_precise": refine(background, field, ell, better, MORE_PRECISE_DIGITS),
            "spectral": spectral.refine(problem, seed),
            "spectral_tilted": spectral.refine(tilted, seed),
        }
        entries.append(
            {
                "family": mode["family"],
                "index": mode["index"],
                **{name: _run_entry(run) for name, run in runs.items()},
            }
        )
    return entries


def _seed(mode: Mapping[str, Any]) -> complex:
    return complex(float(mode["re"]), float(mode["im"]))


def _run_entry(run: Any) -> dict[str, str]:
    """One run as stored: decimal strings where it is ``ok``, empty ones and a reason where not."""
    from knell.survey.decimals import written

    if run.status != "ok":
        return {"status": run.status, "reason": run.reason, "re": "", "im": ""}
    text = written(run.frequency, WRITTEN_DIGITS)
    return {"status": "ok", "reason": "", "re": text.re, "im": text.im}


def _refused(reason: str) -> dict[str, str]:
    return {"status": "refused", "reason": reason, "re": "", "im": ""}


def cell(point: Point, search_document: Mapping[str, Any], depth: int, precision: int) -> dict[str, Any]:
    """AIM at one depth and precision for every mode of a search, on two differently tilted contours."""
    modes = aim_modes(point, search_document["modes"], depth, precision)
    return _body(search_document, depth=depth, precision=precision, modes=modes)


def aim_modes(point: Point, modes: Iterable[Mapping[str, Any]], depth: int, precision: int) -> list[dict[str, Any]]:
    """AIM's runs for some modes of a search."""
    from knell.methods import aim
    from knell.methods.contour_choice import choose
    from knell.physics.equation import equation_balls

    equation = equation_balls(point.background(), point.field, point.ell, aim.bits_for(precision))
    plan = equation.map(float)
    entries = []
    for mode in modes:
        seed = _seed(mode)
        choice = choose(plan, 1j * seed / plan.mass, depth)
        main, tilted = (
            _refused(choice.reason)
            if contour is None
            else _run_entry(aim.solve(equation, contour, depth, precision, seed))
            for contour in (choice.main, choice.tilted)
        )
        entries.append({"family": mode["family"], "index": mode["index"], **main, "tilted": tilted})
    return entries


def _body(search_document: Mapping[str, Any], **results: Any) -> dict[str, Any]:
    return {"point": dict(search_document["point"]), "window": dict(search_document["window"]), **results}
