"""The dataset's file: NumPy arrays to xarray, and xarray to compressed netCDF-4.

Nothing in the file tells when, where or in which order it was made: same values, same bytes.
"""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from typing import Any

import numpy as np
import xarray as xr

from knell.survey import jsonfile
from knell.survey.dataset_schema import Variable

# A chunk is compressed and read as a whole: small enough to be quick, large enough to shrink.
_CHUNK = 1 << 15


def empty(variable: Variable, sizes: Mapping[str, int]) -> np.ndarray:
    """An array of the variable's shape that holds its fill value everywhere."""
    dtype = object if variable.dtype is str else variable.dtype
    return np.full([sizes[dim] for dim in variable.dims], variable.fill, dtype=dtype)


def to_xarray(
    variables: Mapping[str, Variable],
    coordinates: Mapping[str, Variable],
    arrays: Mapping[str, Any],
    attributes: Mapping[str, Any],
) -> xr.Dataset:
    """The dataset of ``arrays``, which holds one entry for each variable and coordinate."""

    def labelled(name: str, variable: Variable) -> xr.Variable:
        values = np.asarray(arrays[name])
        values = values.astype(str) if variable.dtype is str else values.astype(variable.dtype)
        return xr.Variable(variable.dims, values, variable.attributes)

    return xr.Dataset(
        {name: labelled(name, variable) for name, variable in variables.items()},
        {name: labelled(name, variable) for name, variable in coordinates.items()},
        dict(attributes),
    )


def write(dataset: xr.Dataset, path: str | Path) -> None:
    """Write ``dataset`` compressed and in chunks, whole or not at all. Raises `FileError`."""
    encoding = {name: _encoding(str(name), variable) for name, variable in dataset.variables.items()}
    with jsonfile.replacing(path) as temporary:
        dataset.to_netcdf(temporary, engine="netcdf4", format="NETCDF4", encoding=encoding)


def _encoding(name: str, variable: xr.Variable) -> dict[str, Any]:
    floating = variable.dtype.kind == "f" and variable.dims != (name,)
    settings: dict[str, Any] = {"_FillValue": np.nan if floating else None}
    if not variable.dims:
        return settings
    chunks = _chunks(variable.shape)
    if variable.dtype.kind == "U":
        # Text of one width compresses; netCDF's own strings do not.
        del settings["_FillValue"]
        chunks = (*chunks, max(1, *(len(text.encode()) for text in variable.values.flat)))
        settings["dtype"] = "S1"
    return settings | {"zlib": True, "complevel": 5, "shuffle": True, "chunksizes": chunks}


def _chunks(shape: tuple[int, ...]) -> tuple[int, ...]:
    """Whole trailing axes; leading ones are cut until a chunk holds at most `_CHUNK` values."""
    chunks = list(shape)
    for axis in range(len(chunks)):
        while np.prod(chunks) > _CHUNK and chunks[axis] > 1:
            chunks[axis] = (chunks[axis] + 1) // 2
    return tuple(chunks)
