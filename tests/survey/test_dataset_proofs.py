"""What is proven, in the dataset: radii, verdicts, complete windows, and what must not count as proven."""

from __future__ import annotations

from collections.abc import Callable
from decimal import Decimal
from fractions import Fraction
from pathlib import Path
from typing import Any

import numpy as np
import pytest
import xarray as xr

from knell.errors import DamagedFile, StaleError
from knell.survey import dataset_schema as schema
from knell.survey.dataset import assemble
from knell.survey.points import Point
from knell.survey.verdict import Verdict

Make = Callable[..., Any]
Document = dict[str, Any]
POINT = Point("axial", 4, Fraction(9, 10), 2)
HOLE = {"field": "axial", "exponent": 4, "coupling": 0.9, "ell": 2}
SMALL = {"exponents": (4,), "couplings": (Fraction(9, 10),)}
NEW = {
    *(f"{p}{name}" for p in ("", "near_axis_", "schwarzschild_") for name in ("proven_radius", "unique_radius")),
    *(f"{p}proven_{part}_text" for p in ("", "near_axis_", "schwarzschild_") for part in ("re", "im")),
    *(f"{p}{n}" for p in ("", "schwarzschild_") for n in ("window_count_proven", "complete", "no_growing_mode")),
}


def proven(make: Make, edit: Callable[[Document], object] | None = None, extent: str = "windows") -> xr.Dataset:
    survey = make({(POINT.slug, f"proofs-{extent}.json"): edit} if edit else None, proofs=extent, **SMALL)
    return assemble(survey.config, survey.cells)


@pytest.fixture(scope="module")
def windows(synthetic_survey: Make) -> xr.Dataset:
    return proven(synthetic_survey)


def test_proven_modes_carry_their_discs(windows: xr.Dataset, true_frequency: Make) -> None:
    assert bool((windows.verdict == Verdict.proven).all())
    assert bool((windows.schwarzschild_verdict == Verdict.proven).all())
    mode = windows.sel(HOLE | {"overtone": 1})
    re, im = true_frequency(POINT, 1)
    assert abs(Decimal(str(mode.proven_re_text.values)) - re) < Decimal("1e-24")
    assert abs(Decimal(str(mode.proven_im_text.values)) - im) < Decimal("1e-24")
    assert float(mode.proven_radius) == 1.23e-22
    # The double nearest to 3.45e-2 is larger, so the one below stands.
    assert 3.45e-2 - 1e-16 < float(mode.unique_radius) < 3.45e-2


def test_a_proof_does_not_settle_what_the_methods_leave_open(windows: xr.Dataset) -> None:
    mode = windows.sel(HOLE | {"near_axis": 0})
    assert mode.near_axis_verdict == Verdict.drifting
    assert float(mode.near_axis_proven_radius) == 1.23e-22
    assert str(mode.near_axis_proven_im_text.values) == "-0.61"


def test_windows_are_complete(windows: xr.Dataset) -> None:
    point = windows.sel(HOLE)
    assert point.complete == schema.COMPLETE_FLAGS["proven"]
    assert windows.complete.attrs["flag_meanings"].split()[int(point.complete)] == "proven"
    # Six modes and one zero of the continued sheet.
    assert float(point.window_count_proven) == 7
    assert windows.no_growing_mode.attrs["flag_meanings"].split()[int(point.no_growing_mode)] == "proven_by_energy"
    assert float(point.schwarzschild_window_count_proven) == 6
    assert point.schwarzschild_complete == schema.COMPLETE_FLAGS["proven"]
    assert ", prover fedcba9876543210" in windows.attrs["source"]


def test_without_proofs_everything_else_is_the_same(synthetic_survey: Make, windows: xr.Dataset) -> None:
    without = proven(synthetic_survey, extent="none")
    assert not (without.verdict == Verdict.proven).any()
    for name in NEW:
        fill = schema.variables()[name].fill
        empty = np.isnan(without[name]) if fill != fill else without[name] == fill
        assert bool(empty.all()), name
    verdicts = {"verdict", "schwarzschild_verdict"}
    same = [name for name in without.data_vars if name not in NEW | verdicts]
    xr.testing.assert_identical(without[same].drop_attrs(deep=False), windows[same].drop_attrs(deep=False))
    assert bool((without.verdict == Verdict.settled).all())


