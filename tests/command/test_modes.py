"""``knell modes``: what it asks of the solver, what it prints, and what it refuses."""

from __future__ import annotations

import json
from fractions import Fraction
from typing import Any

import pytest

from knell.command import main
from knell.command.modes import as_json, as_table
from knell.survey.points import Point

MODES: list[dict[str, Any]] = [
    {"family": "principal", "index": 0, "re": "0.37", "im": "-0.09", "digits": 12.34, "verdict": "settled"},
    {"family": "near-axis", "index": 0, "re": "0.00006", "im": "-0.6", "digits": 8.0, "verdict": "drifting"},
    {"family": "principal", "index": 1, "re": "", "im": "", "digits": 0.0, "verdict": "missing"},
]
HOLE = ["modes", "--exponent", "4", "--coupling", "0.9"]


@pytest.mark.parametrize(
    ("arguments", "code", "says"),
    [
        (["modes", "--exponent", "4", "--coupling", "1.2"], 1, "--coupling 1.2: must be at most 1"),
        (["modes", "--exponent", "1", "--coupling", "0.5"], 2, "argument --exponent: 1 must be a whole number, 2 or"),
        (["modes", "--exponent", "2.5", "--coupling", "0.5"], 2, "argument --exponent: 2.5 must be a whole number"),
        (["modes", "--coupling", "0.5"], 1, "--exponent: is missing"),
        (["modes", "--exponent", "4"], 2, "the following arguments are required: --coupling"),
        ([*HOLE, "--ell", "1"], 1, "--ell 1: must be 2 or more for the axial field"),
        ([*HOLE, "--field", "quark"], 2, "argument --field: invalid choice"),
        ([*HOLE, "--depth", "0"], 2, "argument --depth: 0 must be a whole number, 1 or more"),
        ([*HOLE, "--precision", "5"], 2, "argument --precision: 5 must be a whole number, 15 or more"),
        ([*HOLE, "--overtones", "0"], 2, "argument --overtones: 0 must be"),
        ([*HOLE, "--digits", "many"], 2, "argument --digits: many must be"),
        ([*HOLE, "--window", "0.05"], 1, "--window 1/20: must be above 0.1"),
        ([*HOLE, "--window", "deep"], 2, "argument --window: 'deep' is not a number"),
        ([*HOLE, "--window", "1", "--overtones", "2"], 2, "not allowed with"),
        (["modes", "--exponent", "4", "--coupling", "nine tenths"], 2, "'nine tenths' is not a number"),
    ],
)
def test_refusals_are_one_line(arguments: list[str], code: int, says: str, capsys: pytest.CaptureFixture[str]) -> None:
    try:
        returned = main(arguments)
    except SystemExit as exit_:
        returned = int(str(exit_.code))
    captured = capsys.readouterr()
    (line,) = captured.err.splitlines()
    assert (returned, captured.out) == (code, "")
    assert line.startswith("knell modes: ") and says in line


@pytest.mark.parametrize("coupling", ["-1/2", "-0.5", "-.5", "-5e-1"])
def test_negative_couplings_are_no_options(coupling: str, capsys: pytest.CaptureFixture[str]) -> None:
    """They get as far as the next mistake."""
    assert main(["modes", "--exponent", "4", "--coupling", coupling, "--window", "0"]) == 1
    assert "--window 0: must be above" in capsys.readouterr().err


def test_json_is_a_list_of_objects() -> None:
    fundamental, beside, missing = json.loads(as_json(MODES))
    assert fundamental == {
        "family": "principal",
        "overtone": 0,
        "index": 0,
        "frequency_re": "0.37",
        "frequency_im": "-0.09",
        "digits": 12.34,
        "verdict": "settled",
    }
    assert (beside["family"], beside["overtone"], beside["index"]) == ("near-axis", None, 0)
    assert (missing["overtone"], missing["frequency_re"], missing["verdict"]) == (1, "", "missing")


def test_table_has_one_line_for_each_mode() -> None:
    lines = as_table(MODES, Point("axial", 4, Fraction(9, 10), 2), families=True).splitlines()
    assert lines[0] == "axial modes, ℓ = 2, exponent 4, coupling 9/10"
    assert lines[1].split() == ["mode", "Re", "Mω", "Im", "Mω", "digits", "verdict"]
    assert [line.split() for line in lines[2:]] == [
        ["0", "0.37", "-0.09", "12.3", "settled"],
        ["near-axis", "0", "0.00006", "-0.6", "8.0", "drifting"],
        ["1", "-", "-", "0.0", "missing"],
    ]
