"""``knell proofs`` from the command line, and its file checked by ``knell prove --recheck``."""

from __future__ import annotations

from fractions import Fraction
from pathlib import Path
from typing import Any

import pytest

from knell.command import main
from knell.command.record import seconds_of_proofs
from knell.record.provenance import Record
from knell.record.source import PROVER, SOLVER, source_files, source_hash
from knell.record.verify import merge_records
from knell.survey import jsonfile
from knell.survey.points import Point

POINT = Point("axial", 4, Fraction(1, 2), 2)
STEP = ["proofs", "--point", POINT.slug, "--window", "1_2", "--search", "search.json", "--output", "out.json"]
STEP += ["--extent", "modes"]


@pytest.fixture(autouse=True)
def in_a_folder_of_its_own(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    body: dict[str, Any] = {
        "kind": "search",
        "format": 1,
        "solver": source_hash(SOLVER),
        "point": POINT.document(),
        "window": {"re_max": "7/10", "depth": "1/2", "excluded": "1/10"},
        "modes": [{"family": "principal", "index": 0, "re": "0.38101064", "im": "-0.08505926"}],
        "continued": [],
        "undetermined": [],
    }
    jsonfile.write("search.json", body)


def test_a_file_of_proofs_with_its_record(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(STEP) == 0
    assert capsys.readouterr().err.startswith("1 of 1 modes proven, median ")
    document = jsonfile.read("out.json", "proofs")
    assert (document["extent"], document["prover"]) == ("modes", source_hash(PROVER))
    record = Record.read("out.json")
    assert record is not None
    assert record.parameters["prover"] == document["prover"]
    assert len(record.document["timings"]["modes"]) == 1
    assert "timings" not in document
    first = Path("out.json").read_bytes()
    assert main(STEP) == 0
    assert Path("out.json").read_bytes() == first
    assert main(["prove", "--recheck", "out.json"]) == 0
    assert "mode 0.38101063" in capsys.readouterr().out


def test_code_edited_while_the_survey_runs(capsys: pytest.CaptureFixture[str]) -> None:
    assert main([*STEP, "--prover", "0123456789abcdef"]) == 1
    assert "not 0123456789abcdef; run snakemake again" in capsys.readouterr().err
    assert not Path("out.json").exists()


def test_nothing_is_not_an_extent(capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit):
        main([*STEP[:-1], "none"])
    assert "invalid choice: 'none'" in capsys.readouterr().err


def test_an_edit_of_an_enclosure_recomputes_proofs_and_no_cell() -> None:
    def enclosures(module: str) -> list[Path]:
        return [path for path in source_files([module]) if "enclosure" in path.parts]

    assert enclosures(PROVER)
    assert not enclosures(SOLVER)


def test_seconds_are_said_from_the_records(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(STEP) == 0
    merge_records(["out.json"], "log.jsonl")
    said = seconds_of_proofs("log.jsonl")
    assert said.startswith("proofs: 1 modes, ") and "windows" not in said
    Path("log.jsonl").write_text('{"rule": "cell"}\n')
    assert seconds_of_proofs("log.jsonl") == ""
