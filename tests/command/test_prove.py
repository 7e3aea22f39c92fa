"""``knell prove``: proofs printed, written, checked again, and refused in one line."""

from __future__ import annotations

import json
import subprocess
import sys
from fractions import Fraction

import pytest

from knell.command import main

HOLE = ["prove", "--exponent", "4", "--coupling", "0.9"]


@pytest.mark.parametrize(
    ("arguments", "code", "says"),
    [
        (["prove", "--exponent", "4", "--coupling", "1.2"], 1, "--coupling 6/5: must be at most 1"),
        (["prove", "--exponent", "4"], 1, "--coupling: is missing"),
        (["prove", "--coupling", "0.5"], 1, "--exponent: is missing"),
        ([*HOLE, "--ell", "1"], 1, "--ell 1: must be 2 or more"),
        ([*HOLE, "--window", "0.05"], 1, "--window 1/20: must be above 0.1"),
        ([*HOLE, "--window", "1", "--overtones", "2"], 2, "not allowed with"),
        ([*HOLE, "--digits", "0"], 2, "argument --digits: 0 must be"),
        (["prove", "--recheck", "nowhere.json"], 1, "cannot read nowhere.json"),
    ],
)
def test_bad_options_are_one_line(arguments, code, says, capsys, tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    try:
        left = main(arguments)
    except SystemExit as leaving:
        left = leaving.code
    captured = capsys.readouterr()
    assert left == code and captured.err.count("\n") == 1 and says in captured.err and not captured.out


@pytest.fixture(scope="module")
def proven(tmp_path_factory):
    """The file of one proven mode, made by the command itself."""
    path = tmp_path_factory.mktemp("proofs") / "mode.json"
    command = [sys.executable, "-m", "knell", *HOLE, "--overtones", "1", "--digits", "20", "--json"]
    path.write_text(subprocess.run(command, check=True, capture_output=True, text=True).stdout, encoding="utf-8")
    return path


def test_a_proven_mode_has_its_numbers_as_text_and_is_checked_again(proven, capsys):
    (mode,) = json.loads(proven.read_text(encoding="utf-8"))
    assert (mode["family"], mode["overtone"], mode["status"]) == ("principal", 0, "proven")
    assert mode["frequency_re"].startswith("0.38725911391013373223948")
    assert Fraction(mode["proven_radius"]) < Fraction(1, 10**20) < Fraction(mode["unique_radius"])
    assert main(["prove", "--recheck", str(proven)]) == 0
    assert mode["frequency_re"] in capsys.readouterr().out


@pytest.mark.parametrize(
    "change",
    [
        lambda mode: mode.update(proven_radius="1e-30"),
        lambda mode: mode.update(frequency_re="0.38725911391013373223949"),
        lambda mode: mode["proof"]["claim"].update(proven_radius="1e-30"),
        lambda mode: mode.pop("proof"),
    ],
)
def test_a_changed_file_is_refused(change, proven, capsys, tmp_path):
    document = json.loads(proven.read_text(encoding="utf-8"))
    change(document[0])
    path = tmp_path / "changed.json"
    path.write_text(json.dumps(document), encoding="utf-8")
    assert main(["prove", "--recheck", str(path)]) == 1
    captured = capsys.readouterr()
    assert captured.err.count("\n") == 1 and not captured.out


def test_a_file_without_proofs_is_refused(capsys, tmp_path):
    path = tmp_path / "other.json"
    for text in ("{", "{}", "3", '[{"frequency_re": "1"}]'):
        path.write_text(text, encoding="utf-8")
        assert main(["prove", "--recheck", str(path)]) == 1
        assert capsys.readouterr().err.count("\n") == 1


@pytest.mark.slow
def test_a_window_is_complete_with_and_without_optimisation():
    # python -O removes assert statements: it must change nothing.
    outputs = []
    for flags in ([], ["-O"]):
        command = [sys.executable, *flags, "-m", "knell", *HOLE, "--window", "0.5", "--json"]
        document = json.loads(subprocess.run(command, check=True, capture_output=True, text=True).stdout)
        document.pop("seconds")
        outputs.append(document)
    assert outputs[0] == outputs[1]
    assert outputs[0]["complete"] and outputs[0]["count"] == len(outputs[0]["modes"]) == 4


@pytest.mark.slow
def test_optimisation_does_not_let_a_refusal_through(proven, tmp_path):
    document = json.loads(proven.read_text(encoding="utf-8"))
    document[0]["proof"]["claim"]["proven_radius"] = "1e-30"
    path = tmp_path / "changed.json"
    path.write_text(json.dumps(document), encoding="utf-8")
    run = subprocess.run([sys.executable, "-O", "-m", "knell", "prove", "--recheck", str(path)], capture_output=True)
    assert run.returncode == 1
