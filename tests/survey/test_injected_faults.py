"""Faults put into one real method at a time: each must show in the agreements and drop the verdict."""

from __future__ import annotations

from collections.abc import Callable
from fractions import Fraction
from functools import partial
from pathlib import Path
from typing import Any

import pytest
from flint import arb, ctx

from knell.methods import aim, spectral_refine
from knell.methods.match import digits as match_digits
from knell.physics import equation
from knell.physics.background import PowerLaw
from knell.physics.equation import Equation, equation_balls
from knell.survey import jsonfile, solve
from knell.survey.layout import CellFolder
from knell.survey.points import Point
from knell.survey.results import read_point
from knell.survey.verdict import Judgement, Verdict, judge

POINT = Point("axial", 4, Fraction(1, 2), 2)
REQUIRED = 10
LADDER = [(100, 60), (100, 120), (200, 60), (200, 120)]


def perturbed(background: PowerLaw, field: str, ell: int, bits: int) -> Equation:
    """The equation with the constant term of W, ``ℓ(ℓ+1) = 6``, wrong by one part in a million."""
    true = equation_balls(background, field, ell, bits)
    with ctx.workprec(bits + 20):
        wrong = (true.W[0] * (1 + arb(1) / 10**6), *true.W[1:])
    return Equation(true.f, true.p, true.H, true.Q, wrong, true.degenerate)


@pytest.fixture(scope="module")
def search() -> dict[str, Any]:
    found = solve.search(POINT, Fraction(3, 2))
    return found | {"modes": found["modes"][:1]}


Verdicts = Callable[..., Judgement]


@pytest.fixture(scope="module")
def sound(search: dict[str, Any]) -> dict[str, dict[str, Any]]:
    """The fundamental's witness and cells, by file name, before any fault."""
    cells = {f"aim-N{N}-P{P}.json": solve.cell(POINT, search, N, P) for N, P in LADDER}
    return {"witness.json": solve.witness(POINT, search)} | cells


@pytest.fixture
def verdict(search: dict[str, Any], sound: dict[str, dict[str, Any]], tmp_path: Path) -> Verdicts:
    """The verdict through the files of a survey, some of them replaced."""

    def judged(**replaced: dict[str, Any]) -> Judgement:
        folder = CellFolder(POINT, Fraction(3, 2), str(tmp_path))
        head = {"format": jsonfile.FORMAT, "solver": "0" * 16}
        jsonfile.write(folder.search, head | {"kind": "search"} | search)
        for name, document in (sound | replaced).items():
            kind = "witness" if name == "witness.json" else "cell"
            jsonfile.write(f"{folder.folder}/{name}", head | {"kind": kind} | document)
        (evidence,) = read_point(folder, LADDER).modes.values()
        return judge(evidence, REQUIRED)

    return judged


def test_without_a_fault_the_mode_is_settled(verdict: Verdicts) -> None:
    judgement = verdict()
    assert (judgement.verdict, judgement.basis) == (Verdict.settled, "aim")
    # AIM has 24 digits at the lower depth, the spectral method as many.
    assert judgement.digits >= 20
    assert "contradiction" not in judgement.roles.values()


@pytest.mark.parametrize(("module", "shown"), [(match_digits, "aim_match"), (spectral_refine, "aim_spectral")])
def test_an_error_of_a_millionth_in_a_witness_drops_the_verdict(
    module: Any, shown: str, verdict: Verdicts, search: dict[str, Any], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(module, "equation_balls", perturbed)
    judgement = verdict(**{"witness.json": solve.witness(POINT, search)})
    assert judgement.verdict is Verdict.drifting
    assert _is_a_millionth(judgement)
    assert judgement.roles["match_spectral"] == judgement.roles[shown] == "contradiction"


def test_an_error_of_a_millionth_in_aim_drops_the_verdict(
    verdict: Verdicts, search: dict[str, Any], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(equation, "equation_balls", perturbed)
    judgement = verdict(**{f"aim-N{N}-P{P}.json": solve.cell(POINT, search, N, P) for N, P in LADDER})
    assert judgement.verdict is Verdict.drifting
    assert _is_a_millionth(judgement)
    assert judgement.roles["aim_match"] == judgement.roles["aim_spectral"] == "contradiction"
    # AIM agrees with itself as well as before.
    assert judgement.agreements["aim_depth"] >= 20


def _is_a_millionth(judgement: Judgement) -> bool:
    """``δω/ω`` is about ``δV/2V``, and V is W's constant term less a part: between 1e-7 and 2e-6."""
    return 5.7 <= judgement.digits <= 7.0


def test_a_cell_with_less_precision_than_it_says_drops_the_verdict(
    verdict: Verdicts, search: dict[str, Any], monkeypatch: pytest.MonkeyPatch
) -> None:
    """35 digits in place of 120 leave nine at depth 200; AIM's own guard, which would say ``starved``, is put off."""
    monkeypatch.setattr(aim, "solve", partial(aim.solve, required=3))
    poor = solve.cell(POINT, search, 200, 35) | {"precision": 120}
    assert poor["modes"][0]["status"] == "ok"
    judgement = verdict(**{"aim-N200-P120.json": poor})
    assert judgement.verdict is Verdict.drifting
    assert judgement.roles["aim_precision"] == "contradiction"


def test_the_guard_itself_leaves_the_cell_out(verdict: Verdicts, search: dict[str, Any]) -> None:
    starved = solve.cell(POINT, search, 200, 35) | {"precision": 120}
    assert starved["modes"][0]["status"] == "starved"
    assert verdict(**{"aim-N200-P120.json": starved}).verdict is Verdict.settled