def test_modes_alone_say_nothing_of_windows(synthetic_survey: Make) -> None:
    dataset = proven(synthetic_survey, extent="modes")
    assert bool((dataset.verdict == Verdict.proven).all())
    assert not dataset.complete.any()
    assert bool(np.isnan(dataset.window_count_proven).all())


def refuse_overtone(document: Document) -> None:
    document["modes"][1] = {"family": "principal", "index": 1, "status": "refused", "reason": "precision: lost"}


def refuse_window(document: Document) -> None:
    document["certificate"] = {"status": "refused", "reason": "no count: too few bits"}
    document["others"] = []
    document["growing"] = {"method": "none", "says": "not proven: a count"}


def test_a_failed_proof_leaves_its_mode_settled_and_its_window_open(synthetic_survey: Make) -> None:
    point = proven(synthetic_survey, refuse_overtone).sel(HOLE)
    assert list(point.verdict) == [Verdict.proven, Verdict.settled, Verdict.proven]
    assert np.isnan(point.proven_radius[1])
    assert point.proven_re_text[1] == ""
    assert point.complete == schema.COMPLETE_FLAGS["not_proven"]


def test_a_failed_certificate_is_no_error(synthetic_survey: Make) -> None:
    point = proven(synthetic_survey, refuse_window).sel(HOLE)
    assert bool((point.verdict == Verdict.proven).all())
    assert point.complete == schema.COMPLETE_FLAGS["not_proven"]
    assert np.isnan(point.window_count_proven)
    assert point.no_growing_mode == schema.GROWING_FLAGS["none"]


def swap(document: Document) -> None:
    """The entries under each other's names: only the discs say whose they are."""
    document["modes"].reverse()
    for index, entry in enumerate(document["modes"]):
        entry["index"] = index


def test_discs_go_to_modes_by_place_and_not_by_order(synthetic_survey: Make, windows: xr.Dataset) -> None:
    swapped = proven(synthetic_survey, swap)
    xr.testing.assert_identical(swapped[sorted(NEW)], windows[sorted(NEW)])
    assert bool((swapped.verdict == windows.verdict).all())


def one_more_mode(document: Document) -> None:
    document["others"].append({**document["others"][0], "kind": "mode", "frequency_re": "0.5"})


def twice_the_same(document: Document) -> None:
    document["modes"][2] = {**document["modes"][1], "index": 2}


@pytest.mark.parametrize("edit", [one_more_mode, twice_the_same])
def test_a_list_that_differs_from_the_proven_one_is_not_complete(synthetic_survey: Make, edit: Make) -> None:
    assert proven(synthetic_survey, edit).sel(HOLE).complete == schema.COMPLETE_FLAGS["not_proven"]


def move_by_a_billionth(document: Document) -> None:
    """Far outside the proven radius, far inside the disc of uniqueness."""
    entry = document["modes"][0]
    entry["frequency_re"] = str(Decimal(entry["frequency_re"]) * (1 + Decimal("1e-9")))


def test_a_disc_that_the_value_misses_drops_the_verdict(synthetic_survey: Make) -> None:
    mode = proven(synthetic_survey, move_by_a_billionth).sel(HOLE | {"overtone": 0})
    assert mode.verdict == Verdict.drifting
    # A billionth of Re ω is somewhat less of |ω|.
    assert 9 <= float(mode.digits) < 9.1


@pytest.mark.parametrize(
    ("change", "error", "words"),
    [
        ({"extent": "modes"}, DamagedFile, "holds proofs of modes"),
        ({"solver": "f" * 16}, StaleError, "another state of the solver"),
        ({"prover": "f" * 16}, StaleError, "proven by another state of the code"),
        ({"kind": "cell"}, DamagedFile, "not a proofs file"),
    ],
)
def test_proofs_that_are_not_those_asked_for_are_refused(
    synthetic_survey: Make, change: Document, error: type, words: str
) -> None:
    with pytest.raises(error, match=words) as caught:
        proven(synthetic_survey, lambda document: document.update(change))
    assert "proofs-windows.json" in str(caught.value)


def test_missing_proofs_are_named(synthetic_survey: Make) -> None:
    survey = synthetic_survey(proofs="windows", **SMALL)
    path = Path(survey.config.folder(POINT, survey.cells).proofs("windows"))
    path.write_text(path.read_text()[:-40])
    with pytest.raises(DamagedFile, match=r"proofs-windows\.json: damaged or cut short"):
        assemble(survey.config, survey.cells)
