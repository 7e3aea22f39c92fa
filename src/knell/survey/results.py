"""Results of one point: its search, witness, cells and proofs, read from disk and put together mode by mode.

Every file is checked against its checksum, against the parameters its name stands for, and
against the solver that made the others: nothing damaged, misplaced or stale gets through.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import Any

from knell.errors import DamagedFile, FileError, StaleError
from knell.survey import jsonfile
from knell.survey.agreement import Frequency
from knell.survey.config_schema import NO_PROOFS
from knell.survey.enclosed import Enclosure
from knell.survey.evidence import ABSENT, AimRun, Evidence, Run
from knell.survey.layout import CellFolder

_WITNESSES = ("match", "match_other_path", "match_more_precise", "spectral", "spectral_tilted")
_REMEDY = "delete it and run snakemake again"

ModeKey = tuple[str, int]


@dataclass(frozen=True)
class Zeros:
    """Zeros in a window: counted by winding, found, and those found that are no modes or may be none."""

    count: int
    found: int
    continued: int
    undetermined: int


@dataclass(frozen=True)
class Proofs:
    """What is proven of a point: its modes; the number of zeros in its window's region, None where that is not
    proven (the continued sheet and cleared factors included); how growing modes are excluded; by which code."""

    enclosures: tuple[Enclosure, ...]
    window_asked: bool
    count: int | None
    growing: str
    prover: str


@dataclass(frozen=True)
class PointResults:
    """What the survey knows of one point.

    ``modes`` maps (family, index) to its evidence, in the order of the search; it is empty, and
    ``zeros`` is None, when the search failed. ``proofs`` is None where none were asked for.
    """

    status: str
    zeros: Zeros | None
    window: Mapping[str, str]
    solver: str
    modes: Mapping[ModeKey, Evidence]
    proofs: Proofs | None = None

    @property
    def enclosures(self) -> tuple[Enclosure, ...]:
        return self.proofs.enclosures if self.proofs else ()


def read_point(folder: CellFolder, ladder: Iterable[tuple[int, int]], extent: str = NO_PROOFS) -> PointResults:
    """Read the search, the witness, the cells (depth, precision) and the proofs of one point.

    ``extent`` is the config's ``proofs``: ``none``, ``modes`` or ``windows``.


    Raises `FileError` for a file that is not there, `DamagedFile` for one that is damaged or
    not what its name says, `StaleError` when two of them come from different solvers.
    """
    search = _read(folder.search, "search", folder)
    witness = _read(folder.witness, "witness", folder, search)
    aim = {}
    for depth, precision in ladder:
        path = folder.cell(depth, precision)
        cell = _read(path, "cell", folder, search)
        if (cell["depth"], cell["precision"]) != (depth, precision):
            raise DamagedFile(f"{path}: holds depth {cell['depth']}, precision {cell['precision']}; {_REMEDY}")
        aim[depth, precision] = _by_mode(cell)
    witnesses = _by_mode(witness)
    ok = search["status"] == "ok"
    return PointResults(
        status=search["status"],
        zeros=_zeros(search) if ok else None,
        window=search["window"],
        solver=search["solver"],
        modes={
            key: evidence_of(mode, witnesses.get(key, {}), {rung: modes.get(key) for rung, modes in aim.items()})
            for key, mode in (_by_mode(search).items() if ok else ())
        },
        proofs=None if extent == NO_PROOFS else _read_proofs(folder, extent, search),
    )


def _read_proofs(folder: CellFolder, extent: str, search: Mapping[str, Any]) -> Proofs:
    path = folder.proofs(extent)
    document = _read(path, "proofs", folder, search)
    if document["extent"] != extent:
        raise DamagedFile(f"{path}: holds proofs of {document['extent']}; {_REMEDY}")
    zeros = (*document["modes"], *document["others"])
    certificate = document["certificate"]
    return Proofs(
        # A mode that is not proven has no statement; a zero of another kind is no mode.
        enclosures=tuple(Enclosure.from_document(zero) for zero in zeros if zero.get("kind") == "mode"),
        window_asked=extent == "windows",
        count=certificate["count"] if certificate["status"] == "proven" else None,
        growing=document["growing"]["method"],
        prover=document["prover"],
    )


def _read(path: str, kind: str, folder: CellFolder, search: Mapping[str, Any] | None = None) -> dict[str, Any]:
    try:
        document = jsonfile.read(path, kind)
    except DamagedFile:
        raise
    except FileError as error:
        raise FileError(f"{error}: run snakemake again to compute it") from None
    if document["point"] != folder.point.document():
        raise DamagedFile(f"{path}: belongs to another point; {_REMEDY}")
    if search is not None:
        if document["solver"] != search["solver"]:
            raise StaleError(f"{path}: made by another state of the solver than {folder.search}; run snakemake again")
        if document["window"] != search["window"]:
            raise DamagedFile(f"{path}: belongs to another window than {folder.search}; {_REMEDY}")
    return document


def _zeros(search: Mapping[str, Any]) -> Zeros:
    return Zeros(search["counted"], search["found"], len(search["continued"]), len(search["undetermined"]))


def _by_mode(document: Mapping[str, Any]) -> dict[ModeKey, dict[str, Any]]:
    return {(mode["family"], mode["index"]): mode for mode in document["modes"]}


def _run(entry: Mapping[str, str] | None) -> Run:
    if entry is None:
        return ABSENT
    ok = entry["status"] == "ok"
    return Run(entry["status"], Frequency(entry["re"], entry["im"]) if ok else None)


def evidence_of(
    mode: Mapping[str, str],
    witness: Mapping[str, Any],
    aim: Mapping[tuple[int, int], Mapping[str, Any] | None],
) -> Evidence:
    return Evidence(
        search=Frequency(mode["re"], mode["im"]),
        aim=tuple(
            AimRun(depth, precision, _run(run), _run(run.get("tilted")))
            for (depth, precision), run in aim.items()
            if run is not None
        ),
        **{name: _run(witness.get(name)) for name in _WITNESSES},
    )
