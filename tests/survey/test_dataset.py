"""The dataset from synthetic cells: layout, values, bytes, and what must not get through."""

from __future__ import annotations

import json
import shutil
import subprocess
from collections.abc import Callable
from decimal import Decimal
from fractions import Fraction
from pathlib import Path
from typing import Any

import numpy as np
import pytest
import xarray as xr

from knell.errors import DamagedFile, FileError, StaleError
from knell.physics.background import PowerLaw
from knell.physics.landmarks import light_ring
from knell.survey.dataset import assemble, build
from knell.survey.points import Point
from knell.survey.verdict import Verdict

Make = Callable[..., Any]
POINT = Point("axial", 4, Fraction(9, 10), 2)
HOLE = {"field": "axial", "exponent": 4, "coupling": 0.9, "ell": 2}


@pytest.fixture(scope="module")
def stored(synthetic_survey: Make, tmp_path_factory: pytest.TempPathFactory) -> xr.Dataset:
    survey, file = synthetic_survey(), tmp_path_factory.mktemp("stored") / "survey.nc"
    build(survey.config, file, survey.cells)
    with xr.open_dataset(file) as dataset:
        return dataset.load()


def test_dimensions_and_coordinates(stored: xr.Dataset) -> None:
    five = ("field", "exponent", "coupling", "ell", "overtone")
    assert stored.frequency_re.dims == stored.verdict.dims == stored.shift_im.dims == five
    assert stored.ladder_digits.dims == (*five, "depth", "precision")
    assert stored.near_axis_re.dims == (*five[:4], "near_axis")
    assert stored.schwarzschild_re.dims == ("field", "ell", "overtone")
    assert stored.agreement_digits.dims == (*five, "agreement")
    assert list(stored.coupling_exact.values) == ["1/2", "9/10", "1"]
    assert list(stored.field.values) == ["axial"]
    assert [stored[name].dtype.kind for name in ("exponent", "ell", "overtone", "depth", "precision")] == ["i"] * 5


def test_every_variable_says_what_it_is(stored: xr.Dataset) -> None:
    for name, variable in stored.variables.items():
        assert variable.attrs["long_name"], name
        if variable.dtype.kind == "f":
            assert variable.attrs["units"], name
        if variable.dtype == np.int8:
            meanings = variable.attrs["flag_meanings"].split()
            assert list(variable.attrs["flag_values"]) == list(range(len(meanings))), name
            assert variable.values.max(initial=0) < len(meanings), name


def test_flags_mean_what_the_verdicts_are(stored: xr.Dataset) -> None:
    meanings = stored.verdict.attrs["flag_meanings"].split()
    assert all(meanings[verdict] == verdict.name for verdict in Verdict)


def test_the_limits_are_stated(stored: xr.Dataset) -> None:
    limits = stored.attrs["limits"]
    for words in ("Non-rotating", "real remnants rotate", "axial", "effective source", "claim of detection"):
        assert words in limits
    assert json.loads(stored.attrs["config"])["couplings"] == ["1/2", "9/10", "1"]


def test_values_come_from_the_deepest_most_precise_cell(stored: xr.Dataset, true_frequency: Make) -> None:
    mode = stored.sel(HOLE | {"overtone": 0})
    re, im = true_frequency(POINT, 0)
    # The synthetic iteration has 24 digits at depth 200: doubles and the agreed 17 digits see the true value.
    assert mode.frequency_re == float(re)
    assert mode.frequency_im == float(im)
    assert mode.verdict == Verdict.settled
    assert stored.basis.attrs["flag_meanings"].split()[int(mode.basis)] == "aim"
    # 1.7 √100 digits at the next depth.
    assert float(mode.digits) == pytest.approx(17, abs=0.05)
    assert abs(Decimal(str(mode.frequency_re_text.values)) - re) <= Decimal("0.6e-17")
    assert len(str(mode.frequency_re_text.values)) == len("0.") + 17


def test_shifts_are_per_cent_of_schwarzschild(stored: xr.Dataset, true_frequency: Make) -> None:
    for overtone in (0, 1, 2):
        values, start = true_frequency(POINT, overtone), true_frequency(POINT.reference, overtone)
        expected = [float(100 * (x / x0 - 1)) for x, x0 in zip(values, start, strict=True)]
        mode = stored.sel(HOLE | {"overtone": overtone})
        # Both values are good to 11 digits or more.
        assert [float(mode.shift_re), float(mode.shift_im)] == pytest.approx(expected, rel=1e-8)
        assert float(mode.schwarzschild_re) == pytest.approx(float(start[0]), rel=1e-10)


def test_a_shift_smaller_than_a_double_resolves_survives(synthetic_survey: Make) -> None:
    survey = synthetic_survey(couplings=(Fraction(1, 10**18),), depths=(400, 800), precisions=(200, 400))
    dataset = assemble(survey.config, survey.cells)
    # Im ω scales as 1 - κ/(3n) for the fundamental of the synthetic survey, known to 34 digits.
    assert float(dataset.shift_im[0, 1, 0, 0, 0]) == pytest.approx(-100e-18 / 12, rel=1e-6)


