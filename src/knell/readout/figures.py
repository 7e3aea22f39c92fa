"""The figures of a survey by name: how each is drawn, where its caption is and which chapter it belongs to."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import xarray as xr
from matplotlib.figure import Figure

from knell.readout import difference_maps, digits, potentials, spectrum


@dataclass(frozen=True)
class Entry:
    """One figure: ``draw`` makes it of the dataset; ``caption`` is a file of the project, ``category`` a chapter."""

    draw: Callable[[xr.Dataset], Figure]
    title: str
    caption: str
    category: str


FIGURES = {
    "difference_maps": Entry(
        difference_maps.draw, "Differences from Schwarzschild", "workflow/report/difference_maps.rst", "differences"
    ),
    "spectrum": Entry(spectrum.draw, "Spectra in the complex plane", "workflow/report/spectrum.rst", "spectra"),
    "digits": Entry(digits.draw, "Digits against depth", "workflow/report/digits.rst", "evidence"),
    "potentials": Entry(potentials.draw, "Effective potentials", "workflow/report/potentials.rst", "spectra"),
}
