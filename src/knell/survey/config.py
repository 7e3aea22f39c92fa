"""The config of a survey: one loader for the workflow, the command line and the tests."""

from __future__ import annotations

import os
import tempfile
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from fractions import Fraction
from pathlib import Path, PurePosixPath
from typing import Any

from knell.errors import ConfigError, InputError
from knell.physics.exact import parse_rational, rational_text
from knell.survey import exact_yaml, jsonfile
from knell.survey.config_schema import NO_PROOFS
from knell.survey.exact_yaml import ExactYaml, KeyPath, show_path, show_value
from knell.survey.layout import CELLS, CellFolder
from knell.survey.points import Point, grid

DEFAULT = "config/config.yaml"
DEFAULT_REQUIRED_DIGITS = 10
DEFAULT_WINDOW = Fraction(3, 2)
DEFAULT_PROOFS = "windows"
# Folders that the default config fills in results/: a config of that name would write into them.
_TAKEN = ("benchmarks", "cells", "figures", "logs")


@dataclass(frozen=True)
class Config:
    """A valid config. Lists are ascending; couplings and the window's depth are exact.

    ``ell`` gives the list of ``ℓ`` of each field, ``overtones`` the labels asked for,
    ``window`` the largest ``|Im Mω|``, ``proofs`` what is proven (``none``, ``modes`` or ``windows``), ``results`` the
    folder of everything but the cells.
    """

    ell: Mapping[str, tuple[int, ...]]
    exponents: tuple[int, ...]
    couplings: tuple[Fraction, ...]
    overtones: tuple[int, ...]
    depths: tuple[int, ...]
    precisions: tuple[int, ...]
    required_digits: int
    window: Fraction
    proofs: str
    results: str

    @property
    def points(self) -> tuple[Point, ...]:
        """Every point once, Schwarzschild first for each (field, ``ℓ``)."""
        return grid(self.ell, self.exponents, self.couplings)

    def folder(self, point: Point, root: str = CELLS) -> CellFolder:
        """Where the files of ``point`` lie."""
        return CellFolder(point, self.window, root)

    def cell_files(self, root: str = CELLS) -> list[str]:
        """Every file that the survey computes for its points: searches, witnesses, cells and proofs."""
        files = []
        for folder in (self.folder(point, root) for point in self.points):
            files += [folder.search, folder.witness]
            files += [] if self.proofs == NO_PROOFS else [folder.proofs(self.proofs)]
            files += [folder.cell(depth, precision) for depth in self.depths for precision in self.precisions]
        return files

    def document(self) -> dict[str, Any]:
        """The JSON form, couplings and window as ratios."""
        return {
            "ell": {field: list(values) for field, values in self.ell.items()},
            "exponents": list(self.exponents),
            "couplings": [rational_text(x) for x in self.couplings],
            "overtones": list(self.overtones),
            "depths": list(self.depths),
            "precisions": list(self.precisions),
            "required_digits": self.required_digits,
            "window": rational_text(self.window),
            "proofs": self.proofs,
            "results": self.results,
        }

    @classmethod
    def from_document(cls, document: Mapping[str, Any]) -> Config:
        """The inverse of `document`; extra keys are ignored, missing ones raise `KeyError`."""
        whole = {key: tuple(document[key]) for key in ("exponents", "overtones", "depths", "precisions")}
        return cls(
            ell={field: tuple(values) for field, values in document["ell"].items()},
            couplings=tuple(parse_rational(x) for x in document["couplings"]),
            required_digits=document["required_digits"],
            window=parse_rational(document["window"]),
            proofs=document["proofs"],
            results=document["results"],
            **whole,
        )


def load_config(path: str | Path, overrides: Mapping[str, object] | None = None) -> Config:
    """Read, check and complete the config at ``path``, with top-level keys replaced by ``overrides``.

    Raises `ConfigError` with every problem, one line each: ``file:line: key path: problem
    and remedy``; what comes from an override is said to be in ``--config``.
    """
    # Imported here because it is slow, and a config read back from JSON needs no schema.
    from knell.survey.config_problems import problems

    source = _read(path)
    replaced = {key: exact_value(value) for key, value in (overrides or {}).items()}
    values = _numbers({**source.value, **replaced})

    def line(key_path: KeyPath, sentence: str) -> str:
        where = str(path) if key_path and key_path[0] not in source.value else f"{path}:{source.line(key_path)}"
        if key_path and key_path[0] in replaced:
            where = "--config"
        return f"{where}: {show_path(key_path)}: {sentence}"

    found = [line(*problem) for problem in problems(values)]
    if found:
        raise ConfigError(found)
    config = _complete(values, path)
    found = [line(*problem) for problem in _contradictions(config, "results" in values)]
    if found:
        raise ConfigError(found)
    return config


def read_completed(path: str | Path) -> Config:
    """The config that ``knell config --output`` wrote. Raises `FileError` or `DamagedFile`."""
    return Config.from_document(jsonfile.read(path, "config"))


