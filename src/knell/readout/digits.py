"""Digits against iteration depth, for each precision of the asymptotic iteration method (AIM).

One panel for each overtone. A cell's digits are those it shares with another method, so the
curve shows the error and not merely that the iteration stands still.
"""

from __future__ import annotations

import numpy as np
import xarray as xr
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.lines import Line2D
from matplotlib.patches import Patch
from matplotlib.ticker import MaxNLocator

from knell.readout import style
from knell.survey.dataset_schema import NOT_SURVEYED, STATUS_FLAGS

_PANELS_PER_ROW = 3
_HOLES = ("field", "exponent", "coupling", "ell")
_OTHERS = tuple(status for status in STATUS_FLAGS if status != "ok")
# Neighbouring precisions are drawn side by side: shares of the distance between depths.
_SPREAD = 0.14


def draw(dataset: xr.Dataset) -> Figure:
    """Median and whole range over all holes of the survey, and how many cells gave no digits, and why."""
    overtones = dataset.overtone.values
    columns = min(_PANELS_PER_ROW, len(overtones))
    rows = -(-len(overtones) // columns)
    figure = style.new_figure(2.3 * rows + 0.55)
    grid = figure.subplots(rows, columns, squeeze=False, sharex=True, sharey=True)
    for axes, overtone in zip(grid.flat, overtones, strict=False):
        _panel(axes, dataset.sel(overtone=overtone))
        axes.set_title(f"overtone $N = {overtone}$")
    # Room for the counts along the top.
    highest = float(dataset.ladder_digits.max())
    grid[0, 0].set_ylim(0, (1.25 + 0.05 * dataset.sizes["precision"]) * highest if highest > 0 else 1)
    for axes in grid.flat[len(overtones) :]:
        axes.set_axis_off()
    for axes in grid[:, 0]:
        axes.set_ylabel("digits shared with another method")
    for column in range(columns):
        lowest = [axes for axes in grid[:, column] if axes.axison][-1]
        lowest.set_xlabel("iteration depth")
        lowest.tick_params(labelbottom=True)
    spare = grid.flat[len(overtones) :]
    _legend(spare[0] if len(spare) else None, figure, dataset)
    return figure


def _panel(axes: Axes, dataset: xr.Dataset) -> None:
    depths, precisions = dataset.depth.values, dataset.precision.values
    surveyed = dataset.ladder_status != NOT_SURVEYED
    digits = dataset.ladder_digits.stack(hole=_HOLES)
    status, cells = dataset.ladder_status.stack(hole=_HOLES), surveyed.stack(hole=_HOLES)
    for i, precision in enumerate(precisions):
        places = np.arange(len(depths)) + _SPREAD * (i - (len(precisions) - 1) / 2)
        colour, marker = style.pick(style.SERIES, i), style.pick(style.MARKERS, i)
        medians = []
        for place, depth in zip(places, depths, strict=True):
            cell = {"depth": depth, "precision": precision}
            values = digits.sel(cell).values[np.isfinite(digits.sel(cell).values)]
            medians.append(np.median(values) if values.size else np.nan)
            if values.size:
                axes.vlines(place, values.min(), values.max(), color=colour, linewidth=0.8)
                axes.vlines(place, *np.percentile(values, [25, 75]), color=colour, linewidth=3.5, alpha=0.45)
            ok = int((status.sel(cell) == STATUS_FLAGS["ok"]).sum())
            _count(axes, place, f"{ok}/{int(cells.sel(cell).sum())}", colour, level=i)
        axes.plot(places, medians, marker=marker, color=colour, linestyle=style.pick(style.DASHES, i), zorder=3)
    axes.axhline(int(dataset.attrs["required_digits"]), color=style.GREY, linewidth=0.8, linestyle=style.REQUIRED)
    axes.set_xticks(np.arange(len(depths)), [str(x) for x in depths])
    axes.set_xlim(-0.5, len(depths) - 0.5)
    axes.yaxis.set_major_locator(MaxNLocator(integer=True, nbins=6))


def _count(axes: Axes, place: float, text: str, colour: str, level: int) -> None:
    """How many cells are ok, of all, along the top edge; one line for each precision."""
    axes.annotate(
        text,
        (place, 1),
        xycoords=("data", "axes fraction"),
        xytext=(0, -3 - 7 * level),
        textcoords="offset points",
        ha="center",
        va="top",
        fontsize=5.5,
        color=colour,
    )


def _legend(axes: Axes | None, figure: Figure, dataset: xr.Dataset) -> None:
    """In the place of a panel that is not needed, else below all panels."""
    entries: dict[str, Line2D | Patch] = {}
    for i, precision in enumerate(dataset.precision.values):
        style_of = {"color": style.pick(style.SERIES, i), "marker": style.pick(style.MARKERS, i)}
        entries[f"{precision} digits of arithmetic, median"] = Line2D(
            [], [], linestyle=style.pick(style.DASHES, i), **style_of
        )
    entries["half of the holes"] = Patch(color=style.GREY, alpha=0.45)
    entries["all holes"] = Line2D([], [], color=style.GREY, linewidth=0.8)
    required = int(dataset.attrs["required_digits"])
    entries[f"required, {required} digits"] = Line2D([], [], color=style.GREY, linewidth=0.8, linestyle=style.REQUIRED)
    title = f"Along the top: cells that gave\ndigits, of all. The others: {_reasons(dataset)}."
    if axes is not None:
        axes.legend(list(entries.values()), list(entries), loc="center", title=title, title_fontsize=7)
        return
    below = figure.legend(list(entries.values()), list(entries), loc="outside lower center", ncols=3, title=title)
    below.get_title().set_fontsize(7)


def _reasons(dataset: xr.Dataset) -> str:
    counts = {status: int((dataset.ladder_status == STATUS_FLAGS[status]).sum()) for status in _OTHERS}
    return ", ".join(f"{count} {status}" for status, count in counts.items() if count) or "none"
