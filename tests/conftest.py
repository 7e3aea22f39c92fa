"""Synthetic surveys: cell files in the survey's own format, of invented but smooth frequencies."""

from __future__ import annotations

import os

# As in the commands: one core for one process. Set before NumPy is loaded, which reads it once.
os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")

from collections.abc import Callable, Mapping
from decimal import Decimal
from fractions import Fraction
from pathlib import Path
from typing import Any

import pytest

from knell.survey import jsonfile
from knell.survey.config import Config
from knell.survey.points import Point

Edit = Callable[[dict[str, Any]], None]

# Rough ℓ = 2 overtones; only their order matters here.
_OVERTONES = ((0.3737, -0.0890), (0.3467, -0.2739), (0.3011, -0.4783), (0.2515, -0.7051), (0.2075, -0.9468))
_SOLVER = "0123456789abcdef"


def true_frequency(point: Point, index: int) -> tuple[Decimal, Decimal]:
    """What every method of the synthetic survey converges to, 50 digits."""
    re, im = _OVERTONES[index]
    bend = point.coupling * (index + 1) / (3 * (point.exponent or 2))
    # A seventh is periodic in decimals: no two rungs agree by trailing zeros.
    ratio = (1 + Fraction(1, 7_000_000)) * Fraction(2 * point.ell + 1, 5)
    parts = (Fraction(str(re)) * (1 - bend / 2) * ratio, Fraction(str(im)) * (1 - bend))
    return tuple((Decimal(x.numerator) / Decimal(x.denominator)) for x in parts)  # type: ignore[return-value]


class SyntheticSurvey:
    """A config and its cells; ``edits`` maps (slug, file name) to a change of that document before it is written."""

    def __init__(self, folder: Path, edits: Mapping[tuple[str, str], Edit] | None = None, **changes: Any) -> None:
        keys: dict[str, Any] = {
            "ell": {"axial": (2,)},
            "exponents": (3, 4),
            "couplings": (Fraction(1, 2), Fraction(9, 10), Fraction(1)),
            "overtones": (0, 1, 2),
            "depths": (100, 200),
            "precisions": (40, 80),
            "required_digits": 10,
            "window": Fraction(3, 2),
            "proofs": "none",
            "results": "results",
        }
        self.config = Config(**{**keys, **changes})
        self.cells = str(folder / "cells")
        self._edits = edits or {}
        for point in self.config.points:
            self._write(point)

    def _write(self, point: Point) -> None:
        folder = self.config.folder(point, self.cells)
        modes = list(range(len(_OVERTONES)))
        head = {
            "format": 1,
            "point": point.document(),
            "solver": _SOLVER,
            "window": {"re_max": "7/10", "depth": str(self.config.window), "excluded": "1/10"},
        }
        near_axis = [{"family": "near-axis", "index": 0, "re": "2e-5", "im": "-0.61"}]
        listed = [_mode("principal", i, _run(point, i, 14)) for i in modes]
        listed += [] if point.is_schwarzschild else near_axis
        search = {
            "kind": "search",
            "status": "ok",
            "reason": "",
            "counted": len(listed) + 1,
            "found": len(listed) + 1,
            "modes": listed,
            "continued": [{"re": "-0.1", "im": "-0.9"}],
            "undetermined": [],
        }
        runs = {"match": 33, "match_other_path": 34, "match_more_precise": 47, "spectral": 28, "spectral_tilted": 27}
        witness = {
            "kind": "witness",
            "modes": [
                {"family": "principal", "index": i} | {name: _run(point, i, digits) for name, digits in runs.items()}
                for i in modes
            ],
        }
        self._put(folder.search, point, head | search)
        if self.config.proofs != "none":
            self._put(folder.proofs(self.config.proofs), point, head | _proofs(point, listed, self.config.proofs))
        self._put(folder.witness, point, head | witness)
        for depth in self.config.depths:
            for precision in self.config.precisions:
                cell = {"kind": "cell", "depth": depth, "precision": precision}
                cell["modes"] = [_aim(point, i, depth, precision) for i in modes]
                self._put(folder.cell(depth, precision), point, head | cell)

    def _put(self, path: str, point: Point, document: dict[str, Any]) -> None:
        edit = self._edits.get((point.slug, Path(path).name))
        if edit:
            edit(document)
        jsonfile.write(path, document)


def _proofs(point: Point, listed: list[dict[str, Any]], extent: str) -> dict[str, Any]:
    """Every mode proven to 22 decimals; the records of the proofs, which the dataset does not read, are left out."""
    modes = []
    for mode in listed:
        re, im = mode["re"], mode["im"]
        if mode["family"] == "principal":
            re, im = (f"{x:.24f}" for x in true_frequency(point, mode["index"]))
        head = {"family": mode["family"], "index": mode["index"], "status": "proven", "reason": "", "kind": "mode"}
        disc = {"frequency_re": re, "frequency_im": im, "proven_radius": "1.23e-22", "unique_radius": "3.45e-2"}
        modes.append(head | disc)
    continued = {"kind": "continued", "frequency_re": "-0.1", "frequency_im": "-0.9"}
    proven = {"status": "proven", "reason": "", "count": len(modes) + 1}
    windows = extent == "windows"
    return {
        "kind": "proofs",
        "extent": extent,
        "prover": "fedcba9876543210",
        "modes": modes,
        "others": [continued | {"proven_radius": "1e-22", "unique_radius": "3e-2"}] if windows else [],
        "certificate": proven if windows else {"status": "not asked", "reason": ""},
        "growing": {"method": "energy", "says": "V >= 0"},
    }


def _mode(family: str, index: int, run: Mapping[str, str]) -> dict[str, Any]:
    return {"family": family, "index": index, "re": run["re"], "im": run["im"]}


def _run(point: Point, index: int, digits: float) -> dict[str, str]:
    """A run whose value is off by ``10^-digits`` of itself, written to 50 digits."""
    factor = 1 + Decimal(10) ** Decimal(-digits)
    re, im = (x * factor for x in true_frequency(point, index))
    return {"status": "ok", "reason": "", "re": f"{re:.50f}", "im": f"{im:.50f}"}


def _aim(point: Point, index: int, depth: int, precision: int) -> dict[str, Any]:
    """Converges like ``exp(-c sqrt(depth))``, slower for each overtone; starved when precision is too low for depth."""
    head = {"family": "principal", "index": index}
    if precision < depth // 4:
        starved = {"status": "starved", "reason": "the ball swamps the determinant", "re": "", "im": ""}
        return head | starved | {"tilted": starved}
    digits = 1.7 * depth**0.5 / (1 + index / 2)
    return head | _run(point, index, digits) | {"tilted": _run(point, index, digits - 0.7)}


@pytest.fixture(scope="session")
def synthetic_survey(tmp_path_factory: pytest.TempPathFactory) -> Callable[..., SyntheticSurvey]:
    """Make a synthetic survey, each in a folder of its own: ``synthetic_survey(edits, **config)``."""

    def make(edits: Mapping[tuple[str, str], Edit] | None = None, **changes: Any) -> SyntheticSurvey:
        return SyntheticSurvey(tmp_path_factory.mktemp("survey"), edits, **changes)

    return make


@pytest.fixture(name="true_frequency")
def _true_frequency() -> Callable[[Point, int], tuple[Decimal, Decimal]]:
    """What the synthetic survey's methods converge to."""
    return true_frequency
