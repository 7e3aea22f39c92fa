"""Configs: what is accepted, and every mistake named in one line with its remedy."""

from __future__ import annotations

import json
from fractions import Fraction
from pathlib import Path
from typing import Any

import pytest

from knell.errors import ConfigError
from knell.survey.config import Config, default_results, load_config, parse_overrides, show_overrides
from knell.survey.exact_yaml import show_value

ROOT = Path(__file__).parents[2]
VALID: dict[str, Any] = {
    "ell": {"axial": [2, 3], "scalar": [0]},
    "exponents": [3, 4],
    "couplings": [Fraction(9, 10), Fraction(1, 4)],
    "overtones": 5,
    "depths": [100],
    "precisions": [60],
}
REMOVE = object()


@pytest.fixture(autouse=True)
def in_a_folder_of_its_own(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)


def write(changes: dict[str, Any], name: str = "mine.yaml") -> str:
    values = {key: value for key, value in {**VALID, **changes}.items() if value is not REMOVE}
    Path(name).write_text("".join(f"{key}: {show_value(value)}\n" for key, value in values.items()))
    return name


def complaints(path: str, overrides: dict[str, object] | None = None) -> list[str]:
    with pytest.raises(ConfigError) as caught:
        load_config(path, overrides)
    assert str(caught.value).splitlines() == caught.value.lines
    return caught.value.lines


def test_a_valid_config_is_exact_sorted_and_completed() -> None:
    config = load_config(write({}))
    assert config == Config(
        ell={"axial": (2, 3), "scalar": (0,)},
        exponents=(3, 4),
        couplings=(Fraction(1, 4), Fraction(9, 10)),
        overtones=(0, 1, 2, 3, 4),
        depths=(100,),
        precisions=(60,),
        required_digits=10,
        window=Fraction(3, 2),
        proofs="windows",
        results="results/mine",
    )
    assert Config.from_document(json.loads(json.dumps(config.document()))) == config


def test_the_configs_of_the_project_are_valid() -> None:
    default = load_config(ROOT / "config" / "config.yaml")
    assert (default.results, default.required_digits, default.window) == ("results", 10, Fraction(3, 2))
    assert len(default.points) == 2 * (1 + 4 * 5)
    assert load_config(ROOT / "tests" / "config" / "tiny.yaml").results == "results/tiny"


def test_ratios_decimals_and_exponents_mean_the_same() -> None:
    Path("mine.yaml").write_text(
        "ell: {axial: [2]}\nexponents: [4]\ncouplings: [9/10, 0.25, 1e-3, '1/3', 1, -2]\n"
        "overtones: [2, 0]\ndepths: [10]\nprecisions: [15]\nwindow: 3/2\n"
    )
    config = load_config("mine.yaml")
    assert config.couplings == tuple(map(Fraction, ("-2", "1/1000", "1/4", "1/3", "9/10", "1")))
    assert config.overtones == (0, 2)


@pytest.mark.parametrize(
    ("changes", "line"),
    [
        ({"colour": 1}, "mine.yaml:7: colour: is no known key; known are ell, exponents, couplings, "),
        ({"couplngs": [1]}, "mine.yaml:7: couplngs: is no known key; did you mean couplings?"),
        ({"ell": {"axail": [2]}}, "mine.yaml:1: ell.axail: is no known key; did you mean axial?"),
        ({"exponents": "four"}, "mine.yaml:2: exponents: four must be a list of whole numbers"),
        ({"exponents": 4}, "mine.yaml:2: exponents: 4 must be a list of whole numbers"),
        ({"exponents": [1]}, "mine.yaml:2: exponents[0]: 1 must be a whole number, 2 or more"),
        ({"exponents": [3, 2.5]}, "mine.yaml:2: exponents[1]: 2.5 must be a whole number, 2 or more"),
        ({"exponents": [True]}, "mine.yaml:2: exponents[0]: true must be a whole number"),
        ({"couplings": [Fraction(6, 5)]}, "mine.yaml:3: couplings[0]: 1.2 must be a number, at most 1 (above 1 there"),
        ({"couplings": ["a"]}, "mine.yaml:3: couplings[0]: a must be a number"),
        ({"couplings": []}, "mine.yaml:3: couplings: is empty; it must be a list of numbers"),
        ({"couplings": [Fraction(1, 2), Fraction("0.5")]}, "mine.yaml:3: couplings[1]: 0.5 is listed before"),
        ({"ell": {"axial": [1]}}, "mine.yaml:1: ell.axial[0]: 1 must be a whole number, 2 or more (the axial field"),
        ({"ell": {"electromagnetic": [0]}}, "mine.yaml:1: ell.electromagnetic[0]: 0 must be a whole number, 1 or more"),
        ({"ell": {"scalar": [-1]}}, "mine.yaml:1: ell.scalar[0]: -1 must be a whole number, 0 or more"),
        ({"ell": {}}, "mine.yaml:1: ell: is empty; it must be fields with their lists"),
        ({"ell": {"axial": 2}}, "mine.yaml:1: ell.axial: 2 must be a list of whole numbers"),
        ({"ell": [2]}, "mine.yaml:1: ell: [2] must be fields with their lists"),
        ({"depths": [0]}, "mine.yaml:5: depths[0]: 0 must be a whole number, 1 or more"),
        ({"precisions": [5]}, "mine.yaml:6: precisions[0]: 5 must be a whole number, 15 or more"),
        ({"overtones": 0}, "mine.yaml:4: overtones: 0 must be a number of overtones"),
        ({"overtones": []}, "mine.yaml:4: overtones: is empty"),
        ({"overtones": [-1]}, "mine.yaml:4: overtones[0]: -1 must be a whole number, 0 or more"),
        ({"overtones": None}, "mine.yaml:4: overtones: null must be a number of overtones"),
        ({"depths": REMOVE}, "mine.yaml: depths: is missing; it must be a list of whole numbers"),
        ({"window": Fraction(1, 20)}, "mine.yaml:7: window: 0.05 must be a number above 0.1"),
        ({"window": "deep"}, "mine.yaml:7: window: deep must be a number above 0.1"),
        ({"required_digits": 0}, "mine.yaml:7: required_digits: 0 must be a whole number, 1 or more"),
        ({"required_digits": 61}, "mine.yaml:7: required_digits: 61 digits cannot be had from a precision of 60"),
        ({"proofs": "all"}, "mine.yaml:7: proofs: all must be one of none, modes, windows"),
        ({"proofs": None}, "mine.yaml:7: proofs: null must be one of none, modes, windows"),
        ({"results": 3}, "mine.yaml:7: results: 3 must be a folder"),
        ({"results": "results/cells/x"}, "mine.yaml:7: results: results/cells/x is where the default config keeps"),
        ({"results": "/proc/none"}, "mine.yaml:7: results: cannot write to /proc/none: "),
        ({"results": "mine.yaml/x"}, "mine.yaml:7: results: cannot write to mine.yaml/x: mine.yaml is a file; choose"),
    ],
)
def test_each_mistake_is_one_line(changes: dict[str, Any], line: str) -> None:
    (only,) = complaints(write(changes))
    assert only.startswith(line)


