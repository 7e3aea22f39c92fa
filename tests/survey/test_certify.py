"""Proofs of a point as stored: complete, repeatable, checked again, and refused in words where they fail."""

from __future__ import annotations

import copy
import json
from collections.abc import Callable
from fractions import Fraction
from typing import Any

import pytest

from knell.methods.enclosure.refusal import BadRecord, Incomplete, NoCount, Refusal
from knell.survey import certify, jsonfile
from knell.survey.certify import prove_point, recheck
from knell.survey.points import Point

Document = dict[str, Any]
POINT = Point("axial", None, Fraction(0), 2)
# Schwarzschild's two first overtones: E. W. Leaver, Proc. R. Soc. A 402, 285 (1985), halved to units of M, quoted from
# memory.
MODES = [("0.373672", "-0.088962"), ("0.346711", "-0.273915")]
WINDOW = {"re_max": "1/2", "depth": "2/5", "excluded": "1/10"}


def search(*modes: tuple[str, str]) -> Document:
    listed = [{"family": "principal", "index": i, "re": re, "im": im} for i, (re, im) in enumerate(modes)]
    return {"point": POINT.document(), "window": WINDOW, "modes": listed, "continued": [], "undetermined": []}


@pytest.fixture(scope="module")
def stored() -> Document:
    """Read back from its text, as a reader finds it."""
    timings = certify.Timings()
    document = prove_point(POINT, search(*MODES), "windows", timings)
    assert len(timings.modes) == 2 and timings.certificate > sum(timings.modes) > 0
    return json.loads(jsonfile.canonical(document))


def test_a_window_with_its_modes(stored: Document) -> None:
    assert stored["certificate"]["status"] == "proven"
    assert (stored["certificate"]["count"], stored["others"]) == (2, [])
    radii = [float(mode["proven_radius"]) for mode in stored["modes"]]
    assert radii[0] <= 1e-30 and radii[1] <= 1e-20
    for mode, (re, im) in zip(stored["modes"], MODES, strict=True):
        assert (mode["status"], mode["kind"]) == ("proven", "mode")
        # Six decimals, rounded.
        assert abs(float(mode["frequency_re"]) - float(re)) < 1e-6 > abs(float(mode["frequency_im"]) - float(im))
    assert stored["growing"]["method"] == "energy"


def test_same_search_same_bytes_and_no_seconds(stored: Document) -> None:
    again = prove_point(POINT, search(*MODES), "windows")
    assert jsonfile.canonical(again) == jsonfile.canonical(stored)
    assert "seconds" not in jsonfile.canonical(again)


def test_every_proof_runs_again(stored: Document) -> None:
    lines = recheck(stored)
    assert len(lines) == 4
    assert lines[2] == "2 zeros counted, 2 proven, 2 of them modes: complete"


def smaller(document: Document) -> None:
    document["modes"][0]["proven_radius"] = "1.00e-40"


def smaller_in_the_proof_too(document: Document) -> None:
    smaller(document)
    document["modes"][0]["proof"]["claim"]["proven_radius"] = "1.00e-40"


def another_frequency(document: Document) -> None:
    document["modes"][1]["frequency_im"] = "-0.3"


def another_point(document: Document) -> None:
    document["point"]["ell"] = 3


def wider_window(document: Document) -> None:
    document["window"]["depth"] = "1/2"


def another_count(document: Document) -> None:
    document["certificate"]["count"] = 1


def counted_otherwise(document: Document) -> None:
    document["growing"] = {"method": "energy", "says": "no mode at all"}


def one_mode_less(document: Document) -> None:
    del document["modes"][1]


def the_same_mode_twice(document: Document) -> None:
    document["modes"][1] = document["modes"][0]


@pytest.mark.parametrize(
    ("alter", "refusal"),
    [
        (smaller, BadRecord),
        (smaller_in_the_proof_too, BadRecord),
        (another_frequency, BadRecord),
        (another_point, BadRecord),
        (wider_window, BadRecord),
        (another_count, BadRecord),
        (counted_otherwise, BadRecord),
        (one_mode_less, Incomplete),
        (the_same_mode_twice, Incomplete),
    ],
)
def test_a_file_that_claims_more_than_its_proofs_give(
    stored: Document, alter: Callable[[Document], None], refusal: type[Refusal]
) -> None:
    document = copy.deepcopy(stored)
    alter(document)
    with pytest.raises(refusal):
        recheck(document)


def test_a_mode_that_the_search_missed_is_proven_beside_its_list() -> None:
    document = prove_point(POINT, search(MODES[0]), "windows")
    assert document["certificate"]["status"] == "proven"
    (other,) = document["others"]
    assert (other["kind"], f"{float(other['frequency_re']):.6f}") == ("mode", MODES[1][0])
    assert len(recheck(document)) == 4


def test_what_is_no_mode_is_refused_with_a_reason() -> None:
    # 0.4 - 0.5i is near nothing; the zero of the continued sheet is one of (-0.01532, -1.99841).
    document = prove_point(POINT, search(MODES[0], ("0.4", "-0.5"), ("-0.01532", "-1.99841")), "modes")
    statuses = [mode["status"] for mode in document["modes"]]
    assert statuses == ["proven", "refused", "refused"]
    assert document["modes"][1]["reason"].startswith("no mode: ")
    assert document["modes"][2]["reason"] == "no mode: the zero found is of the kind continued"
    assert [zero["kind"] for zero in document["others"]] == ["continued"]
    assert document["certificate"] == {"status": "not asked", "reason": ""}
    assert "frequency_re" not in document["modes"][2]


def test_a_count_that_fails_keeps_the_modes(monkeypatch: pytest.MonkeyPatch) -> None:
    def fail(*_: Any) -> None:
        raise NoCount("the winding number is not enclosed")

    monkeypatch.setattr(certify, "certify_window", fail)
    document = prove_point(POINT, search(MODES[0]), "windows")
    assert document["modes"][0]["status"] == "proven"
    assert document["certificate"] == {"status": "refused", "reason": "no count: the winding number is not enclosed"}
    assert len(recheck(document)) == 2


def test_a_division_by_zero_in_a_proof_is_a_reason(monkeypatch: pytest.MonkeyPatch) -> None:
    def fail(*_: Any) -> None:
        raise ZeroDivisionError("a ball holds zero")

    monkeypatch.setattr(certify, "prove_zero", fail)
    (mode,) = prove_point(POINT, search(MODES[0]), "modes")["modes"]
    assert (mode["status"], mode["reason"]) == ("refused", "a ball holds zero")
