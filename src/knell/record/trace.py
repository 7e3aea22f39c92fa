"""The chain from a file back to the config, checked link by link."""

from __future__ import annotations

import shlex
from collections.abc import Iterator
from dataclasses import dataclass, field
from pathlib import Path

from knell.errors import FileError, InputError
from knell.record.provenance import Record
from knell.survey.config import DEFAULT
from knell.survey.jsonfile import file_sha256
from knell.survey.layout import record_path

SOURCE = "source"


@dataclass
class Chain:
    """Every file that ``target`` goes back to, nearest first; paths are relative to ``root``, empty for here.

    ``records`` holds None for a file that nothing made, such as the config. ``problems``
    has one line for each link that no longer holds.
    """

    target: str
    root: Path
    records: dict[str, Record | None] = field(default_factory=dict)
    problems: list[str] = field(default_factory=list)

    @property
    def stages(self) -> dict[str, list[str]]:
        """Rule to files, from the target's rule to the sources."""
        stages: dict[str, list[str]] = {}
        for file, record in self.records.items():
            stages.setdefault(record.rule if record else SOURCE, []).append(file)
        sources = stages.pop(SOURCE, [])
        return {**stages, SOURCE: sources} if sources else stages

    @property
    def rebuild(self) -> str:
        """The one command line that makes the target again, from the folder one is in."""
        place = "" if self.root == Path() else f"cd {shlex.quote(str(self.root))} && "
        command = ["snakemake"]
        for record in filter(None, self.records.values()):
            if record.rule == "resolve_config":
                if record.parameters["config"] != DEFAULT:
                    command += ["--configfile", record.parameters["config"]]
                if record.parameters["overrides"]:
                    command += ["--config", *record.parameters["overrides"]]
        return place + shlex.join([*command, "--force", self.target])


def trace(path: str) -> Chain:
    """Follow the records from the file at ``path``.

    Paths are taken relative to the folder in which the survey ran, which is found from the
    record. Raises `InputError` for a file that does not exist or has no record.
    """
    record = Record.read(path)
    if record is None:
        missing = "there is no such file" if not Path(path).exists() else f"has no record ({record_path(path)})"
        raise InputError(f"{path}: {missing}; trace takes a file that the survey made")
    chain = Chain(record.file, _root(path, record.file))
    _Tracer(chain).follow()
    return chain


def _root(path: str, recorded: str) -> Path:
    """The folder that ``recorded`` is relative to, given where the file really is; empty if one is in it."""
    actual = Path(path).resolve()
    depth = len(Path(recorded).parts)
    if Path(recorded).is_absolute() or actual.parts[-depth:] != Path(recorded).parts:
        return Path()
    root = Path(*actual.parts[:-depth])
    return Path() if root == Path.cwd() else root


class _Tracer:
    def __init__(self, chain: Chain) -> None:
        self._root = chain.root
        self._chain = chain
        self._hashes: dict[str, str | None] = {}

    def follow(self) -> None:
        """Breadth first, so that each stage is complete before the next."""
        chain, pending = self._chain, [self._chain.target]
        for file in pending:
            if file in chain.records:
                # Seen again on a longer way: it belongs further back, after what is made from it.
                chain.records[file] = chain.records.pop(file)
                continue
            record = self._record(file)
            chain.records[file] = record
            if record:
                chain.problems += self._broken(record)
                pending += [item.file for item in record.inputs]

    def _record(self, file: str) -> Record | None:
        try:
            return Record.read(str(self._root / file))
        except FileError as error:
            self._chain.problems.append(str(error))
            return None

    def _broken(self, record: Record) -> Iterator[str]:
        now = self._hash(record.file)
        if now is None:
            yield f"{record.file}: is missing"
        elif now != record.sha256:
            yield f"{record.file}: has changed since it was made"
        for item in record.inputs:
            now = self._hash(item.file)
            if now is None and not Path(record_path(str(self._root / item.file))).exists():
                yield f"{item.file}: is missing"
            elif now is not None and now != item.sha256:
                yield f"{record.file}: was made from another {item.file} than the one there now"

    def _hash(self, file: str) -> str | None:
        if file not in self._hashes:
            path = self._root / file
            self._hashes[file] = file_sha256(path) if path.is_file() else None
        return self._hashes[file]


def describe(chain: Chain) -> str:
    """The chain as a table, its problems, the code and the command that rebuilds the target."""
    rows = []
    for rule, files in chain.stages.items():
        records = [record for file in files if (record := chain.records[file])]
        identity = records[0].id if len(records) == 1 else f"{len(records)} records" if records else ""
        rows.append((_together(files), rule, identity))
    widths = [max(len(row[i]) for row in rows) for i in range(3)]
    lines = ["  ".join(cell.ljust(width) for cell, width in zip(row, widths, strict=True)).rstrip() for row in rows]
    lines += [f"code: {code}" for code in _codes(chain)]
    lines += chain.problems or ["every file is as it was recorded"]
    return "\n".join([*lines, f"rebuild: {chain.rebuild}"])


def _together(files: list[str]) -> str:
    if len(files) == 1:
        return files[0]
    folders = [Path(file).parent.parts for file in files]
    shared = []
    for parts in zip(*folders, strict=False):
        if len(set(parts)) > 1:
            break
        shared.append(parts[0])
    return f"{Path(*shared).as_posix()}/… ({len(files)} files)"


def _codes(chain: Chain) -> list[str]:
    texts = {}
    for record in filter(None, chain.records.values()):
        code = record.code
        state = "with uncommitted changes" if code["dirty"] else "clean"
        texts[f"commit {code['commit']}, {state}" if code["commit"] else f"source {code['source']}, no git"] = None
    return list(texts)
