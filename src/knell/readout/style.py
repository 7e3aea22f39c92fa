"""The style of every figure: print sizes, colours that survive colour blindness and grey, and bytes that repeat.

Colour never stands alone: series differ in marker and line style too, and cells of a map carry
their numbers. Categories take the palette of M. Okabe and K. Ito (2008); ordered values
take ``cividis``, whose lightness rises steadily (less its palest end); differences take ``RdBu_r``, palest at zero.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from pathlib import Path
from typing import Any

import matplotlib as mpl
import numpy as np
from matplotlib.colors import ListedColormap
from matplotlib.figure import Figure
from matplotlib.layout_engine import ConstrainedLayoutEngine

from knell import __version__
from knell.survey import jsonfile

# Inches: the text width of a two-column journal page.
WIDTH = 7.0
DPI = 150

BLACK, ORANGE, SKY, GREEN, YELLOW, BLUE, VERMILION, PURPLE = (
    "#000000",
    "#e69f00",
    "#56b4e9",
    "#009e73",
    "#f0e442",
    "#0072b2",
    "#d55e00",
    "#cc79a7",
)
SERIES = (BLUE, VERMILION, GREEN, PURPLE, ORANGE, SKY, BLACK)
MARKERS = ("o", "D", "s", "p", "h", "8", "P")
DASHES = ("-", (0, (5, 2)), (0, (1, 1.2)), (0, (6, 2, 1.2, 2)), (0, (3, 1)), (0, (8, 2, 1, 2, 1, 2)))
REQUIRED = (0, (1, 2))
NEAR_AXIS = ("^", "v", "<", ">")
# The Schwarzschild mode, from which differences are taken.
REFERENCE: dict[str, Any] = {"marker": "o", "markersize": 6, "markerfacecolor": "none", "markeredgecolor": BLACK}
# The palest tenth would be lost on white paper.
SEQUENTIAL = ListedColormap(mpl.colormaps["cividis"](np.linspace(0, 0.9, 256)), "cividis-dark")
DIVERGING = "RdBu_r"
GREY = "#777777"
# What is not settled: hatched, never coloured.
HATCH = "/////"

_SETTINGS: Any = {
    "font.family": "DejaVu Sans",
    "mathtext.fontset": "dejavusans",
    "font.size": 8,
    "axes.titlesize": 8,
    "axes.labelsize": 8,
    "xtick.labelsize": 7,
    "ytick.labelsize": 7,
    "legend.fontsize": 7,
    "axes.linewidth": 0.6,
    "lines.linewidth": 1.0,
    "lines.markersize": 4,
    "hatch.linewidth": 0.6,
    "xtick.major.width": 0.6,
    "ytick.major.width": 0.6,
    "legend.frameon": False,
    "figure.dpi": DPI,
    "savefig.dpi": DPI,
    "pdf.fonttype": 42,
    "svg.hashsalt": "knell",
    "axes.unicode_minus": True,
}


def pick(series: Sequence[Any], index: int) -> Any:
    """The entry of a list of colours, markers or dashes for the ``index``-th series, over and over."""
    return series[index % len(series)]


@contextmanager
def applied() -> Iterator[None]:
    """The style, for figures made and saved inside the block; whatever a user has set is put aside."""
    with mpl.rc_context():
        mpl.rcdefaults()
        mpl.rcParams.update(_SETTINGS)
        yield


def new_figure(height: float, width: float = WIDTH) -> Figure:
    """An empty figure of ``width`` × ``height`` inches, laid out so that nothing overlaps."""
    return Figure(figsize=(width, height), layout="constrained")


def save(figure: Figure, path: str | Path, title: str, record: str = "") -> None:
    """Write ``figure`` as PNG or PDF, by the suffix of ``path``, whole or not at all; same figure, same bytes.

    ``title`` and the id of the provenance ``record`` go into the file's own metadata (PNG text
    ``Source``, PDF ``Keywords``). Raises `FileError` when it cannot be written and
    `ValueError` for another suffix.
    """
    maker, source = f"knell {__version__}", f"provenance record {record}" if record else ""
    suffix = Path(path).suffix
    if suffix == ".png":
        metadata: dict[str, str | None] = {"Title": title, "Software": maker, "Source": source}
    elif suffix == ".pdf":
        metadata = {"Title": title, "Creator": maker, "Keywords": source, "CreationDate": None, "ModDate": None}
    else:
        raise ValueError(f"{path}: figures are written as .png or .pdf")
    metadata = {key: value for key, value in metadata.items() if value != ""}
    _fix_layout(figure)
    with jsonfile.replacing(path) as temporary:
        figure.savefig(temporary, metadata=metadata)


def _fix_layout(figure: Figure) -> None:
    """Lay the figure out once, so that every format has the same layout and none pays for it again."""
    if isinstance(figure.get_layout_engine(), ConstrainedLayoutEngine):
        figure.draw_without_rendering()
        figure.set_layout_engine("none")
