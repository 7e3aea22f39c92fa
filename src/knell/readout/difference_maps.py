"""Difference maps: how far each mode lies from its Schwarzschild counterpart.

One panel for each exponent, one row of panels for the real and one for the imaginary part of
each field; in a panel the coupling runs to the right, the overtones of each ``ℓ`` upwards.
"""

from __future__ import annotations

import numpy as np
import xarray as xr
from matplotlib.artist import Artist
from matplotlib.axes import Axes
from matplotlib.cm import ScalarMappable
from matplotlib.colors import CenteredNorm, Normalize
from matplotlib.figure import Figure
from matplotlib.lines import Line2D
from matplotlib.patches import Patch, Rectangle

from knell.readout import marks, style

# Cells carry their number while it can be read; narrower ones a plus where the shift is positive.
_MOST_COLUMNS_WITH_NUMBERS = 7
_MOST_TICKS = 5
_PARTS = {"shift_re": r"$\mathrm{Re}\,\omega$", "shift_im": r"$\mathrm{Im}\,\omega$"}
_PANELS_PER_ROW = 4


def draw(dataset: xr.Dataset) -> Figure:
    """Shifts in per cent over coupling × overtone and ℓ; what is neither settled nor proven is hatched."""
    fields = [str(x) for x in dataset.field.values]
    columns = min(_PANELS_PER_ROW, dataset.sizes["exponent"])
    bands = -(-dataset.sizes["exponent"] // columns)
    cells = [len(marks.ells_of(dataset, field)) * dataset.sizes["overtone"] for field in fields]
    heights = [0.75 + 0.145 * max(cells[i], 4) for i in range(len(fields)) for _ in range(len(_PARTS) * bands)]
    figure = style.new_figure(sum(heights) + 0.35)
    grid = figure.subplots(
        len(heights), columns, squeeze=False, sharex=True, sharey="row", gridspec_kw={"height_ratios": heights}
    )
    rows = iter(grid)
    for field in fields:
        for name, symbol in _PARTS.items():
            block = [next(rows) for _ in range(bands)]
            norm = _norm(dataset[name].sel(field=field), dataset.verdict.sel(field=field))
            for i, exponent in enumerate(dataset.exponent.values):
                axes = block[i // columns][i % columns]
                _panel(axes, dataset.sel(field=field, exponent=exponent), name, marks.ells_of(dataset, field), norm)
                axes.set_title(f"{field}, $n = {exponent}$" if len(fields) > 1 else f"$n = {exponent}$")
            for row in block:
                _name_rows(row[0], marks.ells_of(dataset, field))
            for axes in np.concatenate(block)[dataset.sizes["exponent"] :]:
                axes.set_axis_off()
            _colour_bar(figure, block, norm, f"shift of {symbol} [%]")
    for axes in grid[-1]:
        axes.set_xlabel(r"coupling $\kappa$")
    _legend(figure, dataset.verdict)
    return figure


def _norm(shift: xr.DataArray, verdict: xr.DataArray) -> Normalize:
    """Centred on no shift; its range comes from settled and proven values alone."""
    values = np.abs(shift.where(marks.trusted(verdict)).values)
    largest = float(np.nanmax(values)) if np.isfinite(values).any() else 0.0
    return CenteredNorm(0.0, largest or 1.0)


def _panel(axes: Axes, dataset: xr.Dataset, name: str, ells: list[int], norm: Normalize) -> None:
    """``dataset`` holds one field and one exponent; rows are the overtones of each ``ℓ`` in turn."""
    rows = {"row": ("ell", "overtone")}
    table = dataset[[name, "verdict"]].sel(ell=ells).transpose("coupling", "ell", "overtone").stack(rows)
    shift, verdict = table[name].values.T, table.verdict.values.T
    shown = marks.trusted(table.verdict).values.T
    axes.pcolormesh(
        np.ma.masked_where(~shown, shift), cmap=style.DIVERGING, norm=norm, edgecolors="white", linewidth=0.6
    )
    written = verdict.shape[1] <= _MOST_COLUMNS_WITH_NUMBERS
    for row, column in np.ndindex(verdict.shape):
        if shown[row, column]:
            _write_number(axes, (column, row), float(shift[row, column]), norm, written)
        elif verdict[row, column]:
            _hatch(axes, (column, row), marks.letter(verdict[row, column]))
    _label_axes(axes, dataset, ells)


def _write_number(axes: Axes, corner: tuple[int, int], shift: float, norm: Normalize, whole: bool) -> None:
    """The shift itself, or in narrow cells the sign if positive: grey does not tell the signs apart."""
    dark = abs(norm(shift) - 0.5) > 0.32
    text = f"{shift:+.1f}" if whole else ("+" if shift > 0 else "")
    axes.text(
        corner[0] + 0.5,
        corner[1] + 0.48,
        text.replace("-", "−"),
        ha="center",
        va="center",
        fontsize=5.2,
        color="white" if dark else "black",
    )


def _hatch(axes: Axes, corner: tuple[int, int], letter: str) -> None:
    axes.add_patch(Rectangle(corner, 1, 1, facecolor="white", edgecolor=style.GREY, hatch=style.HATCH, linewidth=0.4))
    centre = (corner[0] + 0.5, corner[1] + 0.48)
    box = {"facecolor": "white", "edgecolor": "none", "pad": 0.6}
    axes.text(*centre, letter, ha="center", va="center", fontsize=5.5, bbox=box)


def _label_axes(axes: Axes, dataset: xr.Dataset, ells: list[int]) -> None:
    overtones = [int(x) for x in dataset.overtone.values]
    couplings = [f"{x:g}" for x in dataset.coupling.values]
    step = 1 if len(couplings) <= _MOST_COLUMNS_WITH_NUMBERS else -(-len(couplings) // _MOST_TICKS)
    axes.set_xticks(np.arange(len(couplings))[::step] + 0.5, couplings[::step])
    labels = [str(overtone) for _ in ells for overtone in overtones]
    axes.set_yticks(np.arange(len(labels)) + 0.5, labels)
    axes.tick_params(length=0)
    for i in range(1, len(ells)):
        axes.axhline(i * len(overtones), color="black", linewidth=1.0)


def _name_rows(axes: Axes, ells: list[int]) -> None:
    """The ``ℓ`` of each group of overtones, to the left of the first panel."""
    share = 1 / len(ells)
    for i, ell in enumerate(ells):
        axes.annotate(
            f"$\\ell = {ell}$",
            (0, (i + 0.5) * share),
            xycoords="axes fraction",
            xytext=(-13, 0),
            textcoords="offset points",
            rotation=90,
            ha="right",
            va="center",
        )
    axes.set_ylabel("overtone $N$", labelpad=15)


def _colour_bar(figure: Figure, block: list[np.ndarray], norm: Normalize, label: str) -> None:
    axes = list(np.concatenate(block))
    bar = figure.colorbar(ScalarMappable(norm, style.DIVERGING), ax=axes, aspect=18, pad=0.01, fraction=0.03)
    bar.set_label(label)


def _legend(figure: Figure, verdict: xr.DataArray) -> None:
    patch = Patch(facecolor="white", edgecolor=style.GREY, hatch=style.HATCH)
    meaning = marks.legend_text(verdict)
    handles: list[Artist] = [patch]
    texts = [f"not settled ({meaning or 'none here'})"]
    if verdict.sizes["coupling"] > _MOST_COLUMNS_WITH_NUMBERS:
        handles.append(Line2D([], [], marker="+", color="black", linestyle=""))
        texts.append("positive shift")
    figure.legend(handles, texts, loc="outside lower left", ncols=2)