def test_the_ladder_holds_each_cell_with_its_status(stored: xr.Dataset) -> None:
    mode = stored.sel(HOLE | {"overtone": 1})
    status = [stored.ladder_status.attrs["flag_meanings"].split()[i] for i in mode.ladder_status.values.ravel()]
    # Depth 200 at 40 digits is starved in the synthetic survey.
    assert status == ["ok", "ok", "starved", "ok"]
    digits = mode.ladder_digits.values
    assert np.isnan(digits[1, 0])
    # 1.7 √depth / 1.5 digits: the deepest cell is measured against another method, not against itself.
    assert digits[:, 1] == pytest.approx([17 / 1.5, 1.7 * 200**0.5 / 1.5], abs=0.05)


def test_agreements_and_their_roles(stored: xr.Dataset) -> None:
    mode = stored.sel(HOLE | {"overtone": 2})
    roles = stored.agreement_role.attrs["flag_meanings"].split()
    role = {str(name): roles[int(mode.agreement_role.sel(agreement=name))] for name in stored.agreement.values}
    # Overtone 2 has 1.7 √100 / 2 = 8.5 digits at depth 100, so the match stands, and AIM at 12 counts beside it.
    assert role["aim_depth"] == "beside"
    assert role["aim_match"] == role["match_path"] == role["match_precision"] == role["match_spectral"] == "counted"
    assert float(mode.digits) == float(mode.agreement_digits.sel(agreement="aim_match"))


def test_near_axis_modes_have_a_dimension_of_their_own(stored: xr.Dataset) -> None:
    mode = stored.sel(HOLE | {"near_axis": 0})
    assert (float(mode.near_axis_re), float(mode.near_axis_im)) == (2e-5, -0.61)
    # The synthetic survey has no other run of it.
    assert mode.near_axis_verdict == Verdict.drifting
    assert float(mode.near_axis_digits) == 0
    assert mode.near_axis_re_text == ""


def test_counts_and_windows(stored: xr.Dataset) -> None:
    point = stored.sel(HOLE)
    # Five overtones, one mode near the axis, one zero of the continued sheet.
    assert (point.window_count, point.window_found, float(point.window_re_max)) == (7, 7, 0.7)
    assert (point.window_continued, point.window_undetermined) == (1, 0)
    assert (float(stored.window_depth), float(stored.window_excluded)) == (1.5, 0.1)


def test_landmarks(stored: xr.Dataset) -> None:
    hole = stored.sel(exponent=4, coupling=1.0)
    # The double root of f: r_h = 2(n-1)M/n.
    assert float(hole.horizon_radius) == pytest.approx(1.5, rel=1e-15)
    assert float(hole.surface_gravity) == 0
    assert float(hole.light_ring_radius) == light_ring(PowerLaw(4, Fraction(1))).radius


def test_points_outside_a_fields_list_of_ell_stay_empty(synthetic_survey: Make) -> None:
    survey = synthetic_survey(ell={"axial": (2, 3), "scalar": (1,)})
    dataset = assemble(survey.config, survey.cells)
    outside = dataset.sel(field="scalar", ell=[2, 3])
    assert list(dataset.ell.values) == [1, 2, 3]
    assert not outside.verdict.any()
    assert not outside.ladder_status.any()
    assert not outside.search_status.any()
    assert bool(np.isnan(outside.frequency_re).all())
    assert bool((outside.frequency_re_text == "").all())
    assert bool((dataset.sel(field="scalar", ell=1).verdict == Verdict.settled).all())


def test_coupling_zero_on_the_grid_is_schwarzschild_for_every_exponent(synthetic_survey: Make) -> None:
    survey = synthetic_survey(couplings=(Fraction(0), Fraction(1)))
    dataset = assemble(survey.config, survey.cells)
    assert not dataset.sel(coupling=0).shift_re.any()
    assert bool((dataset.sel(coupling=0).frequency_re == dataset.schwarzschild_re).all())


def test_an_overtone_the_search_did_not_see_is_missing(synthetic_survey: Make) -> None:
    def forget(search: dict[str, Any]) -> None:
        search["modes"] = [mode for mode in search["modes"] if (mode["family"], mode["index"]) != ("principal", 2)]

    survey = synthetic_survey({(POINT.slug, "search.json"): forget})
    mode = assemble(survey.config, survey.cells).sel(HOLE | {"overtone": 2})
    assert mode.verdict == Verdict.missing
    assert np.isnan(mode.frequency_re)
    assert np.isnan(mode.shift_re)


