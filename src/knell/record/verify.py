"""Files against their records: nothing damaged is used in silence."""

from __future__ import annotations

import json
import os
from collections.abc import Iterable
from pathlib import Path

from knell.errors import DamagedFile, FileError, StaleError
from knell.record.provenance import Record
from knell.survey.jsonfile import file_sha256, write_text
from knell.survey.layout import record_path


def check_files(files: Iterable[str], solver: str) -> list[str]:
    """Rename every file whose bytes are not those of its record, so that it is made again; say what was found.

    A file without a record, or a record without a file, is left to the workflow, which
    makes both again. Nothing is deleted: the damaged file keeps its content under a name
    ending in ``.damaged``. Returns a line for each, and one that counts the files of another
    ``solver``. Raises `FileError` if a file cannot be read or renamed.
    """
    lines, stale = [], 0
    for file in files:
        record, fault = _inspect(file)
        if fault:
            for path in (file, record_path(file)):
                _set_aside(path)
            lines.append(f"{file}: {fault}; set aside as {file}.damaged, to be made again")
        elif record:
            stale += record.parameters.get("solver", solver) != solver
    if stale:
        lines.append(
            f"{stale} files were made by another state of the solver; they are made again now, "
            "or with --forcerun search where snakemake has nothing to do"
        )
    return lines


def _inspect(file: str) -> tuple[Record | None, str]:
    """The record of a file and what is wrong with the two, if anything is."""
    try:
        record = Record.read(file)
    except DamagedFile:
        return None, "its record is damaged"
    if record is None or not Path(file).exists():
        return record, ""
    if record.file != file:
        return record, f"is a copy of {record.file}"
    return record, "" if file_sha256(file) == record.sha256 else "has changed since it was written"


def _set_aside(path: str) -> None:
    try:
        if Path(path).exists():
            os.replace(path, f"{path}.damaged")
    except OSError as error:
        raise FileError.from_os("rename the damaged file", path, error) from None


def merge_records(files: Iterable[str], output: str) -> None:
    """Write the records of ``files``, one line each and sorted by file, after checking all of them.

    Raises `FileError` for a file that cannot be read and `StaleError`, naming the file and
    the remedy, when one has no record, is not what its record says, or was made from
    another state of a file that is here.
    """
    records = [_verified(file) for file in sorted(files)]
    present = {record.file: record.sha256 for record in records}
    for record in records:
        for item in record.inputs:
            if present.get(item.file, item.sha256) != item.sha256:
                raise StaleError(
                    f"{record.file}: was made from another {item.file} than the one there now; "
                    f"run snakemake --force {record.file}"
                )
    lines = (json.dumps(record.document, sort_keys=True, ensure_ascii=False) for record in records)
    write_text(output, "".join(f"{line}\n" for line in lines))


def _verified(file: str) -> Record:
    record = Record.read(file)
    if record is None:
        raise StaleError(f"{file}: has no record of how it was made; run snakemake --force {file}")
    if file_sha256(file) != record.sha256:
        raise StaleError(f"{file}: is not what its record says; run snakemake --force {file}")
    return record
