"""Provenance: beside each file, one record of what made it.

The id of a record is a hash of what determines the file: rule, hashes of the inputs,
parameters, code and library versions. It is known before the file is made, so a figure
can carry it inside and still be the same bytes each time. The seconds a job took and
where its files lie are recorded too, but do not enter the id.
"""

from __future__ import annotations

import hashlib
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from pathlib import Path
from time import perf_counter
from typing import Any

from knell.errors import DamagedFile
from knell.record import environment
from knell.survey import jsonfile
from knell.survey.layout import record_path

_STARTED = perf_counter()


@dataclass(frozen=True)
class Input:
    """A file that was read, and what it was then."""

    file: str
    sha256: str


@dataclass(frozen=True)
class Making:
    """What determines a file, gathered before the file is made.

    ``parameters`` are JSON values. Use `begin` to make one, and `finish` once the file is
    written.
    """

    rule: str
    inputs: tuple[Input, ...]
    parameters: Mapping[str, Any]
    code: environment.Code

    @classmethod
    def begin(cls, rule: str, inputs: Iterable[str], parameters: Mapping[str, Any]) -> Making:
        """Hash the inputs as they are now. Raises `FileError` for one that cannot be read."""
        hashed = tuple(Input(_relative(path), jsonfile.file_sha256(path)) for path in inputs)
        return cls(rule, hashed, parameters, environment.current())

    @property
    def id(self) -> str:
        """Sixteen hexadecimal digits of the hash of everything that determines the file."""
        text = jsonfile.canonical(
            {
                "rule": self.rule,
                "inputs": [item.sha256 for item in self.inputs],
                "parameters": self.parameters,
                "code": self._code(),
                "versions": self.code.versions_for(self.rule),
            }
        )
        return hashlib.sha256(text.encode()).hexdigest()[:16]

    def finish(self, path: str, timings: Mapping[str, Any] | None = None) -> None:
        """Write the record of ``path``, made from this, with the seconds since the process began.

        ``timings`` are seconds of parts of the work, by name. Like all seconds they do not enter the id.
        """
        jsonfile.write(
            record_path(path),
            {
                "kind": "record",
                "format": jsonfile.FORMAT,
                "id": self.id,
                "file": _relative(path),
                "sha256": jsonfile.file_sha256(path),
                "rule": self.rule,
                "inputs": [{"file": item.file, "sha256": item.sha256} for item in self.inputs],
                "parameters": dict(self.parameters),
                "code": self._code(),
                "versions": self.code.versions_for(self.rule),
                "seconds": round(perf_counter() - _STARTED, 3),
                **({"timings": dict(timings)} if timings else {}),
            },
        )

    def _code(self) -> dict[str, Any]:
        return {"commit": self.code.commit, "dirty": self.code.dirty, "source": self.code.source}


@dataclass(frozen=True)
class Record:
    """A record read back; the fields are those of `Making` and ``sha256``, ``id``, ``seconds``."""

    file: str
    sha256: str
    id: str
    rule: str
    inputs: tuple[Input, ...]
    parameters: Mapping[str, Any]
    code: Mapping[str, Any]
    versions: Mapping[str, str]
    seconds: float
    document: Mapping[str, Any] = field(repr=False, compare=False, default_factory=dict)

    @classmethod
    def read(cls, path: str) -> Record | None:
        """The record of the file at ``path``, None if it has none. Raises `DamagedFile` or `FileError`."""
        sidecar = record_path(path)
        if not Path(sidecar).exists():
            return None
        document = jsonfile.read(sidecar, "record")
        try:
            names = ("file", "sha256", "id", "rule", "parameters", "code", "versions", "seconds")
            inputs = tuple(Input(item["file"], item["sha256"]) for item in document["inputs"])
            return cls(inputs=inputs, document=document, **{name: document[name] for name in names})
        except (KeyError, TypeError):
            raise DamagedFile(f"{sidecar}: is no complete record; delete it and run snakemake again") from None


def _relative(path: str) -> str:
    """The path as records write it: relative to where the survey runs, if it lies below."""
    file = Path(path)
    if file.is_absolute() and file.is_relative_to(Path.cwd()):
        file = file.relative_to(Path.cwd())
    return file.as_posix()