def test_all_mistakes_at_once_in_the_order_of_the_file() -> None:
    changes = {"exponents": [1, 4, 4], "couplings": [2], "depths": [], "prec": 1, "precisions": REMOVE}
    keys = [line.split(": ")[1] for line in complaints(write(changes))]
    assert keys == ["exponents[0]", "exponents[2]", "couplings[0]", "depths", "prec", "precisions"]


@pytest.mark.parametrize(
    ("content", "line"),
    [
        (b"", "mine.yaml: must be keys and values, see config/README.md"),
        (b"- 1\n", "mine.yaml: must be keys and values, see config/README.md"),
        (b"a: 1\na: 2\n", "mine.yaml:2: a: is given twice; keep one of them"),
        (b"a: [\n", "mine.yaml:2: is not valid YAML: "),
        (b"\xff\xfe\xff", "mine.yaml: is not text in UTF-8"),
    ],
)
def test_files_that_are_no_config(content: bytes, line: str) -> None:
    Path("mine.yaml").write_bytes(content)
    (only,) = complaints("mine.yaml")
    assert only.startswith(line)


def test_missing_and_unreadable_files() -> None:
    assert complaints("none.yaml") == ["none.yaml: there is no such config file; give one with --configfile"]
    Path("folder.yaml").mkdir()
    assert complaints("folder.yaml") == ["folder.yaml: cannot be read: Is a directory"]


def test_a_folder_that_only_looks_writable(monkeypatch: pytest.MonkeyPatch) -> None:
    """Permissions say yes to root everywhere; the attempt says no, as on a read-only disk."""

    def refuse(**_: Any) -> None:
        raise OSError(30, "Read-only file system")

    monkeypatch.setattr("tempfile.TemporaryFile", refuse)
    lines = complaints(write({}))
    assert lines[0].startswith("mine.yaml: results: cannot write to results/mine: .: Read-only file system; choose")


def test_results_folder_follows_the_name_of_the_config() -> None:
    assert default_results("config/config.yaml") == default_results("/somewhere/config/config.yaml") == "results"
    assert default_results("config/wide.yaml") == "results/wide"
    assert default_results("config.yaml") == "results/config"
    assert load_config(write({"results": "out/mine/"})).results == "out/mine"
    (line,) = complaints(write({}, "cells.yaml"))
    assert line.endswith(
        "results/cells is where the default config keeps its cells; name the config file otherwise, or set results"
    )


def test_overrides_arrive_as_snakemake_passes_them() -> None:
    """Numbers at the top are numbers, inside lists they are text."""
    overrides = {"couplings": ["0.9", "1/3"], "ell": {"axial": ["2"]}, "overtones": 2, "window": 0.7, "results": "out"}
    config = load_config(write({}), overrides)
    assert config.couplings == (Fraction(1, 3), Fraction(9, 10))
    assert (config.ell, config.overtones, config.window) == ({"axial": (2,)}, (0, 1), Fraction(7, 10))
    assert load_config("mine.yaml", parse_overrides(show_overrides(overrides))) == config


def test_mistakes_in_overrides_name_the_option() -> None:
    lines = complaints(write({}), {"depth": 3, "couplings": ["1.2"], "exponents": None})
    assert [line.split(": ")[:2] for line in lines] == [
        ["--config", "exponents"],
        ["--config", "couplings[0]"],
        ["--config", "depth"],
    ]


def test_cells_do_not_depend_on_the_config_that_asks_for_them() -> None:
    wide = load_config(write({}))
    narrow = load_config(write({"couplings": [Fraction(1, 4)], "required_digits": 5, "results": "elsewhere"}))
    assert set(narrow.cell_files()) < set(wide.cell_files())
    assert len(set(wide.cell_files())) == len(wide.cell_files()) == len(wide.points) * (3 + 1)
    assert "results/cells/window-3_2/axial-l2-n4-k9_10/aim-N100-P60.json" in wide.cell_files()
