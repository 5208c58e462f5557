"""Buoyancy frequency on a longitude–latitude grid, and profiles of it at any position."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache, cached_property
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import ArrayLike, NDArray

from waveguide.errors import InputError
from waveguide.geodesy import arc, unit_vectors, wrap_longitude
from waveguide.ocean.packaged import packaged_file

if TYPE_CHECKING:
    from scipy.sparse import csr_array
    from scipy.spatial import KDTree

Array = NDArray[np.float64]

SEARCH_DISTANCE = 500e3
"""Distance (m) within which a deep enough column is taken for a position."""

SHORE_DISTANCE = 200e3
"""Distance (m) within which the sea of the climatology must begin: two of its cells, so that
no sea without data (the Black Sea, the Caspian) takes the water of another."""


@dataclass(frozen=True)
class Profiles:
    """N² profiles at positions.

    Attributes
    ----------
    depth : ndarray, shape (nz,)
        Depth (m) of the values, positive down.
    n2 : ndarray, shape (n, nz)
        N² (1/s²); NaN throughout where no column was found.
    distance : ndarray, shape (n,)
        Distance (m) from the position to the column used, NaN where there is none.
    depth_reached : ndarray, shape (n,)
        Depth (m) of the deepest value from data; below it the last value is held.
    """

    depth: Array
    n2: Array
    distance: Array
    depth_reached: Array


@dataclass(frozen=True)
class Climatology:
    """N² on a grid.

    Attributes
    ----------
    lon, lat : ndarray, shape (nx,) and (ny,)
        Ascending, degrees; lon within −180..180.
    depth : ndarray, shape (nz,)
        Depth (m) of the values, positive down, ascending: halfway between the levels of the
        temperature and salinity.
    n2 : ndarray of float32, shape (nz, ny, nx)
        N² (1/s²), positive; NaN on land and below the deepest data of a column.
    source : str
        Where it is from.
    notes : tuple of str
        What had to be decided while reading, for the report.
    """

    lon: Array
    lat: Array
    depth: Array
    n2: NDArray[np.float32]
    source: str = ""
    notes: tuple[str, ...] = ()

    def __post_init__(self) -> None:
        shape = (self.depth.size, self.lat.size, self.lon.size)
        if self.n2.shape != shape:
            raise InputError(
                f"climatology: n2 has shape {self.n2.shape}, but depth, lat and lon have {shape} "
                "values; give n2 as (depth, lat, lon)"
            )
        for name, axis in (("lon", self.lon), ("lat", self.lat), ("depth", self.depth)):
            if np.any(np.diff(axis) <= 0):
                raise InputError(f"climatology: {name} must ascend; sort it")

    @cached_property
    def levels(self) -> NDArray[np.intp]:
        """Number of known values from the top of each column, shape (ny · nx,)."""
        known = np.isfinite(self.n2.reshape(self.depth.size, -1))
        return np.asarray(np.logical_and.accumulate(known, axis=0).sum(axis=0))

    @cached_property
    def vectors(self) -> Array:
        """Unit vectors of the columns, shape (ny · nx, 3)."""
        lon, lat = np.meshgrid(self.lon, self.lat)
        return unit_vectors(lon.ravel(), lat.ravel())

    @cached_property
    def waterways(self) -> csr_array:
        """Distances (m) between neighbouring columns of the sea (4 neighbours) as a graph."""
        from scipy.sparse import csr_array

        index = np.arange(self.lat.size * self.lon.size).reshape(self.lat.size, -1)
        seam = self.lon[0] + 360.0 - self.lon[-1] <= 1.5 * np.diff(self.lon).max()
        pairs = [(index[:-1], index[1:]), (index[:, :-1], index[:, 1:])]
        pairs += [(index[:, -1], index[:, 0])] if seam else []
        a, b = (np.concatenate([pair[k].ravel() for pair in pairs]) for k in (0, 1))
        sea = (self.levels[a] > 0) & (self.levels[b] > 0)
        a, b = a[sea], b[sea]
        length = arc(np.linalg.norm(self.vectors[a] - self.vectors[b], axis=1))
        near = length <= SEARCH_DISTANCE  # not across a part that is not covered
        ends = np.r_[a[near], b[near]], np.r_[b[near], a[near]]
        return csr_array((np.tile(length[near], 2), ends), shape=(index.size, index.size))

    def nearest_with(self, count: int) -> NDArray[np.intp]:
        """For each column the one nearest by water with at least `count` known values.

        Nearest by water, so that no column is taken from beyond an isthmus.

        Parameters
        ----------
        count : int
            Number of values, 1 ≤ count ≤ nz.

        Returns
        -------
        ndarray of int, shape (ny · nx,)
            Index of a column, or −1 if there is none within `SEARCH_DISTANCE`.
        """
        nearest: dict[int, NDArray[np.intp]] = self._nearest
        if count not in nearest:
            nearest[count] = self._search(count)
        return nearest[count]

    @cached_property
    def _nearest(self) -> dict[int, NDArray[np.intp]]:
        return {}

    @cached_property
    def _sea(self) -> tuple[NDArray[np.intp], KDTree]:
        """Columns with values, and a tree of their unit vectors."""
        from scipy.spatial import KDTree

        wet = np.flatnonzero(self.levels > 0)
        return wet, KDTree(self.vectors[wet])

    def _search(self, count: int) -> NDArray[np.intp]:
        from scipy.sparse.csgraph import dijkstra

        deep = np.flatnonzero(self.levels >= count)
        if deep.size == 0:
            return np.full(self.levels.size, -1)
        _, _, source = dijkstra(
            self.waterways, indices=deep, min_only=True, limit=SEARCH_DISTANCE,
            return_predecessors=True,
        )
        return np.where(source >= 0, source, -1)

    def _columns(self, vectors: Array, count: NDArray[np.intp]) -> NDArray[np.intp]:
        """Index of the column for each position, −1 where there is none."""
        wet, tree = self._sea
        away, nearest = tree.query(vectors)
        start = wet[nearest]
        column = np.full(start.size, -1)
        for number in np.unique(count[count <= self.depth.size]):
            here = (count == number) & (arc(away) <= SHORE_DISTANCE)
            column[here] = self.nearest_with(int(number))[start[here]]
        return column

    def profiles(
        self, lon: ArrayLike, lat: ArrayLike, minimum_depth: ArrayLike = 0.0
    ) -> Profiles:
        """N² at positions, from the nearest column that is deep enough.

        The nearest column of the sea is taken, and from it the nearest by water whose data
        reach `minimum_depth`. Deeper values come, depth by depth, from the column nearest to
        that one by water which has them; where none within `SEARCH_DISTANCE` does, the last
        value is held.

        Parameters
        ----------
        lon, lat : array_like, shape (n,)
            Position, degrees.
        minimum_depth : array_like, scalar or shape (n,)
            Depth (m) that the data of the column must reach.

        Returns
        -------
        Profiles
            With NaN where no sea lies within `SHORE_DISTANCE` or no such column within
            `SEARCH_DISTANCE`.

        Raises
        ------
        InputError
            If a position is not finite.
        """
        x, y, deep = np.broadcast_arrays(
            np.atleast_1d(wrap_longitude(lon)), np.asarray(lat, float), minimum_depth
        )
        if not (np.isfinite(x).all() and np.isfinite(y).all()):
            raise InputError("position: lon and lat must be finite; remove the missing ones")
        at = unit_vectors(x, y)
        count = np.maximum(np.searchsorted(self.depth, deep) + 1, 1)
        column = self._columns(at, count)
        distance = arc(np.linalg.norm(self.vectors[column] - at, axis=-1))
        found = (column >= 0) & (distance <= SEARCH_DISTANCE)
        n2, reached = self._filled(np.where(found, column, 0))
        n2[~found] = np.nan
        return Profiles(
            self.depth, n2, np.where(found, distance, np.nan),
            np.where(found, self.depth[np.maximum(reached - 1, 0)], np.nan),
        )

    def _filled(self, column: NDArray[np.intp]) -> tuple[Array, NDArray[np.intp]]:
        """N² of columns, shape (n, nz), filled downward, and the number of values from data."""
        own = self.n2.reshape(self.depth.size, -1)
        n2 = own[:, column].T.astype(float)
        reached = self.levels[column].copy()
        for k in range(self.depth.size):
            lacking = np.flatnonzero(self.levels[column] <= k)
            if lacking.size == 0:
                continue
            other = self.nearest_with(k + 1)[column[lacking]]
            n2[lacking, k] = np.where(other >= 0, own[k, other], n2[lacking, max(k - 1, 0)])
            reached[lacking[other >= 0]] = k + 1
        return n2, reached


@cache
def packaged_climatology() -> Climatology:
    """The packaged annual-mean climatology at 1° (Levitus 1994; see coastlines/SOURCES.md).

    Returns
    -------
    Climatology
        The same object on every call.
    """
    import netCDF4

    with netCDF4.Dataset(packaged_file("stratification.nc")) as dataset:
        dataset.set_auto_mask(False)
        lon, lat, depth = (np.asarray(dataset[name][:], float) for name in ("lon", "lat", "depth"))
        n2 = np.asarray(dataset["n2"][:], np.float32)
    return Climatology(lon, lat, depth, n2, "World Ocean Atlas 1994, annual, 1° (Levitus)")
