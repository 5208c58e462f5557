"""Reading regular longitude–latitude grids from anybody's CF NetCDF files.

Axes are recognised by standard name, units or usual names; whatever is not as this package
needs it (0–360, north-up, a repeated last meridian, the date line inside a region) is put
right, and whatever cannot be read is refused with what to do.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from waveguide.errors import DataError, InputError
from waveguide.geodesy import wrap_longitude

if TYPE_CHECKING:
    import xarray as xr

Array = NDArray[np.float64]

LARGEST_GRID = 150_000_000
"""Values beyond which a file is refused rather than filling the memory (0.6 GB)."""

AXES = {
    "longitude": (r"degrees?_?e(ast)?", r"(nav_?)?lon(gitude)?s?(_?\w{1,3})?|x"),
    "latitude": (r"degrees?_?n(orth)?", r"(nav_?)?lat(itude)?s?(_?\w{1,3})?|y"),
}
"""For each axis the units and the usual names, as regular expressions."""

LENGTHS = {
    "": 1.0, "m": 1.0, "meter": 1.0, "meters": 1.0, "metre": 1.0, "metres": 1.0,
    "km": 1e3, "kilometer": 1e3, "kilometers": 1e3, "kilometre": 1e3, "kilometres": 1e3,
    "cm": 1e-2, "centimeter": 1e-2, "centimeters": 1e-2, "centimetre": 1e-2, "centimetres": 1e-2,
}
"""Units of length (m); none at all means metres."""


@dataclass(frozen=True)
class HorizontalGrid:
    """How to bring a file's grid to ascending longitude (−180..180) and latitude.

    Attributes
    ----------
    lon, lat : ndarray, shape (nx,) and (ny,)
        Axes after the change, degrees.
    columns, rows : ndarray of int
        Index into the file's longitudes and latitudes; −1 marks a column that is unknown.
    """

    lon: Array
    lat: Array
    columns: NDArray[np.intp]
    rows: NDArray[np.intp]

    def apply(self, values: NDArray[np.floating]) -> NDArray[np.floating]:
        """Values (…, lat, lon) of the file on this grid, NaN in unknown columns."""
        result = values[..., self.rows[:, None], self.columns[None, :]]
        result[..., self.columns < 0] = np.nan
        return result


def open_grid(path: str | Path) -> xr.Dataset:
    """Open a NetCDF file with fill values as NaN and packing undone.

    Parameters
    ----------
    path : str or Path

    Returns
    -------
    xarray.Dataset
        Lazy; close it when done.

    Raises
    ------
    InputError
        If there is no such file.
    DataError
        If it is no NetCDF file, or truncated.
    """
    import xarray as xr

    if not Path(path).is_file():
        raise InputError(f"data file {path}: no such file; give the path of a NetCDF file")
    try:
        dataset = xr.open_dataset(path, engine="netcdf4", decode_times=False)
    except Exception as error:  # the libraries raise OSError, RuntimeError, ValueError, …
        raise unreadable(path, error) from error
    return classic_gmt(dataset) if "xysize" in dataset.sizes else dataset


def unreadable(path: str | Path, error: Exception) -> DataError:
    """The error for a file that the NetCDF library cannot read."""
    return DataError(
        f"data file {path}: cannot be read as NetCDF ({error}); it is truncated or of another "
        "kind: get it again, or convert it to NetCDF"
    )


def classic_gmt(dataset: xr.Dataset) -> xr.Dataset:
    """A grid of GMT before version 4 (one row of values, north to south) as an ordinary one."""
    import xarray as xr

    nx, ny = (int(n) for n in dataset["dimension"].values)
    axes = []
    for name, n in (("x_range", nx), ("y_range", ny)):
        low, high = (float(v) for v in dataset[name].values)
        half = 0.5 * (high - low) / n if int(dataset["z"].attrs.get("node_offset", 0)) else 0.0
        axes.append(np.linspace(low + half, high - half, n))
    values = dataset["z"].values.reshape(ny, nx)[::-1]
    return xr.Dataset({"z": (("lat", "lon"), values)}, {"lon": axes[0], "lat": axes[1]})


def read_values(variable: xr.DataArray, path: str | Path) -> NDArray[np.floating]:
    """All values of a variable as float32 or float64, NaN where missing."""
    if variable.size > LARGEST_GRID:
        raise InputError(
            f"data file {path}: {variable.name} has {variable.size:.2g} values, more than the "
            f"{LARGEST_GRID:.2g} that fit; cut out the region (cdo sellonlatbox) or thin it "
            "(ncks -d) first"
        )
    try:
        values = variable.values
    except Exception as error:
        raise unreadable(path, error) from error
    return values if values.dtype.kind == "f" else values.astype(np.float32)


def axis_name(dataset: xr.Dataset, axis: str, path: str | Path) -> str:
    """Name of the longitude or latitude variable.

    Parameters
    ----------
    dataset : xarray.Dataset
    axis : {"longitude", "latitude"}
    path : str or Path
        For the message.

    Returns
    -------
    str

    Raises
    ------
    InputError
        If there is none, or it has two dimensions.
    """
    units, names = AXES[axis]
    found: list[tuple[int, str]] = []
    for name, variable in dataset.variables.items():
        unit = str(variable.attrs.get("units", "")).strip().lower()
        if variable.attrs.get("standard_name") == axis:
            found.append((0, str(name)))
        elif re.fullmatch(units, unit):
            found.append((1, str(name)))
        elif re.fullmatch(names, str(name).lower()) and unit in ("", "degree", "degrees", "deg"):
            found.append((2, str(name)))
    if not found:
        raise InputError(
            f"data file {path}: no {axis} axis among {', '.join(map(str, dataset.variables))}; "
            f"give a coordinate standard_name = '{axis}'"
        )
    flat = [entry for entry in found if dataset[entry[1]].ndim == 1]
    if not flat:
        raise InputError(
            f"data file {path}: {found[0][1]} has {dataset[found[0][1]].ndim} dimensions "
            "(curvilinear grid); interpolate to a regular longitude–latitude grid first "
            "(cdo remapbil)"
        )
    return min(flat)[1]


def horizontal_grid(lon: Array, lat: Array, path: str | Path) -> HorizontalGrid:
    """The change that brings a file's axes to ascending −180..180 and south to north.

    Where the file is regional and straddles the date line, two unknown columns are put
    beside the part that is not covered, so that nothing is interpolated across it.

    Parameters
    ----------
    lon, lat : ndarray, shape (nx,) and (ny,)
        Axes of the file, degrees.
    path : str or Path
        For the messages.

    Returns
    -------
    HorizontalGrid

    Raises
    ------
    InputError
        If an axis is too short, not finite, not monotonic or out of range.
    """
    lon = np.unwrap(lon, period=360.0)  # 359, 0 or 180, −179 side by side in the file
    for name, axis in (("longitude", lon), ("latitude", lat)):
        check_axis(name, axis, path)
    if np.abs(lat).max() > 90.0 + 1e-6 or lon.min() < -360.0 - 1e-6 or lon.max() > 540.0 + 1e-6:
        raise InputError(
            f"data file {path}: longitude {lon.min():g}..{lon.max():g}, latitude "
            f"{lat.min():g}..{lat.max():g} are not degrees on the earth; reproject to degrees"
        )
    rows = np.argsort(lat)
    columns = np.argsort(lon)
    start, end = lon[columns[0]], lon[columns[-1]]
    columns = columns[lon[columns] < start + 360.0 - 1e-6]  # a repeated last meridian
    gap = start + 360.0 - lon[columns[-1]]
    step = np.diff(lon[columns]).max()
    turned = wrap_longitude(np.round(lon[columns], 9))
    order = np.argsort(turned, kind="stable")
    east, columns = turned[order], columns[order]
    if gap > 1.5 * step and order[0] != 0:  # regional, across the date line
        split = int(np.argmin(order))  # where the file's first column has come to lie
        edge = 0.25 * step
        last, first = float(wrap_longitude(end)), float(wrap_longitude(start))
        east = np.insert(east, split, [last + edge, first - edge])
        columns = np.insert(columns, split, [-1, -1])
    return HorizontalGrid(east, lat[rows].astype(float), columns, rows)


def check_axis(name: str, axis: Array, path: str | Path) -> None:
    """Refuse an axis that is too short, not finite or not monotonic."""
    steps = np.diff(axis)
    if axis.size < 2 or not np.isfinite(axis).all():
        raise InputError(
            f"data file {path}: {name} must have at least 2 finite values; cut the region larger "
            "or repair the file"
        )
    if not (np.all(steps > 0) or np.all(steps < 0)):
        k = int(np.argmax(np.sign(steps) != np.sign(steps[0])))
        raise InputError(
            f"data file {path}: {name} is not monotonic ({axis[k]:g} is followed by "
            f"{axis[k + 1]:g}); sort the file along it"
        )


def metres_per_unit(attributes: dict[str, object], name: str, path: str | Path) -> float:
    """Metres in the unit of a variable, which is the first word of its attribute `units`."""
    text = str(attributes.get("units", "")).strip()
    word = text.lower().split()[0] if text else ""
    if word not in LENGTHS:
        raise InputError(
            f"data file {path}: {name} is in {text!r}, which is no length known here; convert "
            "it to m or km"
        )
    return LENGTHS[word]
