"""The chain from a figure back to the config, and what is said when a link no longer holds."""

from __future__ import annotations

import shlex
from pathlib import Path

import pytest

from knell.command import main
from knell.record import environment
from knell.record.environment import Code
from knell.record.provenance import Making
from knell.record.trace import trace
from knell.survey.layout import record_path

VERSIONS = {name: "1.0" for names in environment._LIBRARIES.values() for name in names}
CELLS = [f"results/cells/window-3_2/axial-l2-n4-k1_{i}/aim.json" for i in (2, 4)]
FIGURE = "results/wide/figures/map.png"


@pytest.fixture(autouse=True)
def survey(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """Config, search, two cells, dataset and figure, each with its record."""
    monkeypatch.chdir(tmp_path)
    monkeypatch.setenv(environment.VARIABLE, Code("c0ffee", False, None, VERSIONS).text())
    Path("config").mkdir()
    Path("config/wide.yaml").write_text("a: 1\n")
    stated = {"config": "config/wide.yaml", "overrides": ["couplings=[0.5, 9/10]"]}
    make("resolve_config", "results/wide/config.json", ["config/wide.yaml"], stated)
    make("search", "results/cells/search.json", [])
    for cell in CELLS:
        make("cell", cell, ["results/cells/search.json"])
    # The dataset reads the search too, so the search is reached on a short and on a long way.
    make("dataset", "results/wide/survey.nc", ["results/wide/config.json", "results/cells/search.json", *CELLS])
    make("figure", FIGURE, ["results/wide/survey.nc"])
    return tmp_path


def make(rule: str, file: str, inputs: list[str], parameters: dict[str, object] | None = None) -> None:
    making = Making.begin(rule, inputs, parameters or {})
    Path(file).parent.mkdir(parents=True, exist_ok=True)
    Path(file).write_text(f"{rule} {file}")
    making.finish(file)


def test_the_chain_runs_from_the_figure_to_the_config() -> None:
    chain = trace(FIGURE)
    assert list(chain.stages) == ["figure", "dataset", "resolve_config", "cell", "search", "source"]
    assert chain.stages["cell"] == CELLS
    assert chain.stages["source"] == ["config/wide.yaml"]
    assert chain.problems == []


def test_the_command_that_rebuilds_names_config_and_overrides() -> None:
    words = shlex.split(trace(FIGURE).rebuild)
    assert words == [
        *("snakemake", "--configfile", "config/wide.yaml"),
        *("--config", "couplings=[0.5, 9/10]", "--force", FIGURE),
    ]


def test_what_is_printed(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["trace", FIGURE]) == 0
    lines = capsys.readouterr().out.splitlines()
    assert lines[0].split()[:2] == [FIGURE, "figure"]
    assert "results/cells/window-3_2/… (2 files)" in lines[3]
    assert lines[-3:-1] == ["code: commit c0ffee, clean", "every file is as it was recorded"]
    assert lines[-1].startswith("rebuild: snakemake --configfile config/wide.yaml ")


@pytest.mark.parametrize("absolute", [True, False])
def test_from_another_folder(survey: Path, monkeypatch: pytest.MonkeyPatch, absolute: bool) -> None:
    monkeypatch.chdir("results/wide/figures")
    chain = trace(str(survey / FIGURE) if absolute else "map.png")
    assert chain.problems == [] and len(chain.records) == 7
    assert chain.rebuild.startswith(f"cd {survey} && snakemake ")


@pytest.mark.parametrize(
    ("file", "line"),
    [
        (FIGURE, f"{FIGURE}: has changed since it was made"),
        ("results/wide/survey.nc", "results/wide/survey.nc: has changed since it was made"),
        (CELLS[1], f"{CELLS[1]}: has changed since it was made"),
        ("config/wide.yaml", "results/wide/config.json: was made from another config/wide.yaml than the one there now"),
    ],
)
def test_a_changed_link_is_named(file: str, line: str, capsys: pytest.CaptureFixture[str]) -> None:
    Path(file).write_text("edited")
    assert main(["trace", FIGURE]) == 1
    assert line in capsys.readouterr().out.splitlines()


def test_an_input_made_again_with_another_result_is_named() -> None:
    Path(CELLS[0]).write_text("other digits")
    Making.begin("cell", ["results/cells/search.json"], {}).finish(CELLS[0])
    assert trace(FIGURE).problems == [
        f"results/wide/survey.nc: was made from another {CELLS[0]} than the one there now"
    ]


@pytest.mark.parametrize("file", [FIGURE, CELLS[0], "config/wide.yaml"])
def test_a_missing_link_is_named_once(file: str) -> None:
    Path(file).unlink()
    assert trace(FIGURE).problems == [f"{file}: is missing"]


def test_a_missing_file_with_its_record_is_named() -> None:
    Path(CELLS[0]).unlink()
    Path(record_path(CELLS[0])).unlink()
    assert trace(FIGURE).problems == [f"{CELLS[0]}: is missing"]


def test_a_damaged_record_is_named() -> None:
    Path(record_path(CELLS[0])).write_text("{")
    (problem,) = trace(FIGURE).problems
    assert problem.startswith(record_path(CELLS[0])) and "damaged" in problem


@pytest.mark.parametrize(
    ("file", "says"), [("none.png", "there is no such file"), ("config/wide.yaml", "has no record")]
)
def test_files_without_a_history(file: str, says: str, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["trace", file]) == 1
    (line,) = capsys.readouterr().err.splitlines()
    assert line.startswith(f"knell trace: {file}: {says}")
