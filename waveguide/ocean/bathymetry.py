"""Water depth on a longitude–latitude grid: the packaged one or the user's own."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from waveguide.errors import InputError
from waveguide.geodesy import wrap_longitude
from waveguide.ocean.gridded import (
    axis_name,
    horizontal_grid,
    metres_per_unit,
    open_grid,
    read_values,
)
from waveguide.ocean.packaged import packaged_file

if TYPE_CHECKING:
    import xarray as xr

Array = NDArray[np.float64]

HIGHEST = 12e3
"""No depth and no height on earth is greater (m)."""

UPWARD_NAMES = {
    "elevation", "topography", "topo", "altitude", "height", "relief", "rose", "btopo", "etopo",
    "bed", "bedrock", "bed_elevation", "hgt",
}
DOWNWARD_NAMES = {"depth", "deptho", "dep", "water_depth", "seafloor_depth", "bottom_depth"}
OTHER_NAMES = {"z", "band1", "bathymetry", "bathy", "bathy_meter", "bathymetrie", "h", "seafloor"}
UPWARD_STANDARD_NAMES = {
    "height_above_mean_sea_level", "height_above_geoid", "surface_altitude", "bedrock_altitude",
    "height_above_reference_ellipsoid", "height", "altitude", "ground_level_altitude",
}
DOWNWARD_STANDARD_NAMES = {
    "sea_floor_depth_below_geoid", "sea_floor_depth_below_mean_sea_level", "sea_floor_depth",
    "sea_floor_depth_below_sea_surface", "sea_floor_depth_below_sea_level", "depth",
    "model_sea_floor_depth_below_geoid", "sea_floor_depth_below_reference_ellipsoid",
}


@dataclass(frozen=True)
class Bathymetry:
    """Water depth on a grid.

    Attributes
    ----------
    lon, lat : ndarray, shape (nx,) and (ny,)
        Ascending, degrees; lon within −180..180.
    depth : ndarray of float32, shape (ny, nx)
        Depth (m), positive down, negative on land, NaN where unknown.
    source : str
        Where it is from.
    notes : tuple of str
        What had to be decided while reading, for the report.
    """

    lon: Array
    lat: Array
    depth: NDArray[np.float32]
    source: str = ""
    notes: tuple[str, ...] = ()

    def __post_init__(self) -> None:
        if self.depth.shape != (self.lat.size, self.lon.size):
            raise InputError(
                f"bathymetry: depth has shape {self.depth.shape}, but lat and lon have "
                f"{self.lat.size} and {self.lon.size} values; give depth as (lat, lon)"
            )
        if np.any(np.diff(self.lon) <= 0) or np.any(np.diff(self.lat) <= 0):
            raise InputError("bathymetry: lon and lat must ascend; sort them")

    @property
    def wraps(self) -> bool:
        """Whether the last column and the first are neighbours (across the date line)."""
        seam = self.lon[0] + 360.0 - self.lon[-1]
        return bool(seam <= 1.5 * max(self.lon[1] - self.lon[0], self.lon[-1] - self.lon[-2]))

    def sample(self, lon: ArrayLike, lat: ArrayLike) -> Array:
        """Depth at positions by bilinear interpolation.

        Parameters
        ----------
        lon, lat : array_like
            Position, degrees; broadcast to a common shape S.

        Returns
        -------
        ndarray, shape S
            Depth (m), positive down; NaN outside the coverage and beside unknown depths.
        """
        x, y = np.broadcast_arrays(wrap_longitude(lon), np.asarray(lat, float))
        i, fx = _cell(self._columns(), np.where(x < self.lon[0], x + 360.0, x))
        j, fy = _cell(self.lat, y)
        east = (i + 1) % self.lon.size
        south = _between(self.depth[j, i], self.depth[j, east], fx)
        north = _between(self.depth[j + 1, i], self.depth[j + 1, east], fx)
        return _between(south, north, fy)

    def covers(self, lon: ArrayLike, lat: ArrayLike) -> NDArray[np.bool_]:
        """Whether the depth is known at positions.

        Parameters
        ----------
        lon, lat : array_like
            Position, degrees; broadcast to a common shape S.

        Returns
        -------
        ndarray of bool, shape S
        """
        return np.isfinite(self.sample(lon, lat))

    def _columns(self) -> Array:
        return np.append(self.lon, self.lon[0] + 360.0) if self.wraps else self.lon


def _cell(axis: Array, at: Array) -> tuple[NDArray[np.intp], Array]:
    """Index of the grid cell and the position in it (0..1), NaN outside the axis."""
    k = np.clip(np.searchsorted(axis, at, side="right") - 1, 0, axis.size - 2)
    fraction = (at - axis[k]) / (axis[k + 1] - axis[k])
    inside = (fraction >= -1e-9) & (fraction <= 1.0 + 1e-9)
    return k, np.where(inside, np.clip(fraction, 0.0, 1.0), np.nan)


def _between(low: NDArray[np.floating], high: NDArray[np.floating], fraction: Array) -> Array:
    """Linear interpolation that ignores an unknown neighbour of weight zero."""
    mixed = np.asarray(low, float) * (1.0 - fraction) + np.asarray(high, float) * fraction
    return np.where(fraction == 0.0, low, np.where(fraction == 1.0, high, mixed))


@cache
def packaged_bathymetry() -> Bathymetry:
    """The packaged global bathymetry at 0.1° (ETOPO1 bedrock; see coastlines/SOURCES.md).

    Land above 200 m is cut off at 200 m. Below ice shelves it is the depth of the sea floor.

    Returns
    -------
    Bathymetry
        The same object on every call.
    """
    import netCDF4

    with netCDF4.Dataset(packaged_file("bathymetry.nc")) as dataset:
        lon, lat = (np.asarray(dataset[name][:], float) for name in ("lon", "lat"))
        elevation = dataset["elevation"]
        elevation.set_auto_maskandscale(False)
        depth = np.subtract(0, elevation[:], dtype=np.float32)
    return Bathymetry(lon, lat, depth, "ETOPO1 bedrock (Amante and Eakins 2009) at 0.1°")


def read_bathymetry(path: str | Path, variable: str | None = None) -> Bathymetry:
    """Read a bathymetry of the user's own from any CF NetCDF file.

    Elevation or depth, metres or kilometres, 0–360 or ±180, north-up or south-up, global or
    regional. Which way is up is taken from the standard name, then the attribute `positive`,
    then (where all values have one sign) the sign, then the name, then the packaged
    bathymetry of the same place; the last three are said in `notes`.

    Parameters
    ----------
    path : str or Path
    variable : str, optional
        Name of the depth or elevation variable; found by itself where the file leaves no doubt.

    Returns
    -------
    Bathymetry

    Raises
    ------
    InputError
        If no depth is found, the grid is curvilinear or not monotonic, the unit is unknown or
        every value is missing.
    DataError
        If the file cannot be read.
    """
    with open_grid(path) as dataset:
        names = axis_name(dataset, "longitude", path), axis_name(dataset, "latitude", path)
        field = depth_variable(dataset, names, variable, path)
        dimensions = [dataset[name].dims[0] for name in names]
        lon, lat = (np.asarray(dataset[name].values, float) for name in names)
        grid = horizontal_grid(lon, lat, path)
        values = read_values(field.squeeze(drop=True).transpose(*dimensions[::-1]), path)
        attributes = dict(field.attrs)
        name = str(field.name)
    with np.errstate(over="ignore"):  # what float32 cannot hold becomes inf, refused below
        values = grid.apply(values).astype(np.float32)
        values *= np.float32(metres_per_unit(attributes, name, path))
    if not np.isfinite(values).any():
        raise InputError(f"data file {path}: every value of {name} is missing; give another file")
    _require_earthly(values, name, path)
    upward, note = points_up(name, attributes, grid.lon, grid.lat, values)
    if upward:
        np.negative(values, out=values)
    return Bathymetry(grid.lon, grid.lat, values, f"{path}, variable {name}", note)


def _require_earthly(values: NDArray[np.floating[Any]], name: str, path: str | Path) -> None:
    """Refuse depths or heights (m) that the earth has not."""
    low, high = float(np.nanmin(values)), float(np.nanmax(values))
    if max(-low, high) > HIGHEST:
        raise InputError(
            f"data file {path}: {name} runs from {low:.6g} to {high:.6g} m, more than from the "
            "deepest trench to the highest mountain; see whether its attribute units is right, "
            "its _FillValue stated and the file whole"
        )


def depth_variable(
    dataset: xr.Dataset, axes: tuple[str, str], variable: str | None, path: str | Path
) -> xr.DataArray:
    """The variable that holds depth or elevation.

    Parameters
    ----------
    dataset : xarray.Dataset
    axes : tuple of str
        Names of the longitude and latitude variables.
    variable : str, optional
        Name the user gave.
    path : str or Path
        For the messages.

    Returns
    -------
    xarray.DataArray
        On longitude and latitude, other dimensions of length 1.

    Raises
    ------
    InputError
        If there is none, or more than one that could be meant.
    """
    needed = {dataset[name].dims[0] for name in axes}
    fields = {
        str(name): array
        for name, array in dataset.data_vars.items()
        if needed <= set(array.dims) and array.size == np.prod([dataset.sizes[d] for d in needed])
    }
    if variable is not None:
        fields = {name: array for name, array in fields.items() if name == variable}
    ranks = {name: _likeness(array) for name, array in fields.items()}
    if variable is None:
        ranks = {name: rank for name, rank in ranks.items() if rank < 3 or len(fields) == 1}
    best = [name for name, rank in ranks.items() if rank == min(ranks.values())]
    if len(best) == 1:
        return fields[best[0]]
    asked = "no depth or elevation" if variable is None else f"no variable {variable!r} (lat, lon)"
    raise InputError(
        f"data file {path}: {asked if not best else 'depth could be ' + ' or '.join(best)}; "
        f"it holds {', '.join(map(str, dataset.variables))}: name the one to use with `variable`"
    )


def _likeness(array: xr.DataArray) -> int:
    """0 depth by its standard name, 1 or 2 by its name, 3 not recognised."""
    if array.attrs.get("standard_name") in UPWARD_STANDARD_NAMES | DOWNWARD_STANDARD_NAMES:
        return 0
    name = str(array.name).lower()
    return 1 if name in UPWARD_NAMES | DOWNWARD_NAMES else 2 if name in OTHER_NAMES else 3


def points_up(
    name: str, attributes: dict[str, object], lon: Array, lat: Array, values: NDArray[np.float32]
) -> tuple[bool, tuple[str, ...]]:
    """Whether values are elevations (positive up), and how that was decided.

    Parameters
    ----------
    name : str
        Name of the variable.
    attributes : dict
        Its attributes.
    lon, lat : ndarray, shape (nx,) and (ny,)
        Degrees, lon within −180..180.
    values : ndarray, shape (ny, nx)
        Metres.

    Returns
    -------
    upward : bool
    notes : tuple of str
        Empty where the file says it itself.
    """
    standard = attributes.get("standard_name")
    lowest, highest = float(np.nanmin(values)), float(np.nanmax(values))
    stated = {"up": True, "down": False}.get(str(attributes.get("positive", "")).lower())
    if stated is None and standard in UPWARD_STANDARD_NAMES | DOWNWARD_STANDARD_NAMES:
        stated = standard in UPWARD_STANDARD_NAMES
    if stated is True or (stated is False and highest > 0.0):
        return stated, ()
    if lowest >= 0.0 or highest <= 0.0:
        kind = "elevation" if highest <= 0.0 else "depth"
        return highest <= 0.0, (f"{name}: taken as {kind}, because every value has that sign",)
    if name.lower() in UPWARD_NAMES | DOWNWARD_NAMES:
        upward = name.lower() in UPWARD_NAMES
        return upward, (f"{name}: taken as {'elevation' if upward else 'depth'} by its name",)
    known = packaged_bathymetry().sample(*np.meshgrid(lon[::5], lat[::5]))
    upward = bool(np.nansum(known * values[::5, ::5]) < 0.0)
    kind = "elevation" if upward else "depth"
    return upward, (f"{name}: taken as {kind}, because that agrees with the packaged depths",)