def test_a_failed_search_leaves_its_point_missing(synthetic_survey: Make) -> None:
    def fail(search: dict[str, Any]) -> None:
        search.update(status="failed", reason="4 zeros found, 5 counted", modes=[], counted=0, found=0)

    survey = synthetic_survey({(POINT.slug, "search.json"): fail})
    dataset = assemble(survey.config, survey.cells)
    point = dataset.sel(HOLE)
    assert dataset.search_status.attrs["flag_meanings"].split()[int(point.search_status)] == "failed"
    assert bool((point.verdict == Verdict.missing).all())
    assert np.isnan(point.window_count)


def test_a_fault_in_one_cell_drops_the_verdict(synthetic_survey: Make) -> None:
    def spoil(cell: dict[str, Any]) -> None:
        for mode in cell["modes"]:
            for run in (mode, mode["tilted"]):
                run["re"] = str(Decimal(run["re"]) * (1 + Decimal("1e-8")))

    sound = synthetic_survey()
    before = assemble(sound.config, sound.cells).verdict
    poor = synthetic_survey({(POINT.slug, "aim-N200-P80.json"): spoil})
    after = assemble(poor.config, poor.cells).verdict
    # Precision 40 is starved at that depth, so no second precision shows the fault; but the two contours agree
    # to 11 digits or more, and with the other methods to 8.
    assert list(after.sel(HOLE)) == [Verdict.drifting] * 3
    assert int((before != after).sum()) == 3


def test_same_cells_same_bytes(synthetic_survey: Make, tmp_path: Path) -> None:
    survey = synthetic_survey()
    files = [tmp_path / name for name in ("a.nc", "b.nc")]
    for file in files:
        build(survey.config, file, survey.cells)
    assert files[0].read_bytes() == files[1].read_bytes()
    assert sorted(x.name for x in tmp_path.iterdir()) == ["a.nc", "b.nc"]


def test_text_and_arrays_are_compressed_and_chunked(synthetic_survey: Make, tmp_path: Path) -> None:
    survey = synthetic_survey()
    build(survey.config, tmp_path / "survey.nc", survey.cells)
    with xr.open_dataset(tmp_path / "survey.nc") as dataset:
        for name, variable in dataset.variables.items():
            assert not variable.dims or (variable.encoding["zlib"] and not variable.encoding["contiguous"]), name


@pytest.mark.skipif(not shutil.which("ncdump"), reason="ncdump is not installed")
def test_ncdump_reads_it(synthetic_survey: Make, tmp_path: Path) -> None:
    survey = synthetic_survey()
    build(survey.config, tmp_path / "survey.nc", survey.cells)
    dump = subprocess.run(["ncdump", "-v", "coupling_exact", tmp_path / "survey.nc"], capture_output=True, text=True)
    assert dump.returncode == 0
    assert '"9/10"' in dump.stdout


def cut_short(file: Path) -> None:
    file.write_bytes(file.read_bytes()[:-200])


def change_a_digit(file: Path) -> None:
    file.write_text(file.read_text().replace("-0.0", "-0.1", 1))


@pytest.mark.parametrize("name", ["search.json", "witness.json", "aim-N100-P40.json"])
@pytest.mark.parametrize(
    ("damage", "error", "words"),
    [
        (Path.unlink, FileError, "No such file"),
        (cut_short, DamagedFile, "cut short"),
        (change_a_digit, DamagedFile, "checksum"),
    ],
)
def test_missing_and_damaged_files_are_named_in_one_line(
    synthetic_survey: Make, tmp_path: Path, name: str, damage: Callable[[Path], None], error: type, words: str
) -> None:
    survey = synthetic_survey(couplings=(POINT.coupling,), exponents=(POINT.exponent,))
    file = Path(survey.config.folder(POINT, survey.cells).folder, name)
    damage(file)
    with pytest.raises(error) as caught:
        build(survey.config, tmp_path / "survey.nc", survey.cells)
    message = str(caught.value)
    assert str(file) in message
    assert words in message
    assert "\n" not in message
    assert not (tmp_path / "survey.nc").exists()


MISPLACED = {
    "another point": lambda document: document["point"].update(coupling="1/2"),
    "another window": lambda document: document["window"].update(re_max="9/10"),
    "depth 300": lambda document: document.update(depth=300),
}


@pytest.mark.parametrize("words", MISPLACED)
def test_a_cell_that_is_not_what_its_name_says_is_refused(synthetic_survey: Make, words: str) -> None:
    survey = synthetic_survey({(POINT.slug, "aim-N100-P40.json"): MISPLACED[words]})
    with pytest.raises(DamagedFile, match=words):
        assemble(survey.config, survey.cells)


@pytest.mark.parametrize("name", ["witness.json", "aim-N100-P40.json", "search.json"])
def test_results_of_two_solvers_do_not_mix(synthetic_survey: Make, name: str) -> None:
    survey = synthetic_survey({(POINT.slug, name): lambda document: document.update(solver="f" * 16)})
    with pytest.raises(StaleError, match="another state of the solver"):
        assemble(survey.config, survey.cells)
