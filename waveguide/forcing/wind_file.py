"""Winds on a regular grid, from NetCDF files or Zarr stores, read a piece at a time."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray
from scipy.sparse import csr_array
from scipy.spatial import cKDTree

from waveguide.errors import InputError
from waveguide.forcing.drag import wind_stress
from waveguide.forcing.quantity import Components, Quantity, find_components
from waveguide.forcing.samples import Samples
from waveguide.forcing.time_axis import Times, check_order, decode_times
from waveguide.geodesy import chord, unit_vectors
from waveguide.ocean.bathymetry import Bathymetry
from waveguide.ocean.gridded import HorizontalGrid, axis_name, horizontal_grid, open_grid

if TYPE_CHECKING:
    import xarray as xr

Array = NDArray[np.float64]
Index = NDArray[np.int64]

CHUNK_VALUES = 4_000_000
"""Values of one component that are in memory at a time (32 MB)."""

FARTHEST_CELLS = 2.5
"""A coast takes the wind of a sea cell at most this many grid intervals away."""

LEAST_SEA = 0.25
"""Share of sea among the four cells about a place that is enough to interpolate there."""

STRONGEST_STRESS = 5.0
WEAKEST_WIND = 1.0
"""Plausible bounds: stress above 5 Pa (Pa) would be a wind of 40 m/s, and a 99th percentile of
wind below 1 m/s is none."""


@dataclass(frozen=True)
class WindFile:
    """A record of wind or stress on one grid.

    Attributes
    ----------
    parts : list of (xarray.Dataset, path)
        Opened files, in the order of time.
    components : Components
    grid : HorizontalGrid
    sea : ndarray of bool, shape (ny, nx)
        Cells whose wind is that of the sea, on `grid`.
    time : ndarray of datetime64[ns], shape (nt,)
    law : str
        Drag law for wind.
    unresolved : float
        Standard deviation of the wind within the averaging time (m/s).
    """

    parts: list[tuple[xr.Dataset, Path]]
    components: Components
    grid: HorizontalGrid
    sea: NDArray[np.bool_]
    time: Times
    law: str
    unresolved: float

    @property
    def interval(self) -> float:
        """Wider of the two grid intervals (degrees)."""
        return float(max(np.median(np.diff(self.grid.lon)), np.median(np.diff(self.grid.lat))))


def open_wind(
    paths: Sequence[Path], depths: Bathymetry, law: str, unresolved: float = 0.0,
    quantity: Quantity | None = None, names: tuple[str | None, str | None] = (None, None),
    units: str | None = None,
) -> WindFile:
    """Open and check a record of wind or stress.

    Parameters
    ----------
    paths : sequence of Path
        NetCDF files or Zarr stores of one grid, in the order of time.
    depths : Bathymetry
        Tells land from sea.
    law : str
        One of `waveguide.forcing.drag.LAWS`.
    unresolved : float
        Standard deviation of each component of the wind within the averaging time (m/s).
    quantity, names, units
        As for `find_components`.

    Returns
    -------
    WindFile

    Raises
    ------
    InputError, DataError
        If the record cannot be used.
    """
    parts = [(_open(path), path) for path in paths]
    first, path = parts[0]
    components = find_components(first, path, quantity, names, units)
    lon, lat = (axis_name(first, axis, path) for axis in ("longitude", "latitude"))
    grid = horizontal_grid(
        np.asarray(first[lon].values, float), np.asarray(first[lat].values, float), path
    )
    parts = [(_laid_out(part, components, lon, lat, where), where) for part, where in parts]
    for part, where in parts[1:]:
        _require_same_grid(parts[0][0], part, lon, lat, where)
    time = np.concatenate([_times(part, components, where) for part, where in parts])
    sea = _sea_cells(parts, components, grid, depths)
    check_order(time, path)
    return WindFile(parts, components, grid, sea, time, law, unresolved)


def _open(path: Path) -> xr.Dataset:
    """A NetCDF file, or a Zarr store, lazily."""
    if not path.is_dir():
        return open_grid(path)
    import xarray as xr

    try:
        return xr.open_dataset(path, engine="zarr", decode_times=False, chunks=None)
    except Exception as error:  # the library is missing, or the store is none
        raise InputError(
            f"data file {path}: the folder cannot be read as a Zarr store ({error}); install the "
            "library zarr (pip install zarr), or give a NetCDF file"
        ) from None


def _time_name(dataset: xr.Dataset, components: Components, path: Path) -> str:
    """Name of the time dimension."""
    for name in dataset[components.names[0]].dims:
        if name in dataset.variables and " since " in str(dataset[name].attrs.get("units", "")):
            return str(name)
    raise InputError(
        f"data file {path}: {components.names[0]} has no dimension of time with units such as "
        "'days since 1990-01-01 00:00:00'; add them (ncatted), or give a file that has them"
    )


def _laid_out(
    dataset: xr.Dataset, components: Components, lon: str, lat: str, path: Path
) -> xr.Dataset:
    """The two components with dimensions (time, lat, lon)."""
    absent = [name for name in components.names if name not in dataset.data_vars]
    if absent:
        raise InputError(f"data file {path}: {absent[0]} of the first file is not in this one")
    time = _time_name(dataset, components, path)
    pair = dataset[list(components.names)]
    others = [name for name in pair.dims if name not in (time, lat, lon)]
    deep = [name for name in others if pair.sizes[name] > 1]
    if deep:
        raise InputError(
            f"data file {path}: {components.names[0]} also has the dimension {deep[0]!r} of "
            f"{pair.sizes[deep[0]]} values; cut out one level or member first (ncks -d {deep[0]},0)"
        )
    return pair.isel(dict.fromkeys(others, 0)).transpose(time, lat, lon)


def _times(dataset: xr.Dataset, components: Components, path: Path) -> Times:
    axis = dataset[dataset[components.names[0]].dims[0]]
    return decode_times(np.asarray(axis.values, float), axis.attrs, path)


def _require_same_grid(
    first: xr.Dataset, other: xr.Dataset, lon: str, lat: str, path: Path
) -> None:
    for name in (lon, lat):
        if name not in other.variables or not np.array_equal(first[name], other[name]):
            raise InputError(
                f"data file {path}: its {name} is not that of the first file; interpolate all "
                "files to one grid first (cdo remapbil)"
            )


def _sea_cells(
    parts: list[tuple[xr.Dataset, Path]], components: Components, grid: HorizontalGrid,
    depths: Bathymetry,
) -> NDArray[np.bool_]:
    """Cells of sea: by depth, and with a value other than zero in at least one of three records."""
    dataset, path = parts[0]
    count = dataset[components.names[0]].shape[0]
    alive = np.zeros((grid.lat.size, grid.lon.size), dtype=bool)
    strongest = []
    wet = depths.sample(*np.meshgrid(grid.lon, grid.lat)) > 0.0
    for record in sorted({0, count // 2, count - 1}):
        u, v = (
            grid.apply(np.asarray(dataset[name][record].values, float)) * components.scale
            for name in components.names
        )
        known = np.isfinite(u) & np.isfinite(v)
        alive |= known & ((u != 0.0) | (v != 0.0))
        strongest.append(np.hypot(u, v)[known & wet])
    _require_plausible(np.concatenate(strongest), components, path)
    return alive & wet


def _require_plausible(strength: Array, components: Components, path: Path) -> None:
    """Refuse a stress that is a wind and a wind that is a stress."""
    names = " and ".join(components.names)
    if not strength.size:
        raise InputError(f"data file {path}: {names} hold no value over sea; is the grid right?")
    high = float(np.percentile(strength, 99.0))
    if components.quantity == "stress" and high > STRONGEST_STRESS:
        raise InputError(
            f"data file {path}: {names} exceed {high:.3g} Pa at one sea cell in a hundred, which "
            "no wind stress does; are they winds, or in another unit? Correct the attribute units, "
            "or give units in [wind]"
        )
    if components.quantity == "wind" and high < WEAKEST_WIND:
        raise InputError(
            f"data file {path}: {names} are below {high:.3g} m/s at 99 sea cells in a hundred; are "
            "they stresses? Correct the attribute units, or give units in [wind]"
        )


def sampling_matrix(wind: WindFile, samples: Samples) -> tuple[csr_array, Array]:
    """Weights of grid cells at samples, and how much of each sample the grid covers.

    Bilinear between cells of sea. Where land leaves too little of them, a coast takes the
    nearest sea cell, and the equator nothing: there is no ocean there.

    Parameters
    ----------
    wind : WindFile
    samples : Samples
        p of them.

    Returns
    -------
    matrix : sparse array, shape (p, ny·nx)
    covered : ndarray, shape (p,)
        1 or 0.
    """
    cell, weight, inside = _bilinear(wind.grid, samples.lon, samples.lat)
    weight = weight * wind.sea.ravel()[cell]
    total = weight.sum(axis=1)
    enough = inside & (total >= LEAST_SEA)
    weight = np.where(enough[:, None], weight / np.where(enough, total, 1.0)[:, None], 0.0)
    covered = inside & (enough | samples.zonal)
    alone = np.nonzero(~enough & ~samples.zonal)[0]
    nearest, near = _nearest_sea(wind, samples.lon[alone], samples.lat[alone])
    cell[alone, 0], weight[alone, 0] = nearest, near.astype(float)
    covered[alone] = near
    row = np.repeat(np.arange(samples.lon.size), 4)
    matrix = csr_array(
        (weight.ravel(), (row, cell.ravel())), shape=(samples.lon.size, wind.sea.size)
    )
    matrix.eliminate_zeros()
    return matrix, covered.astype(float)


def _bilinear(
    grid: HorizontalGrid, lon: Array, lat: Array
) -> tuple[Index, Array, NDArray[np.bool_]]:
    """The four cells about places, their weights, and whether they lie within the grid."""
    # A grid that goes round the earth continues beyond its first and last meridian.
    step = float(np.median(np.diff(grid.lon)))
    ring = grid.lon[0] + 360.0 - grid.lon[-1] <= 1.5 * step
    x = np.concatenate([[grid.lon[-1] - 360.0], grid.lon, [grid.lon[0] + 360.0]])
    column = np.concatenate([[grid.lon.size - 1], np.arange(grid.lon.size), [0]])
    i = np.clip(np.searchsorted(x, lon, "right") - 1, 0, x.size - 2)
    j = np.clip(np.searchsorted(grid.lat, lat, "right") - 1, 0, grid.lat.size - 2)
    u = (lon - x[i]) / (x[i + 1] - x[i])
    v = (lat - grid.lat[j]) / (grid.lat[j + 1] - grid.lat[j])
    margin = 0.5  # of an interval beyond the outermost cells, whose value then holds
    inside = (v >= -margin) & (v <= 1.0 + margin)
    if not ring:
        outer = (i == 0) | (i == x.size - 2)
        close = np.minimum(np.abs(lon - grid.lon[0]), np.abs(lon - grid.lon[-1])) <= margin * step
        u = np.where(outer, np.where(i == 0, 1.0, 0.0), u)
        inside &= ~outer | close
    v = np.clip(v, 0.0, 1.0)
    rows, columns = np.stack([j, j, j + 1, j + 1], 1), column[np.stack([i, i + 1, i, i + 1], 1)]
    weight = np.stack([(1 - u) * (1 - v), u * (1 - v), (1 - u) * v, u * v], 1)
    return rows * grid.lon.size + columns, weight, inside


def _nearest_sea(
    wind: WindFile, lon: Array, lat: Array
) -> tuple[Index, NDArray[np.bool_]]:
    """Nearest cell of sea, and whether it is near enough."""
    cells = np.nonzero(wind.sea.ravel())[0]
    row, column = np.unravel_index(cells, wind.sea.shape)
    tree = cKDTree(unit_vectors(wind.grid.lon[column], wind.grid.lat[row]))
    reach = chord(FARTHEST_CELLS * wind.interval * 111.2e3)
    distance, found = tree.query(unit_vectors(lon, lat))
    return cells[np.minimum(found, cells.size - 1)], np.asarray(distance <= reach)


def stress_chunks(
    wind: WindFile, cells: Index, first: int, last: int
) -> Iterator[tuple[slice, Array, Array]]:
    """Stress at cells, some records at a time.

    Parameters
    ----------
    wind : WindFile
    cells : ndarray of int, shape (k,)
        Rising, into the flattened grid.
    first, last : int
        Records from `first` up to, but without, `last`.

    Yields
    ------
    where : slice
        Records, counted from `first`.
    eastward, northward : ndarray, shape (records, k)
        Stress (Pa), NaN where missing.
    """
    row, column = np.unravel_index(cells, wind.sea.shape)
    file_row, file_column = wind.grid.rows[row], wind.grid.columns[column]
    window = tuple(slice(int(index.min()), int(index.max()) + 1)
                   for index in (file_row, file_column))
    at = file_row - window[0].start, file_column - window[1].start
    area = (window[0].stop - window[0].start) * (window[1].stop - window[1].start)
    size = max(1, CHUNK_VALUES // area)
    start = 0
    for dataset, _ in wind.parts:
        count = dataset[wind.components.names[0]].shape[0]
        lo, hi = max(first - start, 0), min(last - start, count)
        for begin in range(lo, hi, size):
            end = min(begin + size, hi)
            pair = [
                np.asarray(dataset[name][begin:end, window[0], window[1]].values)[:, at[0], at[1]]
                for name in wind.components.names
            ]
            where = slice(start + begin - first, start + end - first)
            yield where, *_as_stress(wind, pair[0], pair[1])
        start += count


def _as_stress(
    wind: WindFile, eastward: NDArray[np.floating], northward: NDArray[np.floating]
) -> tuple[Array, Array]:
    """Stress (Pa) of values as stored in the file."""
    u, v = (np.asarray(part, float) * wind.components.scale for part in (eastward, northward))
    if wind.components.quantity == "stress":
        return u, v
    return wind_stress(u, v, wind.law, wind.unresolved)
