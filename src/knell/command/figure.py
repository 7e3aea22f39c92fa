"""``knell figure``: draw one figure of the dataset in every format."""

from __future__ import annotations

import argparse
from pathlib import Path
from typing import TYPE_CHECKING

from knell.errors import DamagedFile, InputError
from knell.record.provenance import Making
from knell.record.source import FIGURES, source_hash
from knell.survey.layout import FIGURE_FORMATS

if TYPE_CHECKING:
    import xarray as xr

DESCRIPTION = "Draw one figure of the dataset, into one file for each format; the suffix chooses it."


def add_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("name", help="which figure")
    parser.add_argument("--dataset", required=True, help="such as results/survey.nc")
    parser.add_argument("--output", required=True, nargs="+", help="PNG or PDF files to write")


def run(arguments: argparse.Namespace) -> None:
    from knell.readout import style
    from knell.readout.figures import FIGURES as REGISTRY

    name, source = arguments.name, source_hash(FIGURES)
    if name not in REGISTRY:
        raise InputError(f"no figure {name!r}; the figures are {', '.join(sorted(REGISTRY))}")
    for path in arguments.output:
        if Path(path).suffix.removeprefix(".") not in FIGURE_FORMATS:
            raise InputError(f"--output {path}: must end in one of {', '.join(FIGURE_FORMATS)}")
    entry, dataset = REGISTRY[name], _open(arguments.dataset)
    with style.applied():
        drawing = entry.draw(dataset)
        for path in arguments.output:
            stated = {"figure": name, "format": Path(path).suffix, "source": source}
            making = Making.begin("figure", (arguments.dataset,), stated)
            style.save(drawing, path, entry.title, making.id)
            making.finish(path)


def _open(path: str) -> xr.Dataset:
    import xarray as xr

    try:
        with xr.open_dataset(path, engine="netcdf4") as dataset:
            return dataset.load()
    except (OSError, ValueError, RuntimeError) as error:
        raise DamagedFile(f"{path}: cannot be read as a dataset ({error}); run snakemake --force {path}") from None
