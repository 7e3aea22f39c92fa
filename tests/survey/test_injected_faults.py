"""Faults put into one real method at a time: each must show in the agreements and drop the verdict."""

from __future__ import annotations

from collections.abc import Callable
from fractions import Fraction
from pathlib import Path
from typing import Any

import pytest
from flint import arb, ctx

from knell.methods import spectral_refine
from knell.methods.match import digits as match_digits
from knell.physics.background import PowerLaw
from knell.physics.equation import Equation, equation_balls
from knell.survey import jsonfile, solve
from knell.survey.layout import CellFolder
from knell.survey.points import Point
from knell.survey.results import read_point
from knell.survey.verdict import Judgement, Verdict, judge

POINT = Point("axial", 4, Fraction(1, 2), 2)
REQUIRED = 10


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


@pytest.fixture
def verdict(search: dict[str, Any], tmp_path: Path) -> Callable[[], Judgement]:
    """The verdict on the fundamental, through the files of a survey."""

    def run() -> Judgement:
        folder = CellFolder(POINT, Fraction(3, 2), str(tmp_path))
        head = {"format": jsonfile.FORMAT, "solver": "0" * 16}
        jsonfile.write(folder.search, head | {"kind": "search"} | search)
        jsonfile.write(folder.witness, head | {"kind": "witness"} | solve.witness(POINT, search))
        (evidence,) = read_point(folder, ()).modes.values()
        return judge(evidence, REQUIRED)

    return run


def test_without_a_fault_the_mode_is_settled(verdict: Callable[[], Judgement]) -> None:
    judgement = verdict()
    assert judgement.verdict is Verdict.settled
    assert judgement.digits >= 20
    assert "contradiction" not in judgement.roles.values()


@pytest.mark.parametrize("module", [match_digits, spectral_refine])
def test_an_error_of_a_millionth_in_one_potential_drops_the_verdict(
    module: Any, verdict: Callable[[], Judgement], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(module, "equation_balls", perturbed)
    judgement = verdict()
    assert judgement.verdict is Verdict.drifting
    # δω/ω is about δV/2V: between 1e-6 and 1e-7.
    assert 5.5 <= judgement.digits <= 7.5
    assert judgement.roles["match_spectral"] == "contradiction"
