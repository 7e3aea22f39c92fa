"""The command line: expected failures are one line, and a command imports no more than it needs."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import pytest

from knell import __version__
from knell.command import COMMANDS, STEPS, main
from knell.record.source import SOLVER, source_hash
from knell.survey import jsonfile
from knell.survey.points import Point

POINT = ["--point", "axial-l2-n4-k9_10", "--window", "3_2", "--output", "out.json"]
CELL = ["cell", *POINT, "--search", "search.json", "--depth", "40", "--precision", "30"]


@pytest.fixture(autouse=True)
def in_a_folder_of_its_own(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)


def failure(arguments: list[str], capsys: pytest.CaptureFixture[str]) -> tuple[int, str]:
    """Exit code and the one line on standard error; nothing may be on standard output or on disk."""
    try:
        code = main(arguments)
    except SystemExit as exit_:
        code = int(str(exit_.code))
    captured = capsys.readouterr()
    (line,) = captured.err.splitlines()
    assert captured.out == "" and not Path("out.json").exists()
    return code, line


@pytest.mark.parametrize("arguments", [["nonsense"], ["modse"], ["--nonsense"]])
def test_unknown_commands(arguments: list[str], capsys: pytest.CaptureFixture[str]) -> None:
    code, line = failure(arguments, capsys)
    assert code == 2 and arguments[0] in line and "knell --help" in line


@pytest.mark.parametrize(
    ("arguments", "says"),
    [
        (["trace"], "the following arguments are required: file"),
        (["search", *POINT, "--depht", "3"], "unrecognized arguments: --depht 3"),
        (["search", "--point", "axial-l1-n4-k1_2", *POINT[2:]], "ell 1 for the axial field: must be"),
        (["search", "--point", "axial-l2-n4-k6_5", *POINT[2:]], "coupling 6/5: must be at most 1"),
        ([*CELL, "--depth", "0"], "0 must be a whole number, 1 or more"),
        ([*CELL, "--precision", "5"], "5 must be a whole number, 15 or more"),
    ],
)
def test_bad_options(arguments: list[str], says: str, capsys: pytest.CaptureFixture[str]) -> None:
    code, line = failure(arguments, capsys)
    assert code == 2 and line.startswith(f"knell {arguments[0]}: ") and says in line


def write_search(point: str = "axial-l2-n4-k9_10", solver: str | None = None) -> None:
    head = {"kind": "search", "format": 1, "point": Point.from_slug(point).document(), "modes": []}
    jsonfile.write("search.json", head | {"solver": solver or source_hash(SOLVER)})


def test_a_search_that_is_missing_damaged_or_foreign(capsys: pytest.CaptureFixture[str]) -> None:
    assert "cannot read search.json: No such file" in failure(CELL, capsys)[1]
    write_search()
    Path("search.json").write_text(Path("search.json").read_text()[:-20])
    assert "search.json: damaged or cut short" in failure(CELL, capsys)[1]
    write_search("axial-l2-n3-k9_10")
    assert "search.json: belongs to another point than axial-l2-n4-k9_10" in failure(CELL, capsys)[1]
    write_search(solver="0123456789abcdef")
    assert "search.json: was made by another state of the solver" in failure(CELL, capsys)[1]


def test_a_solver_edited_while_the_survey_runs(capsys: pytest.CaptureFixture[str]) -> None:
    write_search()
    code, line = failure([*CELL, "--solver", "0123456789abcdef"], capsys)
    assert code == 1 and "not 0123456789abcdef; run snakemake again" in line


def test_merging_without_cells_names_the_first(capsys: pytest.CaptureFixture[str]) -> None:
    root = Path(__file__).parents[1]
    assert main(["config", str(root / "config" / "tiny.yaml"), "--output", "config.json"]) == 0
    line = failure(["merge", "--config", "config.json", "--output", "out.json"], capsys)[1]
    assert "cannot read results/cells/window-1_2/axial-l2-schwarzschild/search.json" in line


def test_a_dataset_that_cannot_be_read(capsys: pytest.CaptureFixture[str]) -> None:
    Path("survey.nc").write_bytes(b"\x89HDF\r\n\x1a\n cut short")
    draw = ["figure", "difference_maps", "--dataset", "survey.nc", "--output", "out.png"]
    code, line = failure(draw, capsys)
    assert code == 1 and "survey.nc: cannot be read as a dataset" in line
    assert "no figure 'nonsense'" in failure(["figure", "nonsense", *draw[2:]], capsys)[1]
    assert "must end in one of png, pdf" in failure([*draw[:-1], "out.gif"], capsys)[1]


def test_checking_a_config(capsys: pytest.CaptureFixture[str]) -> None:
    Path("mine.yaml").write_text("couplngs: [1]\nexponents: [1]\n")
    assert main(["config", "mine.yaml"]) == 1
    lines = capsys.readouterr().err.splitlines()
    assert len(lines) == 7 and all(line.startswith("mine.yaml:") for line in lines)


def test_help_names_every_command(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["--help"]) == 0
    text = capsys.readouterr().out
    assert all(f"  {name} " in text for name in (*COMMANDS, *STEPS))
    assert main(["--version"]) == 0
    assert capsys.readouterr().out == f"knell {__version__}\n"


@pytest.mark.parametrize("name", [*COMMANDS, *STEPS])
def test_every_command_explains_itself(name: str, capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit) as caught:
        main([name, "--help"])
    assert caught.value.code == 0
    assert capsys.readouterr().out.startswith(f"usage: knell {name} ")


def test_a_module_of_its_own() -> None:
    done = subprocess.run([sys.executable, "-m", "knell", "trace", "none"], capture_output=True, text=True)
    assert done.returncode == 1
    assert done.stderr == "knell trace: none: there is no such file; trace takes a file that the survey made\n"


def test_a_cell_starts_without_the_libraries_of_the_dataset() -> None:
    """Hundreds of cells start in processes of their own: up to its first number, none loads these."""
    script = (
        "import sys\nfrom knell.command import main\n"
        f"code = main({CELL!r})\n"
        "print(code, *sorted({'numpy', 'xarray', 'matplotlib', 'yaml', 'jsonschema', 'mpmath'} & set(sys.modules)))"
    )
    done = subprocess.run([sys.executable, "-c", script], capture_output=True, text=True, check=True)
    # The search is missing, which is found out after everything has been imported.
    assert done.stdout.split() == ["1"]
