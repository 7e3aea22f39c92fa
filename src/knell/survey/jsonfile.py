"""JSON files that are either whole or not there, and that know when they are damaged.

A document is written to a temporary name in its own folder, flushed to the disk and
renamed, so that a killed process or an orphan leaves the old file or the new one, never
half of one. Keys are sorted and every float is written in its shortest form: the same
document gives the same bytes. ``checksum`` is the SHA-256 of the canonical text of the
document without that key.
"""

from __future__ import annotations

import hashlib
import json
import os
from collections.abc import Iterator, Mapping
from contextlib import contextmanager, suppress
from pathlib import Path
from typing import Any

from knell.errors import DamagedFile, FileError

FORMAT = 1
_REMEDY = "delete it and run snakemake again"


def canonical(document: Mapping[str, Any]) -> str:
    """The one text of a document. Raises `ValueError` for NaN and infinities, which JSON has no word for."""
    return json.dumps(document, sort_keys=True, ensure_ascii=False, allow_nan=False, indent=1) + "\n"


def checksum(document: Mapping[str, Any]) -> str:
    """SHA-256 of the canonical text without the key ``checksum``."""
    body = {key: value for key, value in document.items() if key != "checksum"}
    return hashlib.sha256(canonical(body).encode()).hexdigest()


def file_sha256(path: str | Path) -> str:
    """SHA-256 of the bytes of a file. Raises `FileError` if it cannot be read."""
    try:
        with open(path, "rb") as stream:
            return hashlib.file_digest(stream, "sha256").hexdigest()
    except OSError as error:
        raise FileError.from_os("read", path, error) from None


@contextmanager
def replacing(path: str | Path) -> Iterator[Path]:
    """A temporary path beside ``path`` that takes its place, flushed, when the block ends well.

    The suffix is kept, since some writers choose the format by it. When the block raises,
    the temporary file goes and ``path`` stays as it was. Raises `FileError` for what the
    operating system refuses: no space, no permission, a read-only disk.
    """
    target = Path(path)
    temporary = target.with_name(f".{target.stem}.{os.getpid()}.tmp{target.suffix}")
    try:
        target.parent.mkdir(parents=True, exist_ok=True)
        yield temporary
        with open(temporary, "rb+") as stream:
            os.fsync(stream.fileno())
        os.replace(temporary, target)
    except OSError as error:
        raise FileError.from_os("write", path, error) from None
    finally:
        with suppress(OSError):
            temporary.unlink()


def write_text(path: str | Path, text: str) -> None:
    """Write ``text`` in UTF-8, whole or not at all. Raises `FileError`."""
    with replacing(path) as temporary:
        temporary.write_text(text, encoding="utf-8")


def write(path: str | Path, document: Mapping[str, Any]) -> None:
    """Write ``document`` with its checksum, whole or not at all. Raises `FileError`."""
    write_text(path, canonical({**document, "checksum": checksum(document)}))


def read(path: str | Path, kind: str) -> dict[str, Any]:
    """The document at ``path``, verified to be whole and of this ``kind`` and format.

    Raises `FileError` when it cannot be read and `DamagedFile` when it is truncated,
    altered or something else; the message names the file and the remedy.
    """
    try:
        text = Path(path).read_bytes().decode()
    except OSError as error:
        raise FileError.from_os("read", path, error) from None
    except UnicodeDecodeError:
        raise DamagedFile(f"{path}: damaged, it is not text; {_REMEDY}") from None
    try:
        document = json.loads(text)
    except ValueError:
        raise DamagedFile(f"{path}: damaged or cut short, it is not JSON; {_REMEDY}") from None
    if not isinstance(document, dict) or "checksum" not in document:
        raise DamagedFile(f"{path}: carries no checksum, so it is no file of this survey; {_REMEDY}")
    try:
        whole = document["checksum"] == checksum(document)
    except ValueError:
        whole = False
    if not whole:
        raise DamagedFile(f"{path}: damaged, its content does not match its checksum; {_REMEDY}")
    if document.get("kind") != kind or document.get("format") != FORMAT:
        found = f"{document.get('kind')} file of format {document.get('format')}"
        raise DamagedFile(f"{path}: is a {found}, not a {kind} file of format {FORMAT}; {_REMEDY}")
    return document
