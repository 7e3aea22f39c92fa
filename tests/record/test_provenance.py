"""Records: an id that depends on what determines a file, and on nothing else."""

from __future__ import annotations

import dataclasses
import json
from pathlib import Path

import pytest

from knell.errors import DamagedFile, FileError, StaleError
from knell.record import environment
from knell.record.environment import Code
from knell.record.provenance import Making, Record
from knell.record.verify import check_files, merge_records
from knell.survey.layout import record_path

VERSIONS = {name: "1.0" for names in environment._LIBRARIES.values() for name in names}
CLEAN = Code("c0ffee", False, None, VERSIONS)


@pytest.fixture(autouse=True)
def in_a_folder_of_its_own(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    monkeypatch.setenv(environment.VARIABLE, CLEAN.text())
    Path("search.json").write_text("found")


def make(file: str, content: str, inputs: tuple[str, ...], rule: str = "cell", **parameters: object) -> Making:
    making = Making.begin(rule, inputs, {"depth": 100, **parameters})
    Path(file).write_text(content)
    making.finish(file)
    return making


def test_the_id_is_known_before_and_repeats() -> None:
    begun = Making.begin("cell", ("search.json",), {"depth": 100})
    made = make("cell.json", "digits", ("search.json",))
    record = Record.read("cell.json")
    assert record is not None
    assert record.id == begun.id == made.id
    assert (record.file, record.rule, record.inputs[0].file) == ("cell.json", "cell", "search.json")
    assert record.versions == {name: "1.0" for name in ("python", "knell", "python-flint", "numpy", "mpmath")}


def test_the_id_does_not_depend_on_where_when_and_how_long() -> None:
    Path("elsewhere").mkdir()
    Path("elsewhere/search.json").write_text("found")
    make("cell.json", "digits", ("search.json",))
    make("elsewhere/cell.json", "digits", (str(Path("elsewhere/search.json").absolute()),))
    a, b = Record.read("cell.json"), Record.read("elsewhere/cell.json")
    assert a is not None and b is not None
    assert a.id == b.id
    assert b.inputs[0].file == "elsewhere/search.json"


def test_the_id_depends_on_everything_else() -> None:
    making = Making.begin("cell", ("search.json",), {"depth": 100})
    Path("search.json").write_text("found more")
    newer = {**VERSIONS, "python-flint": "1.1"}
    others = [
        dataclasses.replace(making, rule="witness"),
        dataclasses.replace(making, parameters={"depth": 101}),
        dataclasses.replace(making, code=dataclasses.replace(CLEAN, commit="decaf")),
        dataclasses.replace(making, code=dataclasses.replace(CLEAN, dirty=True, source="1234")),
        dataclasses.replace(making, code=dataclasses.replace(CLEAN, dirty=True, source="5678")),
        dataclasses.replace(making, code=dataclasses.replace(CLEAN, versions=newer)),
        Making.begin("cell", ("search.json",), {"depth": 100}),
    ]
    assert len({making.id, *(other.id for other in others)}) == 1 + len(others)
    # A cell draws nothing: another matplotlib changes figures only.
    plotter = dataclasses.replace(CLEAN, versions={**VERSIONS, "matplotlib": "2.0"})
    assert dataclasses.replace(making, code=plotter).id == making.id
    figure = dataclasses.replace(making, rule="figure")
    assert dataclasses.replace(figure, code=plotter).id != figure.id


def test_a_missing_input_is_named() -> None:
    with pytest.raises(FileError, match=r"cannot read none\.json"):
        Making.begin("cell", ("none.json",), {})


def test_a_whole_survey_is_left_alone() -> None:
    make("cell.json", "digits", ("search.json",), solver="s1")
    before = sorted(p.name for p in Path(".").rglob("*"))
    assert check_files(["cell.json", "not yet made.json"], "s1") == []
    assert sorted(p.name for p in Path(".").rglob("*")) == before


@pytest.mark.parametrize("content", ["", "digit", "digitz"])
def test_a_damaged_file_is_set_aside(content: str) -> None:
    make("cell.json", "digits", ("search.json",))
    Path("cell.json").write_text(content)
    (line,) = check_files(["cell.json"], "s1")
    assert line.startswith("cell.json: has changed since it was written; set aside as cell.json.damaged")
    assert not Path("cell.json").exists() and not Path(record_path("cell.json")).exists()
    assert Path("cell.json.damaged").read_text() == content
    assert check_files(["cell.json"], "s1") == []


def test_a_damaged_record_is_set_aside_with_its_file() -> None:
    make("cell.json", "digits", ("search.json",))
    record = Path(record_path("cell.json"))
    record.write_text(record.read_text().replace("100", "200"))
    (line,) = check_files(["cell.json"], "s1")
    assert line.startswith("cell.json: its record is damaged")
    assert not Path("cell.json").exists()


def test_a_copy_under_another_name_is_set_aside() -> None:
    make("cell.json", "digits", ("search.json",))
    Path("other.json").write_text("digits")
    Path(record_path("other.json")).write_text(Path(record_path("cell.json")).read_text())
    (line,) = check_files(["other.json"], "s1")
    assert line.startswith("other.json: is a copy of cell.json")


def test_files_of_another_solver_are_counted_and_kept() -> None:
    for name in ("a.json", "b.json"):
        make(name, "digits", ("search.json",), solver="s0")
    (line,) = check_files(["a.json", "b.json"], "s1")
    assert line.startswith("2 files were made by another state of the solver")
    assert Path("a.json").exists() and Path("b.json").exists()


def test_records_are_merged_one_line_each() -> None:
    make("cell.json", "digits", ("search.json",))
    make("a.nc", "dataset", ("cell.json",), rule="dataset")
    merge_records(["cell.json", "a.nc"], "log.jsonl")
    lines = [json.loads(line) for line in Path("log.jsonl").read_text().splitlines()]
    assert [line["file"] for line in lines] == ["a.nc", "cell.json"]
    assert {"sha256", "rule", "inputs", "parameters", "code", "versions", "seconds", "id"} <= lines[0].keys()


def test_nothing_is_merged_that_does_not_hold() -> None:
    make("cell.json", "digits", ("search.json",))
    make("a.nc", "dataset", ("cell.json",), rule="dataset")
    with pytest.raises(StaleError, match=r"search\.json: has no record .*run snakemake --force search\.json"):
        merge_records(["search.json"], "log.jsonl")
    Path("a.nc").write_text("other")
    with pytest.raises(StaleError, match=r"a\.nc: is not what its record says"):
        merge_records(["cell.json", "a.nc"], "log.jsonl")
    Path("a.nc").write_text("dataset")
    make("cell.json", "more digits", ("search.json",))
    with pytest.raises(StaleError, match=r"a\.nc: was made from another cell\.json"):
        merge_records(["cell.json", "a.nc"], "log.jsonl")
    record = Path(record_path("a.nc"))
    record.write_text("{}")
    with pytest.raises(DamagedFile, match=r"a\.nc\.json"):
        merge_records(["cell.json", "a.nc"], "log.jsonl")
    assert not Path("log.jsonl").exists()


def test_seconds_of_parts_are_recorded_and_do_not_enter_the_id() -> None:
    making = Making.begin("proofs", ("search.json",), {})
    Path("out.json").write_text("proven")
    making.finish("out.json", {"modes": [0.25, 0.5], "certificate": 4.0})
    record = Record.read("out.json")
    assert record is not None
    assert record.document["timings"] == {"modes": [0.25, 0.5], "certificate": 4.0}
    making.finish("out.json")
    again = Record.read("out.json")
    assert again is not None and again.id == record.id and "timings" not in again.document
