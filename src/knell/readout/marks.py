"""Which values may be shown plainly, and how the others are marked."""

from __future__ import annotations

from typing import Any

import numpy as np
import xarray as xr

from knell.survey.dataset_schema import NOT_SURVEYED
from knell.survey.verdict import Verdict

# One letter for each verdict that is never shown without it.
LETTERS = {Verdict.missing: "m", Verdict.artefact: "a", Verdict.special: "s", Verdict.drifting: "d"}


def trusted(verdict: Any) -> Any:
    """True where the verdict is settled or proven; an array of any kind."""
    return (verdict == Verdict.settled) | (verdict == Verdict.proven)


def doubtful(verdict: Any) -> Any:
    """True where a mode was asked for or found and its verdict is neither settled nor proven."""
    return (verdict != NOT_SURVEYED) & ~trusted(verdict)


def letter(verdict: int) -> str:
    """The mark of a verdict, empty for a trusted one and where nothing was surveyed."""
    return LETTERS.get(Verdict(verdict), "") if verdict else ""


def legend_text(verdict: xr.DataArray) -> str:
    """``d drifting, m missing``: the letters that occur, explained; empty when all is settled or proven."""
    present = {int(x) for x in np.unique(verdict.values)}
    return ", ".join(f"{mark} {v.name}" for v, mark in reversed(LETTERS.items()) if int(v) in present)


def surveyed(verdict: Any) -> Any:
    """True where the survey has anything to say."""
    return verdict != NOT_SURVEYED


def ells_of(dataset: xr.Dataset, field: str) -> list[int]:
    """The ``ℓ`` that were surveyed for ``field``."""
    seen = surveyed(dataset.verdict.sel(field=field)).any(["exponent", "coupling", "overtone"])
    return [int(ell) for ell in dataset.ell.values[seen.values]]
