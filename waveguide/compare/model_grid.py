"""Model output by CF: times, a variable, and the positions of its cells, regular or curvilinear."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any, Literal

import numpy as np
from numpy.typing import NDArray

from waveguide.compare.netcdf_series import STANDARD_NAMES
from waveguide.errors import InputError
from waveguide.geodesy import unit_vectors, wrap_longitude
from waveguide.ocean.gridded import AXES, unreadable

if TYPE_CHECKING:
    import xarray as xr

Array = NDArray[np.float64]

SAME_PLACE = 1e-7
"""Cells closer than this on the unit sphere (0.6 m) are one, met twice at a fold."""


@dataclass(frozen=True)
class ModelField:
    """One variable of model output, not read yet.

    Attributes
    ----------
    data : xarray.DataArray
        Of dimensions (time, row, column).
    times : ndarray of datetime64[s], shape (nt,)
    lon, lat : ndarray, shape (ny, nx)
        Degrees; NaN where the grid has no position, or repeats one.
    notes : tuple of str
        What had to be decided or left out.
    """

    data: xr.DataArray
    times: NDArray[np.datetime64]
    lon: Array
    lat: Array
    notes: tuple[str, ...]


def open_model(paths: Sequence[Path]) -> xr.Dataset:
    """Open model output lazily: NetCDF files, joined along time, or a Zarr store.

    With dask its chunks are multiples of the stored ones, so that each of these is read once;
    without it a single file is read in pieces of its own chunks.

    Parameters
    ----------
    paths : sequence of Path

    Returns
    -------
    xarray.Dataset

    Raises
    ------
    InputError
        If a file is missing or cannot be read, or many are given without dask.
    """
    import xarray as xr

    missing = [str(path) for path in paths if not path.exists()]
    if missing:
        raise InputError([f"--model {path}: there is no such file or store" for path in missing])
    chunks: Literal["auto"] | None = "auto" if has_dask() else None
    try:
        if len(paths) == 1 and paths[0].is_dir():
            return xr.open_dataset(paths[0], engine="zarr", chunks=chunks)
        if len(paths) == 1:
            return xr.open_dataset(paths[0], engine="netcdf4", chunks=chunks)
        if chunks is None:
            raise InputError(
                f"--model: {len(paths)} files are joined with dask, which is not installed; "
                'install it (pip install "waveguide[large]"), or give one file'
            )
        return xr.open_mfdataset(
            sorted(paths), engine="netcdf4", chunks=chunks, combine="nested",
            concat_dim=_time_dimension(sorted(paths)[0]), coords="minimal", compat="override",
            data_vars="minimal", join="override",
        )
    except InputError:
        raise
    except Exception as error:  # the libraries raise OSError, ValueError, KeyError, ImportError, …
        raise unreadable(", ".join(map(str, paths)), error) from error


def has_dask() -> bool:
    """Whether dask can be imported."""
    from importlib.util import find_spec

    return find_spec("dask") is not None


def _time_dimension(path: Path) -> str:
    import xarray as xr

    with xr.open_dataset(path, engine="netcdf4", decode_times=False) as dataset:
        for variable in dataset.variables.values():
            if _is_time(variable) and variable.ndim == 1:
                return str(variable.dims[0])
    raise InputError(f"data file {path}: no axis of times; give it one with CF units")


def _is_time(variable: xr.Variable) -> bool:
    said = any(  # xarray moves the units of times that it decodes to the encoding
        "since" in str(kept.get("units", "")) for kept in (variable.attrs, variable.encoding)
    )
    return said or variable.attrs.get("standard_name") == "time" or variable.dtype.kind == "M"


def model_field(
    dataset: xr.Dataset, variable: str | None = None, depth: float | None = None
) -> ModelField:
    """Find the variable, its times and the positions of its cells.

    Parameters
    ----------
    dataset : xarray.Dataset
    variable : str, optional
        Sea level, by its standard name, where none is given.
    depth : float, optional
        Depth (m) of a variable with a vertical axis.

    Returns
    -------
    ModelField

    Raises
    ------
    InputError
        If one of these cannot be found or made sense of.
    """
    array = _variable(dataset, variable)
    lon, lat = (_axis(dataset, array, axis) for axis in ("longitude", "latitude"))
    rows, columns = _horizontal(lon, lat)
    time = _time_axis(array, {rows, columns})
    array, notes = _one_level(array, {time, rows, columns}, depth)
    array = array.transpose(time, rows, columns)
    times, told = _times(dataset, time)
    x, y = np.broadcast_arrays(
        np.asarray(lon.values, float) if lon.ndim == 2 else np.asarray(lon.values, float)[None, :],
        np.asarray(lat.values, float) if lat.ndim == 2 else np.asarray(lat.values, float)[:, None],
    )
    if lon.ndim == 2:
        x, y = (np.asarray(a.transpose(rows, columns).values, float) for a in (lon, lat))
    x, y, found = sound_positions(x, y)
    return ModelField(array, times, x, y, (*notes, *told, *found))


def _variable(dataset: xr.Dataset, name: str | None) -> xr.DataArray:
    if name is not None:
        if name in dataset.data_vars:
            return dataset[name]
        raise InputError(
            f"lookout.variable = {name!r}: the model output has no such variable; it has "
            f"{', '.join(map(str, dataset.data_vars))}"
        )
    for standard in STANDARD_NAMES["sea level"]:
        for candidate in dataset.data_vars.values():
            if candidate.attrs.get("standard_name") == standard:
                return candidate
    raise InputError(
        "--model: no variable with a standard name of sea level; write variable = one of "
        f"{', '.join(map(str, dataset.data_vars))} in a [lookout] table"
    )


def _axis(dataset: xr.Dataset, array: xr.DataArray, axis: str) -> xr.DataArray:
    """Longitude or latitude of the cells of a variable."""
    import re

    units, names = AXES[axis]
    found: list[tuple[int, str]] = []
    for name, candidate in dataset.variables.items():
        if not candidate.ndim or not set(candidate.dims) <= set(array.dims):
            continue
        unit = str(candidate.attrs.get("units", "")).strip().lower()
        if candidate.attrs.get("standard_name") == axis:
            found.append((0, str(name)))
        elif re.fullmatch(units, unit):
            found.append((1, str(name)))
        elif re.fullmatch(names, str(name).lower()):
            found.append((2, str(name)))
    if not found:
        raise InputError(
            f"--model: {array.name} has no {axis} among {', '.join(map(str, dataset.variables))}; "
            f"give a coordinate standard_name = '{axis}'"
        )
    best = dataset[min(found)[1]]
    if best.ndim > 2:
        raise InputError(
            f"--model: {best.name} has {best.ndim} dimensions; only grids that stand still are read"
        )
    return best


def _horizontal(lon: xr.DataArray, lat: xr.DataArray) -> tuple[str, str]:
    """Names of the dimensions along which rows and columns are counted."""
    if lon.ndim == 2 and lat.dims == lon.dims:
        return str(lon.dims[0]), str(lon.dims[1])
    if lon.ndim == 1 and lat.ndim == 1 and lon.dims != lat.dims:
        return str(lat.dims[0]), str(lon.dims[0])
    raise InputError(
        f"--model: longitude has dimensions {lon.dims} and latitude {lat.dims}; unstructured grids "
        "are not read: interpolate to a regular or curvilinear one first"
    )


def _time_axis(array: xr.DataArray, horizontal: set[str]) -> str:
    others = [str(dim) for dim in array.dims if dim not in horizontal]
    timely = [
        dim for dim in others
        if any(_is_time(c.variable) for c in array.coords.values() if c.dims == (dim,))
    ]
    if len(timely) != 1:
        raise InputError(
            f"--model: {array.name} of dimensions {array.dims} needs one axis of times with CF "
            "units like 'days since 1970-01-01'"
        )
    return timely[0]


def _one_level(
    array: xr.DataArray, kept: set[str], depth: float | None
) -> tuple[xr.DataArray, list[str]]:
    """The level nearest to a depth, for variables that have levels."""
    notes = []
    for dim in [str(d) for d in array.dims if d not in kept]:
        if array.sizes[dim] == 1:
            array = array.isel({dim: 0})
            continue
        if depth is None or dim not in array.coords:
            raise InputError(
                f"--model: {array.name} has {array.sizes[dim]} values along {dim}; write depth_m "
                "in a [lookout] table to choose a level"
            )
        levels = np.abs(np.asarray(array[dim].values, float))
        level = int(np.argmin(np.abs(levels - depth)))
        notes.append(f"{array.name} at the level of {levels[level]:g} m")
        array = array.isel({dim: level})
    return array, notes


def _times(
    dataset: xr.Dataset, dim: str
) -> tuple[NDArray[np.datetime64], list[str]]:
    """Times as UTC; calendars without leap years are read as the standard one."""
    candidates = [dataset[dim]] if dim in dataset.variables else []
    candidates += [v for v in dataset.coords.values() if v.dims == (dim,)]
    candidates += [v for v in dataset.data_vars.values() if v.dims == (dim,)]
    for candidate in candidates:
        values = candidate.values
        if values.dtype.kind == "M":
            return _rising(np.asarray(values.astype("datetime64[s]"))), []
        if values.dtype.kind == "O" and hasattr(values.flat[0], "isoformat"):
            return _from_calendar(values)
    raise InputError(
        f"--model: the times along {dim} cannot be read; give them CF units like 'days since "
        "1970-01-01'"
    )


def _from_calendar(values: NDArray[Any]) -> tuple[NDArray[np.datetime64], list[str]]:
    calendar = str(values.flat[0].calendar)
    try:
        times = np.array([moment.isoformat()[:19] for moment in values], "datetime64[s]")
    except ValueError:
        raise InputError(
            f"--model: the calendar {calendar!r} has days that no year has; convert the times to "
            "the standard calendar"
        ) from None
    note = [] if calendar in ("standard", "gregorian", "proleptic_gregorian") else [
        f"dates of the calendar {calendar!r} are read as ordinary ones"
    ]
    return _rising(times), note


def _rising(times: NDArray[np.datetime64]) -> NDArray[np.datetime64]:
    steps = np.diff(times.astype(np.int64))
    if np.any(steps <= 0):
        at = int(np.argmax(steps <= 0))
        raise InputError(
            f"--model: times do not rise: {times[at]} is followed by {times[at + 1]}; give files "
            "that neither overlap nor repeat times"
        )
    return times


def sound_positions(lon: Array, lat: Array) -> tuple[Array, Array, list[str]]:
    """Positions with NaN where there is none and where a fold repeats one.

    Parameters
    ----------
    lon, lat : ndarray, shape (ny, nx)

    Returns
    -------
    lon, lat : ndarray, shape (ny, nx)
        Longitude within −180..180.
    notes : list of str

    Raises
    ------
    InputError
        If no position can be used.
    """
    known = np.isfinite(lon) & np.isfinite(lat) & (np.abs(lat) <= 90.0) & (np.abs(lon) <= 540.0)
    blank = _blank(lon, lat)
    usable = known & ~blank
    if not usable.any():
        raise InputError(
            "--model: no cell has a longitude and latitude in degrees; look at the coordinates"
        )
    places = np.rint(unit_vectors(lon[usable], lat[usable]) / SAME_PLACE).astype(np.int64)
    _, first = np.unique(places, axis=0, return_index=True)
    once = np.zeros(int(usable.sum()), bool)
    once[first] = True
    kept = usable.copy()
    kept[usable] = once
    notes = []
    if (lost := int(lon.size - usable.sum())):
        notes.append(f"{lost} of {lon.size} cells have no position and are left out")
    if (twice := int(usable.sum() - kept.sum())):
        notes.append(f"{twice} cells repeat the position of another (a fold) and are left out")
    return (
        np.where(kept, wrap_longitude(np.where(kept, lon, 0.0)), np.nan),
        np.where(kept, lat, np.nan), notes,
    )


def _blank(lon: Array, lat: Array) -> NDArray[np.bool_]:
    """Cells at (0, 0) where many are: processors without ocean that were never written."""
    zero = (lon == 0.0) & (lat == 0.0)
    return zero if zero.sum() > 1 else np.zeros_like(zero)
