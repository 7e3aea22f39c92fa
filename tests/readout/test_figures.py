"""Every figure of a synthetic survey: it draws within its page, repeats byte for byte and carries its record."""

from __future__ import annotations

from collections.abc import Callable
from fractions import Fraction
from pathlib import Path
from typing import Any

import numpy as np
import pytest
import xarray as xr
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure
from PIL import Image

from knell.errors import FileError
from knell.readout import style
from knell.readout.figures import FIGURES
from knell.survey.dataset import assemble
from knell.survey.verdict import Verdict

Make = Callable[..., Any]
ROOT = Path(__file__).parents[2]


@pytest.fixture(scope="module")
def survey(synthetic_survey: Make) -> xr.Dataset:
    """One mode missing, one without evidence."""

    def forget(search: dict[str, Any]) -> None:
        search["modes"] = [mode for mode in search["modes"] if (mode["family"], mode["index"]) != ("principal", 2)]

    def silence(document: dict[str, Any]) -> None:
        document["modes"] = []

    slug = "axial-l2-n4-k9_10"
    cells = {(slug, name): silence for name in ("witness.json", "aim-N100-P40.json", "aim-N100-P80.json")}
    cells |= {(slug, name): silence for name in ("aim-N200-P40.json", "aim-N200-P80.json")}
    made = synthetic_survey(cells | {("axial-l2-n3-k1", "search.json"): forget}, ell={"axial": (2, 3)})
    return assemble(made.config, made.cells)


def drawn(name: str, dataset: xr.Dataset) -> Figure:
    with style.applied():
        figure = FIGURES[name].draw(dataset)
        FigureCanvasAgg(figure).draw()
        return figure


@pytest.fixture(scope="module", params=FIGURES)
def named(request: pytest.FixtureRequest, survey: xr.Dataset) -> tuple[str, Figure]:
    """Each figure once, with its name."""
    return request.param, drawn(request.param, survey)


def test_no_panel_is_empty_and_every_axis_is_named(named: tuple[str, Figure]) -> None:
    panels = [axes for axes in named[1].axes if axes.axison]
    assert panels
    assert all(axes.has_data() for axes in panels)
    # Shared axes are named once, on the outside.
    labels = {axes.get_xlabel() for axes in panels} | {axes.get_ylabel() for axes in panels}
    assert len(labels - {""}) >= 2


def test_nothing_leaves_the_page(named: tuple[str, Figure]) -> None:
    figure = named[1]
    box = figure.get_tightbbox(FigureCanvasAgg(figure).get_renderer())
    width, height = figure.get_size_inches()
    # One pixel for the edges of letters.
    assert min(box.x0, box.y0, width - box.x1, height - box.y1) > -1 / style.DPI


# Fonts make a PDF the slowest part; one figure in every run, the others in the long one.
QUICK = "digits"
BY_COST = [name if name == QUICK else pytest.param(name, marks=pytest.mark.slow) for name in FIGURES]


@pytest.mark.parametrize("name", BY_COST)
def test_same_dataset_same_bytes_with_the_record_inside(name: str, survey: xr.Dataset, tmp_path: Path) -> None:
    for run in range(2):
        for suffix in ("png", "pdf"):
            with style.applied():
                figure = FIGURES[name].draw(survey)
                style.save(figure, tmp_path / f"{run}.{suffix}", FIGURES[name].title, record="0123abcd")
    png, pdf = ([(tmp_path / f"{run}.{suffix}").read_bytes() for run in range(2)] for suffix in ("png", "pdf"))
    assert png[0] == png[1]
    assert pdf[0] == pdf[1]
    assert b"provenance record 0123abcd" in pdf[0]
    assert b"CreationDate" not in pdf[0]
    with Image.open(tmp_path / "0.png") as image:
        assert image.info["Source"] == "provenance record 0123abcd"
        assert image.info["Title"] == FIGURES[name].title


@pytest.mark.parametrize("name", FIGURES)
def test_every_figure_has_a_caption_that_states_the_limits(name: str) -> None:
    entry = FIGURES[name]
    assert entry.caption == f"workflow/report/{name}.rst"
    caption = (ROOT / entry.caption).read_text(encoding="utf-8")
    assert "real" in caption or "Non-rotating" in caption
    assert entry.category in ("spectra", "differences", "evidence", "proofs", "observer", "provenance")


