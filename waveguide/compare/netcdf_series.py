"""Records in CF NetCDF files of discrete samples (featureType timeSeries)."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from waveguide.compare.text_files import Table
from waveguide.errors import InputError
from waveguide.ocean.gridded import unreadable

if TYPE_CHECKING:
    import xarray as xr

STANDARD_NAMES = {
    "sea level": (
        "sea_surface_height_above_geoid", "sea_surface_height_above_reference_ellipsoid",
        "sea_surface_height_above_mean_sea_level", "sea_surface_height", "sea_level",
        "water_surface_height_above_reference_datum", "sea_surface_height_above_geopotential_datum",
        "tidal_sea_surface_height_above_reference_datum",
    ),
    "dynamic height": ("ocean_dynamic_topography", "sea_surface_height_above_geoid"),
    "temperature": ("sea_water_temperature", "sea_water_potential_temperature",
                    "sea_water_conservative_temperature"),
    "isopycnal depth": ("depth_of_isosurface_of_sea_water_potential_temperature",),
    "alongshore velocity": ("eastward_sea_water_velocity", "northward_sea_water_velocity"),
    "bottom pressure": ("sea_water_pressure_at_sea_floor", "sea_water_pressure"),
}
"""CF standard names by quantity, the likeliest first."""


def read_netcdf(
    path: Path, name: str, column: str | None, quantity: str, pressure_column: str | None
) -> Table:
    """Read one record of a CF NetCDF file.

    Parameters
    ----------
    path : Path
    name : str
        Of the record; that of the station in a file of many, where `column` does not name it.
    column : str or None
        A variable, or a station.
    quantity : str
    pressure_column : str or None
        Variable of air pressure (hPa).

    Returns
    -------
    Table
        Times without a zone are UTC, as CF has it.

    Raises
    ------
    InputError
        If the file has no such record.
    """
    import xarray as xr

    try:
        dataset = xr.open_dataset(path, engine="netcdf4")
    except Exception as error:  # the libraries raise OSError, ValueError, OverflowError, …
        raise unreadable(path, error) from error
    with dataset:
        variable = _variable(dataset, path, name, column, quantity)
        time = _time(variable, path, name)
        station = column if column not in dataset.variables else None
        values = _one_station(dataset, variable, time, station or name, path)
        pressure = None
        if pressure_column is not None:
            if pressure_column not in dataset.variables:
                raise InputError(f"{name!r}: {path.name} has no variable {pressure_column!r}")
            pressure = _one_station(
                dataset, dataset[pressure_column], time, station or name, path
            )
        moments = np.asarray(dataset[time].values)
        if moments.dtype.kind != "M":
            raise InputError(
                f"{name!r}: the times of {path.name} are in a calendar that no record has; "
                "write them in the standard calendar"
            )
        units = variable.attrs.get("units")
        return Table(
            moments.astype("datetime64[s]"), values, pressure, None if units is None else str(units)
        )


def _variable(
    dataset: xr.Dataset, path: Path, name: str, column: str | None, quantity: str
) -> xr.DataArray:
    if column in dataset.data_vars:
        return dataset[column]
    for standard in STANDARD_NAMES[quantity]:
        for candidate in dataset.data_vars.values():
            if candidate.attrs.get("standard_name") == standard:
                return candidate
    raise InputError(
        f"{name!r}: {path.name} has no variable with a standard name of {quantity}; write column = "
        f"one of {', '.join(map(str, dataset.data_vars))}"
    )


def _time(variable: xr.DataArray, path: Path, name: str) -> str:
    for dim in variable.dims:
        if dim in variable.coords and variable.coords[dim].dtype.kind in "MO":
            return str(dim)
    raise InputError(
        f"{name!r}: {variable.name} of {path.name} has no axis of times; give it a coordinate with "
        "units like 'days since 1970-01-01'"
    )


def _one_station(
    dataset: xr.Dataset, variable: xr.DataArray, time: str, station: str, path: Path
) -> np.ndarray[tuple[int], np.dtype[np.float64]]:
    """Values along time, of one station where the file has many."""
    others = [dim for dim in variable.dims if dim != time and variable.sizes[dim] > 1]
    flat = variable.isel({dim: 0 for dim in variable.dims if dim != time and dim not in others})
    if others:
        names = _station_names(dataset, str(others[0]))
        if len(others) > 1 or station not in names:
            raise InputError(
                f"{station!r}: {path.name} holds {', '.join(names) or 'stations without names'}; "
                "write column = one of these"
            )
        flat = flat.isel({others[0]: names.index(station)})
    return np.asarray(flat.values, float)


def _station_names(dataset: xr.Dataset, dim: str) -> list[str]:
    """Texts along the axis of stations."""
    for variable in dataset.variables.values():
        if variable.dims == (dim,) and variable.dtype.kind in "SUO":
            return [
                value.decode() if isinstance(value, bytes) else str(value)
                for value in variable.values
            ]
    return []
