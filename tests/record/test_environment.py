"""Which code made a file: commit, dirty flag, versions."""

from __future__ import annotations

import subprocess
from importlib.metadata import version
from pathlib import Path

import pytest

from knell.record import environment
from knell.record.source import package_hash


@pytest.fixture
def checkout(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A git checkout with one commit, out of reach of the settings of whoever runs the tests."""
    monkeypatch.setenv("GIT_CONFIG_GLOBAL", "/dev/null")
    for name in ("AUTHOR", "COMMITTER"):
        monkeypatch.setenv(f"GIT_{name}_NAME", "a tester")
        monkeypatch.setenv(f"GIT_{name}_EMAIL", "tester@example.org")
    (tmp_path / "src").mkdir()
    (tmp_path / "src" / "code.py").write_text("x = 1\n")
    (tmp_path / "config.yaml").write_text("a: 1\n")
    git(tmp_path, "init", "-q")
    git(tmp_path, "add", ".")
    git(tmp_path, "commit", "-q", "-m", "one")
    return tmp_path


def git(folder: Path, *arguments: str) -> str:
    return subprocess.run(["git", *arguments], cwd=folder, check=True, capture_output=True, text=True).stdout.strip()


def test_a_clean_checkout_is_named_by_its_commit(checkout: Path) -> None:
    code = environment.examine(checkout)
    assert (code.commit, code.dirty, code.source) == (git(checkout, "rev-parse", "HEAD"), False, None)
    assert code.versions["numpy"] == version("numpy")


def test_an_edited_config_is_not_dirty_code(checkout: Path) -> None:
    (checkout / "config.yaml").write_text("a: 2\n")
    (checkout / "notes.txt").write_text("new\n")
    assert environment.examine(checkout).dirty is False


@pytest.mark.parametrize("file", ["src/code.py", "src/new.py", "Snakefile"])
def test_edited_and_new_code_is_dirty_and_hashed(checkout: Path, file: str) -> None:
    (checkout / file).write_text("x = 2\n")
    code = environment.examine(checkout)
    assert (code.dirty, code.source) == (True, package_hash())


def test_outside_git_the_source_is_hashed(tmp_path: Path) -> None:
    code = environment.examine(tmp_path)
    assert (code.commit, code.dirty, code.source) == (None, None, package_hash())


def test_jobs_take_the_answer_of_the_workflow(monkeypatch: pytest.MonkeyPatch) -> None:
    told = environment.Code("c0ffee", True, "1234", {"python": "3"})
    monkeypatch.setenv(environment.VARIABLE, told.text())
    assert environment.current() == told
    monkeypatch.delenv(environment.VARIABLE)
    assert environment.current() == environment.examine()
