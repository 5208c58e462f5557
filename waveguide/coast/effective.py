"""The effective coastline: the closed lines that a family of modes follows.

Two families see two different coasts. The baroclinic one has the scale of the first
deformation radius (200 km near the equator, 10 km in high latitudes) and a wall where the water
gets too shallow to carry the mode. The barotropic one has a scale of thousands of kilometres and
sees only continents. `CoastRule` holds what differs; the construction is the same.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from waveguide.coast.raster import (
    GlobalGrid,
    Mask,
    closed_ocean,
    component_areas,
    label_periodic,
)
from waveguide.coast.trace import boundary_pieces, chain_rings, smoothed_positions
from waveguide.geodesy import unit_vectors

Array = NDArray[np.float64]


@dataclass(frozen=True)
class CoastRule:
    """What a family of modes follows, by latitude.

    Attributes
    ----------
    lat : ndarray, shape (n,)
        Latitudes of the table, degrees, ascending.
    scale : ndarray, shape (n,)
        Gaps narrower than this are crossed (m).
    sill_depth : ndarray, shape (n,)
        Water shallower than this is a wall (m).
    island_size, basin_size : ndarray, shape (n,)
        Land (open water) of an area below the square of this is ignored (m).
    smoothing : ndarray, shape (n,)
        Standard deviation of the smoothing along the line (m).
    spacing : float
        Distance between nodes (m).
    """

    lat: Array
    scale: Array
    sill_depth: Array
    island_size: Array
    basin_size: Array
    smoothing: Array
    spacing: float


@dataclass(frozen=True)
class EffectiveCoast:
    """Closed lines of nodes with the water on their left, and the masks they come from.

    Attributes
    ----------
    rings : tuple of (lon, lat)
        Nodes of each closed line in order, degrees, land on the right.
    grid : GlobalGrid
    passable : ndarray of bool, shape (ny, nx)
        Water deeper than the sill depth.
    water : ndarray of bool, shape (ny, nx)
        What the lines enclose as ocean: gaps closed, small islands drowned, small basins filled.
    basin : ndarray of int, shape (ny, nx)
        Connected body of `water` a cell belongs to (corners connect), 0 on land.
    """

    rings: tuple[tuple[Array, Array], ...]
    grid: GlobalGrid
    passable: Mask
    water: Mask
    basin: NDArray[np.int64]


def _extreme_by_label(
    grid: GlobalGrid, labels: NDArray[np.int64], count: int, by_row: Array
) -> Array:
    """Largest value of a quantity of latitude over each label, shape (count + 1,)."""
    largest = np.zeros(count + 1)
    rows = np.repeat(np.arange(grid.lat.size), grid.lon.size)
    np.maximum.at(largest, labels.ravel(), by_row[rows])
    return largest


def _without_small(
    grid: GlobalGrid, mask: Mask, solid: Mask, size: Array, diagonal: bool
) -> Mask:
    """Drop components of a mask whose solid area is below the square of a size by row."""
    labels, count = label_periodic(mask, diagonal)
    area = component_areas(grid, np.where(solid, labels, 0), count)
    keep = area >= _extreme_by_label(grid, labels, count, size) ** 2
    keep[0] = False
    return np.asarray(keep[labels])


def _with_whole_poles(ocean: Mask) -> Mask:
    """The mask with either pole row, whose cells meet at a point, ocean only if all of it is."""
    whole = ocean.copy()
    whole[[0, -1]] = ocean[[0, -1]].all(axis=1, keepdims=True)
    return whole


def effective_coast(
    grid: GlobalGrid, depth: NDArray[np.floating], land: Mask, rule: CoastRule
) -> EffectiveCoast:
    """Trace the coast that a family of modes follows.

    Islands are judged by the land and shallows they really have, not by the outline that the
    closing gives a scatter of atolls: such a group is passed like a single small island.

    Parameters
    ----------
    grid : GlobalGrid
    depth : ndarray, shape (ny, nx)
        Depth (m), positive down.
    land : ndarray of bool, shape (ny, nx)
        Land and ice fronts of the shoreline data.
    rule : CoastRule

    Returns
    -------
    EffectiveCoast
    """

    def by_row(values: Array) -> Array:
        return np.asarray(np.interp(grid.lat, rule.lat, values))

    deep = ~land & (depth > by_row(rule.sill_depth)[:, None])
    passable = _without_small(grid, deep, deep, by_row(rule.basin_size), diagonal=True)
    reached = closed_ocean(grid, passable, by_row(rule.scale) / 2.0)
    walls = _without_small(grid, ~reached, ~passable, by_row(rule.island_size), diagonal=False)
    open_water = _without_small(grid, ~walls, ~walls, by_row(rule.basin_size), diagonal=True)
    water = _with_whole_poles(open_water)
    basin, _ = label_periodic(water, diagonal=True)
    smoothing = (rule.lat, rule.smoothing)
    rings = tuple(
        smoothed_positions(grid, corners, smoothing, rule.spacing)
        for corners in chain_rings(*boundary_pieces(water), grid.lon.size)
    )
    return EffectiveCoast(rings, grid, passable, water, basin)


def is_water(coast: EffectiveCoast, lon: Array, lat: Array) -> Mask:
    """Whether positions fall in cells of the effective ocean.

    Parameters
    ----------
    coast : EffectiveCoast
    lon, lat : ndarray of one shape, degrees

    Returns
    -------
    ndarray of bool, same shape
    """
    return np.asarray(coast.water[cell_indices(coast.grid, lon, lat)])


def cell_indices(
    grid: GlobalGrid, lon: Array, lat: Array
) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """Row and column of the cells that hold positions.

    Parameters
    ----------
    grid : GlobalGrid
    lon, lat : ndarray of one shape, degrees

    Returns
    -------
    row, column : ndarray of int, same shape
    """
    dx, dy = grid.lon[1] - grid.lon[0], grid.lat[1] - grid.lat[0]
    column = np.rint((np.asarray(lon) - grid.lon[0]) / dx).astype(np.int64) % grid.lon.size
    row = np.clip(np.rint((np.asarray(lat) - grid.lat[0]) / dy), 0, grid.lat.size - 1)
    return row.astype(np.int64), column


def offshore_azimuths(lon: Array, lat: Array) -> Array:
    """Azimuth of the seaward normal at each node of a closed line with water on its left.

    Parameters
    ----------
    lon, lat : ndarray, shape (n,)
        Nodes in order, degrees.

    Returns
    -------
    ndarray, shape (n,)
        Degrees clockwise from north.
    """
    here = unit_vectors(lon, lat)
    along = np.roll(here, -1, axis=0) - np.roll(here, 1, axis=0)
    left = np.cross(here, along)
    east = np.stack([-np.sin(np.radians(lon)), np.cos(np.radians(lon)), np.zeros_like(lon)], 1)
    north = np.cross(here, east)
    azimuth = np.arctan2((left * east).sum(axis=1), (left * north).sum(axis=1))
    return np.asarray(np.degrees(azimuth) % 360.0)
