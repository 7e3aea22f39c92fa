"""The tiny survey from end to end: complete, repeatable, and nothing is computed twice or used damaged."""

from __future__ import annotations

import json
import re
from pathlib import Path
from typing import TYPE_CHECKING

import pytest

from knell.command import main
from knell.survey import jsonfile

if TYPE_CHECKING:
    from conftest import Workflow

pytestmark = pytest.mark.slow

POINT = "results/cells/window-1_2/axial-l2-n4-k1_2"
DOWNSTREAM = {"dataset", "provenance", "all"}


def of_points(jobs: dict[str, int]) -> dict[str, int]:
    """The jobs that compute, without dataset, figures and what follows."""
    return {rule: count for rule, count in jobs.items() if rule in ("search", "cell", "witness", "proofs")}


def test_a_run_makes_everything_with_a_record(finished: Workflow) -> None:
    results = finished.folder / "results"
    cells = finished.cells()
    assert len(cells) == 2 * (3 + 2)
    for name in cells:
        kind = re.sub(r"aim-.*", "cell", Path(name).stem).removesuffix("-modes")
        assert jsonfile.read(finished.folder / name, kind)["kind"] == kind
    lines = (results / "tiny/provenance.jsonl").read_text().splitlines()
    recorded = {record["file"]: record for record in map(json.loads, lines)}
    figures = {f"results/tiny/figures/{path.name}" for path in (results / "tiny/figures").glob("*.p??")}
    assert figures and recorded.keys() == {*cells, *figures, "results/tiny/survey.nc", "results/tiny/config.json"}
    for name, record in recorded.items():
        assert record["sha256"] == jsonfile.file_sha256(finished.folder / name)
    solvers = {record["parameters"].get("solver") for record in recorded.values() if record["rule"] == "cell"}
    assert len(solvers) == 1
    assert {json.loads(text)["solver"] for text in cells.values()} == solvers


def test_a_second_run_from_nothing_gives_the_same_bytes(finished: Workflow, workflow: Workflow) -> None:
    workflow.complete()
    assert workflow.cells() == finished.cells()
    assert workflow.dataset == finished.dataset
    for path in (finished.folder / "results/tiny/figures").glob("*.p??"):
        assert (workflow.folder / path.relative_to(finished.folder)).read_bytes() == path.read_bytes()


def test_every_figure_can_be_traced(
    finished: Workflow, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.chdir(finished.folder)
    for path in sorted(Path("results/tiny/figures").glob("*.p??")):
        assert main(["trace", str(path)]) == 0
        text = capsys.readouterr().out
        assert re.search(r"^tiny.yaml +source$", text, re.MULTILINE)
        assert text.splitlines()[-1] == f"rebuild: snakemake --configfile tiny.yaml --force {path}"


def test_damaged_cells_are_set_aside_and_computed_again(copied: Workflow) -> None:
    before, dataset = copied.cells(), copied.dataset
    names = sorted(name for name in before if "aim-" in name)
    data = [before[name] for name in names]
    altered = re.sub(rb'"re": "0\.3', b'"re": "0.4', data[0], count=1)
    # Altered, cut short, emptied, and replaced by a whole cell of another point.
    for name, damaged, whole in zip(names, [altered, data[1][:-30], b"", data[0]], data, strict=True):
        assert damaged != whole
        (copied.folder / name).write_bytes(damaged)
    code, text = copied.run()
    assert code == 0, text
    for name in names:
        assert f"{name}: has changed since it was written; set aside as {name}.damaged" in text
    assert copied.cells() == before
    assert copied.dataset == dataset
    assert copied.jobs() == {}


def test_a_deleted_cell_is_computed_again(copied: Workflow) -> None:
    before = copied.cells()
    (copied.folder / POINT / "aim-N40-P30.json").unlink()
    assert of_points(copied.jobs()) == {"cell": 1}
    assert copied.complete().cells() == before


def test_a_damaged_dataset_is_made_again(copied: Workflow) -> None:
    dataset = copied.dataset
    path = copied.folder / "results/tiny/survey.nc"
    path.write_bytes(dataset[:1000])
    jobs = copied.jobs()
    assert of_points(jobs) == {} and DOWNSTREAM <= jobs.keys()
    assert copied.complete().dataset == dataset


def test_a_wider_grid_computes_only_what_is_new(copied: Workflow) -> None:
    before = copied.cells()
    text = copied.config.read_text()
    copied.config.write_text(text.replace("couplings: [1/2]", "couplings: [1/4, 1/2]"))
    assert of_points(copied.jobs()) == {"search": 1, "cell": 2, "witness": 1, "proofs": 1}
    copied.config.write_text(text.replace("depths: [40, 60]", "depths: [40, 50, 60]"))
    assert of_points(copied.jobs()) == {"cell": 2}
    after = copied.complete().cells()
    assert len(after) == len(before) + 2 and before.items() <= after.items()


def test_proofs_are_turned_off_and_on_without_computing_anything(copied: Workflow) -> None:
    text, proven = copied.config.read_text(), copied.dataset
    copied.config.write_text(text.replace("proofs: modes", "proofs: none"))
    jobs = copied.jobs()
    assert of_points(jobs) == {} and jobs.keys() >= DOWNSTREAM
    assert copied.complete().dataset != proven
    copied.config.write_text(text.replace("proofs: modes", "proofs: windows"))
    assert of_points(copied.jobs()) == {"proofs": 2}
    copied.config.write_text(text)
    assert of_points(copied.jobs()) == {}
    assert copied.complete().dataset == proven


def test_another_config_shares_the_cells(copied: Workflow) -> None:
    text = copied.config.read_text()
    (copied.folder / "other.yaml").write_text(text.replace("required_digits: 6", "required_digits: 7"))
    assert of_points(copied.jobs("--configfile", "other.yaml")) == {}
    code, printed = copied.run("--configfile", "other.yaml")
    assert code == 0, printed
    assert (copied.folder / "results/other/survey.nc").exists()
    assert copied.jobs() == {}


def test_an_edited_comment_in_the_config_recomputes_nothing(copied: Workflow) -> None:
    dataset = copied.dataset
    copied.config.write_text(copied.config.read_text() + "# a remark\n")
    assert of_points(copied.jobs()) == {}
    assert copied.complete().dataset == dataset