def test_every_caption_has_its_figure() -> None:
    assert {path.stem for path in (ROOT / "workflow" / "report").glob("*.rst")} == set(FIGURES)


def test_what_is_not_settled_is_hatched_and_has_no_colour(survey: xr.Dataset) -> None:
    figure = drawn("difference_maps", survey)
    axial = [axes for axes in figure.axes if axes.get_title()]
    hatched = [patch for axes in axial for patch in axes.patches if patch.get_hatch()]
    blank = [int(np.ma.getmaskarray(axes.collections[0].get_array()).sum()) for axes in axial]
    letters = [text.get_text() for axes in axial for text in axes.texts if text.get_text() in ("d", "m")]
    # One overtone missing at n = 3; at n = 4 all three without evidence; real and imaginary parts each.
    assert len(hatched) == sum(blank) == 2 * (1 + 3)
    assert sorted(letters) == ["d"] * 6 + ["m"] * 2


def test_what_is_not_settled_does_not_stretch_the_colours(survey: xr.Dataset) -> None:
    wild = survey.copy(deep=True)
    place = {"field": 0, "exponent": 1, "coupling": 1, "ell": 0, "overtone": 0}
    assert survey.verdict[place] == Verdict.drifting
    wild.shift_re[place] = 1e6
    calm, stretched = (drawn("difference_maps", dataset) for dataset in (survey, wild))
    limits = [figure.axes[0].collections[0].get_clim() for figure in (calm, stretched)]
    assert limits[0] == limits[1]
    assert limits[0][0] == -limits[0][1]


def test_the_spectrum_crosses_out_what_is_not_settled(survey: xr.Dataset) -> None:
    figure = drawn("spectrum", survey)
    crosses = [line for axes in figure.axes for line in axes.lines if line.get_marker() == "x"]
    crossed = sum(line.get_xdata().size for line in crosses)
    principal = int(((survey.verdict == Verdict.drifting) & np.isfinite(survey.frequency_re)).sum())
    # The synthetic near-axis modes have no evidence at all.
    near_axis = int((survey.near_axis_verdict == Verdict.drifting).sum())
    assert crossed == principal + near_axis > 0


def test_a_wide_survey_marks_positive_shifts(synthetic_survey: Make) -> None:
    couplings = tuple(Fraction(i, 10) for i in range(-4, 5) if i)
    made = synthetic_survey(couplings=couplings, exponents=(3,), depths=(100,), precisions=(40,))
    dataset = assemble(made.config, made.cells)
    figure, shifts = drawn("difference_maps", dataset), dataset.shift_re
    signs = [text.get_text() for text in figure.axes[0].texts if text.get_text() in ("+", "")]
    assert signs.count("+") == int((shifts > 0).sum()) > 0


@pytest.mark.parametrize("name", FIGURES)
def test_the_smallest_survey_draws_too(name: str, synthetic_survey: Make) -> None:
    one = {"exponents": (3,), "couplings": (Fraction(1, 2),), "overtones": (0,), "depths": (100,), "precisions": (40,)}
    made = synthetic_survey(**one)
    assert drawn(name, assemble(made.config, made.cells)).axes[0].has_data()


def test_the_style_leaves_a_users_settings_alone() -> None:
    import matplotlib as mpl

    before = dict(mpl.rcParams)
    with style.applied():
        assert mpl.rcParams["pdf.fonttype"] == 42
    assert dict(mpl.rcParams) == before


def test_another_suffix_is_refused(tmp_path: Path) -> None:
    with pytest.raises(ValueError, match=r"\.png or \.pdf"):
        style.save(style.new_figure(1), tmp_path / "figure.svg", "title")
    assert not list(tmp_path.iterdir())


def test_a_folder_that_is_a_file_is_named(tmp_path: Path) -> None:
    (tmp_path / "taken").write_text("")
    with pytest.raises(FileError, match="taken"):
        style.save(style.new_figure(1), tmp_path / "taken" / "figure.png", "title")
