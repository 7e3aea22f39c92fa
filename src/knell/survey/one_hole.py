"""The modes of one black hole, searched, recomputed and judged in one go, without files."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from fractions import Fraction
from typing import Any

from knell.errors import KnellError
from knell.physics.landmarks import surface_gravity
from knell.survey import solve
from knell.survey.agreement import rounded
from knell.survey.points import Point
from knell.survey.results import evidence_of
from knell.survey.verdict import Judgement, judge

DEPTHS = (100, 200, 400, 800, 1600)
_FIRST_WINDOW = Fraction(3, 2)
_DEEPEST_WINDOW = Fraction(6)


class NoModes(KnellError):
    """The search of the window is not complete, or holds fewer overtones than were asked for."""


def modes(
    point: Point,
    overtones: int | None = None,
    window_depth: Fraction | None = None,
    digits: int = 12,
    depth: int | None = None,
    precision: int | None = None,
) -> list[dict[str, Any]]:
    """The first ``overtones`` principal modes, or, with ``overtones`` None, every mode of the window.

    Each has ``family``, ``index``, ``re`` and ``im`` (``Mω`` to the agreed digits), ``digits`` and ``verdict``,
    in order of damping. Without ``depth`` AIM goes through `DEPTHS` until it agrees with itself to
    ``digits``; with it, through half of it and it. Raises `NoModes`.
    """
    document = _search(point, overtones, window_depth)
    chosen = [mode for mode in document["modes"] if overtones is None or _is_overtone(mode, overtones)]
    ladder = _ladder(point, chosen, digits, depth, precision)
    witnesses = solve.witness_modes(point, chosen)
    gravity = surface_gravity(point.background())
    out = []
    for i, mode in enumerate(chosen):
        evidence = evidence_of(mode, witnesses[i], {rung: runs[i] for rung, runs in ladder.items()})
        out.append(_row(mode, judge(evidence, digits, gravity)))
    return out


def _is_overtone(mode: Mapping[str, Any], overtones: int) -> bool:
    return mode["family"] == solve.PRINCIPAL and mode["index"] < overtones


def _search(point: Point, overtones: int | None, window_depth: Fraction | None) -> dict[str, Any]:
    """The search of the window asked for, or of the first that holds enough overtones."""
    window = window_depth or _FIRST_WINDOW
    while True:
        document = solve.search(point, window)
        if document["status"] != "ok":
            raise NoModes(f"the search down to Im Mω = -{float(window)} is not complete: {document['reason']}")
        if overtones is None or sum(_is_overtone(mode, overtones) for mode in document["modes"]) == overtones:
            return document
        if window >= _DEEPEST_WINDOW:
            raise NoModes(f"fewer than {overtones} overtones down to Im Mω = -{float(window)}; ask for fewer")
        window = min(window + 1, _DEEPEST_WINDOW)


def _ladder(
    point: Point, chosen: Sequence[Mapping[str, Any]], digits: int, depth: int | None, precision: int | None
) -> dict[tuple[int, int], list[dict[str, Any]]]:
    """AIM's runs by (depth, precision)."""
    depths = DEPTHS if depth is None else (max(1, depth // 2), depth)
    ladder: dict[tuple[int, int], list[dict[str, Any]]] = {}
    for rung in depths:
        working = precision or _precision(rung, digits)
        ladder[rung, working] = solve.aim_modes(point, chosen, rung, working)
        if depth is None and len(ladder) > 1 and _settled(point, chosen, ladder, digits):
            break
    return ladder


def _precision(depth: int, digits: int) -> int:
    """Working digits: the determinant cancels by about what it delivers, which grows like the root of the depth."""
    return 2 * digits + int(4 * depth**0.5)


def _settled(
    point: Point,
    chosen: Sequence[Mapping[str, Any]],
    ladder: Mapping[tuple[int, int], Sequence[Mapping[str, Any]]],
    digits: int,
) -> bool:
    """Whether every mode has its digits, or cannot be reached by AIM at all."""
    for i, mode in enumerate(chosen):
        runs = {rung: entries[i] for rung, entries in ladder.items()}
        if all(run["status"] == "refused" for run in runs.values()):
            continue
        agreements = judge(evidence_of(mode, {}, runs), digits).agreements
        if agreements.get("aim_depth", 0.0) < digits:
            return False
    return True


def _row(mode: Mapping[str, Any], judgement: Judgement) -> dict[str, Any]:
    text = rounded(judgement.value, judgement.digits)
    return {
        "family": mode["family"],
        "index": mode["index"],
        "re": text.re,
        "im": text.im,
        "digits": judgement.digits,
        "verdict": judgement.verdict.name,
    }