def parse_overrides(entries: Iterable[str]) -> dict[str, object]:
    """``key=value`` texts, each value one line of YAML. Raises `InputError` for anything else."""
    overrides = {}
    for entry in entries:
        key, equals, text = entry.partition("=")
        if not (key.strip() and equals):
            raise InputError(f"--set {entry}: must be key=value, such as couplings='[0.5, 0.9]'")
        overrides[key.strip()] = exact_yaml.parse(text, f"--set {key.strip()}").value
    return overrides


def show_overrides(overrides: Mapping[str, object]) -> list[str]:
    """The inverse of `parse_overrides`."""
    return [f"{key}={show_value(exact_value(value))}" for key, value in overrides.items()]


def exact_value(value: object) -> Any:
    """A value from Snakemake's ``--config``, where numbers inside lists arrive as text, made exact."""
    if isinstance(value, dict):
        return {key: exact_value(item) for key, item in value.items()}
    if isinstance(value, (list, tuple)):
        return [exact_value(item) for item in value]
    if isinstance(value, float):
        return parse_rational(value)
    return exact_yaml.read_scalar(value) if isinstance(value, str) else value


def _read(path: str | Path) -> ExactYaml:
    try:
        text = Path(path).read_text(encoding="utf-8")
    except FileNotFoundError:
        raise ConfigError([f"{path}: there is no such config file; give one with --configfile"]) from None
    except OSError as error:
        raise ConfigError([f"{path}: cannot be read: {error.strerror}"]) from None
    except UnicodeDecodeError:
        raise ConfigError([f"{path}: is not text in UTF-8"]) from None
    try:
        source = exact_yaml.parse(text, str(path))
    except InputError as error:
        raise ConfigError([str(error)]) from None
    if not isinstance(source.value, dict):
        raise ConfigError([f"{path}: must be keys and values, see config/README.md"])
    return source


def _numbers(values: dict[str, Any]) -> dict[str, Any]:
    """The values with numbers in quotes, such as ``'9/10'``, read where a number is wanted."""
    values = dict(values)
    if isinstance(values.get("couplings"), list):
        values["couplings"] = exact_value(values["couplings"])
    if "window" in values:
        values["window"] = exact_value(values["window"])
    return values


def _complete(values: Mapping[str, Any], path: str | Path) -> Config:
    overtones = values["overtones"]
    return Config(
        ell={field: tuple(sorted(ells)) for field, ells in values["ell"].items()},
        exponents=tuple(sorted(values["exponents"])),
        couplings=tuple(sorted(Fraction(x) for x in values["couplings"])),
        overtones=tuple(range(overtones)) if isinstance(overtones, int) else tuple(sorted(overtones)),
        depths=tuple(sorted(values["depths"])),
        precisions=tuple(sorted(values["precisions"])),
        required_digits=values.get("required_digits", DEFAULT_REQUIRED_DIGITS),
        window=Fraction(values.get("window", DEFAULT_WINDOW)),
        proofs=values.get("proofs", DEFAULT_PROOFS),
        results=str(PurePosixPath(values.get("results", default_results(path)))),
    )


def default_results(path: str | Path) -> str:
    """``results`` for ``config/config.yaml``, ``results/<name>`` for any other config."""
    file = Path(path)
    return "results" if file.parts[-2:] == Path(DEFAULT).parts else f"results/{file.stem}"


def _contradictions(config: Config, results_given: bool) -> Iterable[tuple[KeyPath, str]]:
    """What no single key shows."""
    most = max(config.precisions)
    if config.required_digits > most:
        yield ("required_digits",), f"{config.required_digits} digits cannot be had from a precision of {most} digits"
    folder = PurePosixPath(config.results)
    if folder.parts[:1] == ("results",) and folder.parts[1:2] and folder.parts[1] in _TAKEN:
        remedy = "choose another folder" if results_given else "name the config file otherwise, or set results"
        yield ("results",), f"{folder} is where the default config keeps its {folder.parts[1]}; {remedy}"
        return
    for target in (config.results, CELLS):
        refusal = _unwritable(Path(target))
        if refusal:
            yield ("results",), f"cannot write to {target}: {refusal}; choose another folder or change its rights"


def _unwritable(folder: Path) -> str | None:
    """Why no file can be made in ``folder`` or in the nearest folder above it that exists; None if one can."""
    while not folder.exists() and folder != folder.parent:
        folder = folder.parent
    if not folder.is_dir():
        return f"{folder} is a file"
    if not os.access(folder, os.W_OK | os.X_OK):
        return f"no right to write in {folder}"
    try:
        # The rights of root say yes everywhere; a read-only disk and /proc say no only when tried.
        with tempfile.TemporaryFile(dir=folder):
            return None
    except OSError as error:
        return f"{folder}: {error.strerror}"
