"""JSON files: whole or not there, and damage is always noticed."""

from __future__ import annotations

import errno
import json
import os
import subprocess
import sys
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from knell.errors import DamagedFile, FileError
from knell.survey import jsonfile

DOCUMENT = {"kind": "cell", "format": 1, "re": "0.3737", "list": [1, 2, {"ω": None}]}

scalars = st.none() | st.booleans() | st.integers() | st.text() | st.floats(allow_nan=False, allow_infinity=False)
values = st.recursive(scalars, lambda x: st.lists(x, max_size=3) | st.dictionaries(st.text(), x, max_size=3))


@pytest.fixture
def path(tmp_path: Path) -> Path:
    path = tmp_path / "folder" / "cell.json"
    jsonfile.write(path, DOCUMENT)
    return path


@given(st.dictionaries(st.text(), values, max_size=4))
def test_the_order_of_keys_changes_nothing(document: dict[str, Any]) -> None:
    backwards = dict(reversed(document.items()))
    assert jsonfile.canonical(document) == jsonfile.canonical(backwards)
    assert json.loads(jsonfile.canonical(document)) == document
    assert jsonfile.checksum(document | {"checksum": "whatever"}) == jsonfile.checksum(
        {key: value for key, value in document.items() if key != "checksum"}
    )


def test_written_and_read_back(path: Path) -> None:
    text = path.read_text()
    assert jsonfile.read(path, "cell") == DOCUMENT | {"checksum": jsonfile.checksum(DOCUMENT)}
    assert text.endswith("}\n")
    jsonfile.write(path, dict(reversed(DOCUMENT.items())))
    assert path.read_text() == text
    assert [p.name for p in path.parent.iterdir()] == ["cell.json"]


def test_every_changed_or_missing_byte_is_noticed(path: Path) -> None:
    """Any one byte replaced, any truncation: refused, or (white space) the very same document."""
    data = path.read_bytes()
    for i in range(len(data)):
        for damaged in (data[:i], data[:i] + bytes([data[i] ^ 1]) + data[i + 1 :]):
            path.write_bytes(damaged)
            try:
                assert jsonfile.read(path, "cell") == json.loads(data)
            except DamagedFile as error:
                assert str(path) in str(error) and "delete it and run snakemake again" in str(error)
                assert "\n" not in str(error)


@pytest.mark.parametrize(
    ("content", "says"),
    [
        (b"", "not JSON"),
        (b"\xff\xfe", "not text"),
        (b"[1, 2]\n", "no checksum"),
        (b'{"kind": "cell", "format": 1}\n', "no checksum"),
        (b'{"kind": "cell", "format": 1, "checksum": "0"}\n', "does not match"),
        (b'{"x": NaN, "checksum": "0"}\n', "does not match"),
    ],
)
def test_foreign_files_are_named(path: Path, content: bytes, says: str) -> None:
    path.write_bytes(content)
    with pytest.raises(DamagedFile, match=says):
        jsonfile.read(path, "cell")


def test_another_kind_and_another_format_are_refused(path: Path) -> None:
    with pytest.raises(DamagedFile, match="is a cell file of format 1, not a search file"):
        jsonfile.read(path, "search")
    jsonfile.write(path, DOCUMENT | {"format": 2})
    with pytest.raises(DamagedFile, match="format 2"):
        jsonfile.read(path, "cell")


def test_a_missing_file_is_named(tmp_path: Path) -> None:
    with pytest.raises(FileError, match=r"cannot read .*none\.json: No such file"):
        jsonfile.read(tmp_path / "none.json", "cell")


def test_nan_is_refused_before_anything_is_written(tmp_path: Path) -> None:
    with pytest.raises(ValueError):
        jsonfile.write(tmp_path / "x.json", {"x": float("nan")})
    assert list(tmp_path.iterdir()) == []


def test_a_failure_leaves_the_old_file(path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    before = path.read_bytes()

    def full(_: int) -> None:
        raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))

    monkeypatch.setattr(os, "fsync", full)
    with pytest.raises(FileError, match=r"cannot write .*cell\.json: No space left on device"):
        jsonfile.write(path, DOCUMENT | {"re": "0.4"})
    assert path.read_bytes() == before
    assert [p.name for p in path.parent.iterdir()] == ["cell.json"]


def test_a_real_refusal_of_the_system_is_one_line(path: Path) -> None:
    """A process that may write 100 bytes meets the limit inside `write`, as on a full disk."""
    script = (
        "import resource, sys\n"
        "from knell.survey import jsonfile\n"
        "resource.setrlimit(resource.RLIMIT_FSIZE, (100, 100))\n"
        "try:\n"
        "    jsonfile.write(sys.argv[1], {'x': 'y' * 1000})\n"
        "except jsonfile.FileError as error:\n"
        "    sys.exit(str(error))\n"
    )
    before = path.read_bytes()
    done = subprocess.run([sys.executable, "-c", script, str(path)], capture_output=True, text=True)
    assert (done.returncode, done.stderr) == (1, f"cannot write {path}: File too large\n")
    assert path.read_bytes() == before
    assert [p.name for p in path.parent.iterdir()] == ["cell.json"]


def test_killed_while_writing_leaves_the_old_file(path: Path) -> None:
    """The process ends between writing and renaming, without a chance to clean up."""
    script = (
        "import os, sys\n"
        "from knell.survey import jsonfile\n"
        "with jsonfile.replacing(sys.argv[1]) as temporary:\n"
        "    temporary.write_text('half')\n"
        "    os._exit(9)\n"
    )
    before = path.read_bytes()
    assert subprocess.run([sys.executable, "-c", script, str(path)]).returncode == 9
    assert path.read_bytes() == before
    jsonfile.write(path, DOCUMENT)
    assert jsonfile.read(path, "cell")["re"] == "0.3737"
