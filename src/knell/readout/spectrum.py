"""The spectrum in the complex plane: Schwarzschild against deformed holes, joined along the coupling.

One panel for each exponent of each field. A path starts at the Schwarzschild mode and runs
through the couplings of the survey; near-axis modes have no Schwarzschild partner and stand alone.
"""

from __future__ import annotations

from typing import Any

import numpy as np
import xarray as xr
from matplotlib.axes import Axes
from matplotlib.cm import ScalarMappable
from matplotlib.colors import Normalize
from matplotlib.figure import Figure
from matplotlib.lines import Line2D

from knell.readout import marks, style

_PANELS_PER_ROW = 2
_EXTREMAL_EDGE = 1.4


def draw(dataset: xr.Dataset) -> Figure:
    """``Mω`` of every mode of the survey; what is neither settled nor proven is crossed out."""
    panels = [(str(field), int(n)) for field in dataset.field.values for n in dataset.exponent.values]
    columns = min(_PANELS_PER_ROW, len(panels))
    rows = -(-len(panels) // columns)
    figure = style.new_figure(2.7 * rows + 0.6)
    grid = figure.subplots(rows, columns, squeeze=False, sharex=True, sharey=True)
    norm = Normalize(min(0.0, float(dataset.coupling.min())), max(1.0, float(dataset.coupling.max())))
    for axes, (field, exponent) in zip(grid.flat, panels, strict=False):
        for i, ell in enumerate(marks.ells_of(dataset, field)):
            hole = dataset.sel(field=field, exponent=exponent, ell=ell)
            _paths(axes, hole, norm, style.pick(style.DASHES, i), style.pick(style.MARKERS, i))
            _near_axis(axes, hole, norm, style.pick(style.NEAR_AXIS, i))
        axes.set_title(f"{field}, $n = {exponent}$")
    for axes in grid.flat[len(panels) :]:
        axes.set_axis_off()
    for axes in grid[-1]:
        axes.set_xlabel(r"$\mathrm{Re}\,M\omega$")
    for axes in grid[:, 0]:
        axes.set_ylabel(r"$\mathrm{Im}\,M\omega$")
    bar = figure.colorbar(ScalarMappable(norm, style.SEQUENTIAL), ax=grid, aspect=40, pad=0.01)
    bar.set_label(r"coupling $\kappa$ (0 is Schwarzschild, 1 extremal)")
    _legend(figure, dataset)
    return figure


def _paths(axes: Axes, dataset: xr.Dataset, norm: Normalize, dashes: Any, marker: str) -> None:
    """One path for each overtone; ``dataset`` holds one field, exponent and ℓ."""
    couplings = dataset.coupling.values
    for overtone in dataset.overtone.values:
        mode = dataset.sel(overtone=overtone)
        start = complex(mode.schwarzschild_re, mode.schwarzschild_im)
        values = mode.frequency_re.values + 1j * mode.frequency_im.values
        # Negative couplings lie on the other side of Schwarzschild.
        order = np.argsort([*couplings, 0.0])
        path = np.append(values, start)[order]
        axes.plot(path.real, path.imag, linestyle=dashes, color=style.GREY, linewidth=0.8, zorder=1)
        axes.plot(start.real, start.imag, **style.REFERENCE)
        _name(axes, str(overtone), start, leftwards=bool(values[np.abs(couplings).argmin()].real > start.real))
        _points(axes, values, couplings, mode.verdict.values, norm, marker)


def _name(axes: Axes, text: str, place: complex, leftwards: bool) -> None:
    """The overtone number on the side of the Schwarzschild mode that the path does not take."""
    axes.annotate(
        text,
        (place.real, place.imag),
        (-6 if leftwards else 6, 0),
        textcoords="offset points",
        ha="right" if leftwards else "left",
        va="center",
        fontsize=6.5,
    )


def _near_axis(axes: Axes, dataset: xr.Dataset, norm: Normalize, marker: str) -> None:
    values = dataset.near_axis_re + 1j * dataset.near_axis_im
    for i, coupling in enumerate(dataset.coupling.values):
        verdict = dataset.near_axis_verdict.isel(coupling=i).values
        column = values.isel(coupling=i).values
        _points(axes, column, np.full(column.shape, coupling), verdict, norm, marker)


def _points(
    axes: Axes, values: np.ndarray, couplings: np.ndarray, verdict: np.ndarray, norm: Normalize, marker: str
) -> None:
    """Modes coloured by coupling, the extremal hole's with a heavy edge; a cross over what is not settled."""
    seen = np.isfinite(values)
    doubtful = seen & marks.doubtful(verdict)
    axes.scatter(
        values[seen].real,
        values[seen].imag,
        c=couplings[seen],
        norm=norm,
        cmap=style.SEQUENTIAL,
        marker=marker,
        s=13,
        edgecolors="black",
        linewidths=[_EXTREMAL_EDGE if coupling == 1 else 0.4 for coupling in couplings[seen]],
        zorder=2,
    )
    axes.plot(values[doubtful].real, values[doubtful].imag, "x", color=style.VERMILION, markersize=6, zorder=3)


def _legend(figure: Figure, dataset: xr.Dataset) -> None:
    ells = [int(x) for x in dataset.ell.values]
    near_axis = bool((dataset.near_axis_verdict > 0).any())

    def sign(marker: str, edge: float = 0.5, **more: Any) -> Line2D:
        return Line2D([], [], marker=marker, color=style.GREY, markeredgecolor="black", markeredgewidth=edge, **more)

    entries = {"Schwarzschild, with its overtone number": Line2D([], [], linestyle="", **style.REFERENCE)}
    for i, ell in enumerate(ells):
        line = sign(style.pick(style.MARKERS, i), linestyle=style.pick(style.DASHES, i))
        entries[f"deformed, $\\ell = {ell}$"] = line
    if near_axis:
        for i, ell in enumerate(ells):
            entries[f"near-axis, $\\ell = {ell}$"] = sign(style.pick(style.NEAR_AXIS, i), linestyle="")
    entries[r"extremal, $\kappa = 1$"] = sign("o", _EXTREMAL_EDGE, linestyle="")
    if _any_doubtful(dataset):
        entries["not settled"] = Line2D([], [], linestyle="", marker="x", color=style.VERMILION)
    figure.legend(list(entries.values()), list(entries), loc="outside lower center", ncols=4)


def _any_doubtful(dataset: xr.Dataset) -> bool:
    drawn = np.isfinite(dataset.frequency_re)
    principal = (marks.doubtful(dataset.verdict) & drawn).any()
    return bool(principal | marks.doubtful(dataset.near_axis_verdict).any())
