"""The packaged shoreline: rings of land and ice front, and a raster of land from them.

Shoreline from GSHHG (Wessel and Smith 1996, J. Geophys. Res. 101, 8741), see
coastlines/SOURCES.md. Rings that cross the date line, and Antarctica, come in two halves
that are cut along the meridians of 180° and 0°; Antarctica's reach down to −90°.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from waveguide.errors import InputError
from waveguide.geodesy import wrap_longitude
from waveguide.ocean.packaged import packaged_file

Array = NDArray[np.float64]
Resolution = Literal["crude", "low", "intermediate"]
RESOLUTIONS: tuple[Resolution, ...] = ("crude", "low", "intermediate")

LAND, LAKE, ICE_FRONT = 1, 2, 5


@dataclass(frozen=True)
class Ring:
    """One closed ring of the shoreline.

    Attributes
    ----------
    lon, lat : ndarray, shape (n,)
        Vertices, degrees, anticlockwise, the first one repeated at the end.
    level : int
        1 land, 2 lake, 5 Antarctic ice front.
    area : float
        Area (km²) of the whole island, continent or lake, also where this is half of it.
    """

    lon: Array
    lat: Array
    level: int
    area: float


@cache
def shoreline(resolution: Resolution = "intermediate") -> list[Ring]:
    """Rings of the packaged shoreline, larger ones first within each level.

    Parameters
    ----------
    resolution : {"crude", "low", "intermediate"}
        Vertices within 25, 5 or 1 km of the full shoreline. The intermediate one leaves out
        islands below 1 km². Lakes are those above 1000 km², for base maps.

    Returns
    -------
    list of Ring

    Raises
    ------
    InputError
        If there is no such resolution.
    """
    lon, lat, count, level, area = _stored(resolution)
    ends = np.cumsum(count)
    return [
        Ring(lon[end - n : end], lat[end - n : end], int(kind), float(size))
        for n, end, kind, size in zip(count, ends, level, area, strict=True)
    ]


@cache
def _stored(resolution: Resolution) -> tuple[Array, Array, NDArray[np.int_], Array, Array]:
    """Vertices one ring after another, and number of vertices, level and area of the rings."""
    if resolution not in RESOLUTIONS:
        raise InputError(
            f"resolution {resolution!r}: not one of the packaged shorelines; "
            f"use {', '.join(RESOLUTIONS)}"
        )
    import netCDF4

    with netCDF4.Dataset(packaged_file("shoreline.nc")) as dataset:
        dataset.set_auto_mask(False)
        group = dataset[resolution]
        lon, lat, area = (np.asarray(group[name][:], float) for name in ("lon", "lat", "area"))
        count, level = (np.asarray(group[name][:], int) for name in ("vertex_count", "level"))
    return lon, lat, count, level, area


def land_mask(
    lon: ArrayLike, lat: ArrayLike, resolution: Resolution = "intermediate"
) -> NDArray[np.bool_]:
    """Which points of a grid are on land or on the ice of Antarctica.

    Lakes and enclosed seas that GSHHG counts as lakes (the Caspian, the Great Lakes) are
    land here: they are no part of the ocean.

    Parameters
    ----------
    lon, lat : array_like, shape (nx,) and (ny,)
        Axes of the grid, degrees; any order, any turn of longitude.
    resolution : {"crude", "low", "intermediate"}
        Shoreline to use.

    Returns
    -------
    ndarray of bool, shape (ny, nx)
    """
    x, y, count, level, _ = _stored(resolution)
    edge = np.ones(x.size, bool)
    edge[np.cumsum(count) - 1] = False  # from the last vertex of a ring nothing leads on
    edge &= np.repeat(level != LAKE, count)
    start = np.flatnonzero(edge)
    east, south = wrap_longitude(lon), np.asarray(lat, float)
    columns, rows = np.argsort(east), np.argsort(south)
    inside = winding_numbers(
        x[start], y[start], x[start + 1], y[start + 1], east[columns], south[rows]
    ) != 0
    mask = np.empty(inside.shape, bool)
    mask[np.ix_(rows, columns)] = inside
    return mask


def winding_numbers(
    x0: Array, y0: Array, x1: Array, y1: Array, lon: Array, lat: Array
) -> NDArray[np.int16]:
    """How often rings turn round the points of a grid, by a scanline.

    Each edge crosses the rows with min(y0, y1) ≤ lat < max(y0, y1); a crossing adds −1 (edge
    northward) or +1 (southward) to all points east of it. Overlapping rings add up, so that
    a number that is not zero means inside at least one of them.

    Parameters
    ----------
    x0, y0, x1, y1 : ndarray, shape (n,)
        Ends of the directed edges of closed rings, degrees, in a plane.
    lon, lat : ndarray, shape (nx,) and (ny,)
        Axes of the grid, ascending.

    Returns
    -------
    ndarray of int16, shape (ny, nx)
        Positive inside anticlockwise rings.

    References
    ----------
    Haines (1994), Point in polygon strategies, Graphics Gems IV, Academic Press.
    """
    first = np.searchsorted(lat, np.minimum(y0, y1), side="left")
    number = np.searchsorted(lat, np.maximum(y0, y1), side="left") - first
    edge = np.repeat(np.arange(x0.size), number)
    row = np.arange(edge.size) - np.repeat(np.cumsum(number) - number, number) + first[edge]
    part = (lat[row] - y0[edge]) / (y1[edge] - y0[edge])
    crossing = x0[edge] + part * (x1[edge] - x0[edge])
    column = np.searchsorted(lon, crossing, side="left")
    turn = np.where(y1[edge] > y0[edge], -1, 1)
    cell = row * (lon.size + 1) + column
    size = lat.size * (lon.size + 1)
    steps = np.bincount(cell, turn, size).astype(np.int16).reshape(lat.size, -1)
    return np.cumsum(steps[:, :-1], axis=1, dtype=np.int16)
