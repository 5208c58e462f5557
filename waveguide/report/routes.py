"""Reading the ragged part of the arrivals: the routes of a row, the legs of a route."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from waveguide.geodesy import wrap_longitude

if TYPE_CHECKING:
    from waveguide.geodesy import Array
    from waveguide.stored import Stored


def routes_of(dataset: Stored, target: int, mode: int) -> list[int]:
    """Indices of the routes of one row, the earliest first.

    Parameters
    ----------
    dataset : xarray.Dataset or Arrays
        Arrivals.
    target, mode : int
        Indices of the row, along ``target`` and along ``mode``.
    """
    stored = dataset.variables  # much quicker to reach than the same with their coordinates
    mine = (stored["route_target"].values == target) & (stored["route_mode"].values == mode)
    later = stored["route_kind"].values != "earliest"
    times = stored["route_front_time_days"].values
    return sorted((int(i) for i in np.flatnonzero(mine)), key=lambda i: (later[i], times[i]))


def remarks_of(dataset: Stored, target: int, mode: int) -> list[int]:
    """Indices of the cautions of one row, the most serious first."""
    stored = dataset.variables
    mine = (stored["remark_target"].values == target) & (stored["remark_mode"].values == mode)
    return [int(i) for i in np.flatnonzero(mine)]


def legs_of(dataset: Stored, route: int) -> range:
    """Indices of the legs of a route, in the order of travel."""
    return _span(dataset.variables["leg_route"].values, route)


def vertices_of(dataset: Stored, leg: int) -> range:
    """Indices of the vertices of a leg, in the order of travel."""
    return _span(dataset.variables["vertex_leg"].values, leg)


def leg_line(dataset: Stored, leg: int) -> tuple[Array, Array]:
    """Longitude and latitude (degrees) along a leg, from its start to its end.

    A leg stored without vertices is the line from its start to its end.
    """
    vertices = vertices_of(dataset, leg)
    if len(vertices) > 1:
        part = slice(vertices.start, vertices.stop)
        lon, lat = (dataset.variables[f"vertex_{axis}"] for axis in ("longitude", "latitude"))
        return lon.values[part], lat.values[part]
    ends = [
        [float(dataset.variables[f"leg_{end}_{axis}"].values[leg]) for end in ("from", "to")]
        for axis in ("longitude", "latitude")
    ]
    return np.asarray(ends[0]), np.asarray(ends[1])


def unwrapped(lon: Array, middle: float) -> Array:
    """Longitudes along a line made continuous, starting within 180° of `middle` (degrees)."""
    if len(lon) == 0:
        return np.asarray(lon, float)
    start = middle + wrap_longitude(lon[0] - middle)
    steps = np.asarray(wrap_longitude(np.diff(lon)))
    return np.concatenate([[start], start + np.cumsum(steps)])


def split_at_date_line(lon: Array, lat: Array) -> list[tuple[Array, Array]]:
    """A line cut where it crosses 180°, as RFC 7946 section 3.1.9 asks for.

    The crossing is put where the straight line in longitude and latitude meets the meridian;
    with vertices a few tens of kilometres apart that is within metres of the geodesic.

    Parameters
    ----------
    lon, lat : ndarray, shape (n,)
        Degrees.

    Returns
    -------
    list of (lon, lat)
        Pieces of two vertices or more, −180 ≤ lon ≤ 180.
    """
    lon, lat = unwrapped(lon, 0.0), np.asarray(lat, float)
    first = int(np.floor((lon.min() + 180.0) / 360.0))
    last = max(int(np.ceil((lon.max() + 180.0) / 360.0)), first + 1)
    turns = 360.0 * np.arange(first, last)
    return [piece for turn in turns for piece in _between(lon, lat, turn - 180.0, turn + 180.0)]


def _between(lon: Array, lat: Array, west: float, east: float) -> list[tuple[Array, Array]]:
    """The parts of a line between two meridians, wrapped to −180..180."""
    crossings = np.concatenate([_crossings(lon, meridian) for meridian in (west, east)])
    place = np.unique(np.concatenate([np.arange(len(lon), dtype=float), crossings]))
    x, y = (np.interp(place, np.arange(len(lon)), values) for values in (lon, lat))
    tolerance = 1e-9  # degrees: of rounding, where a vertex lies on the meridian itself
    inside = (x >= west - tolerance) & (x <= east + tolerance)
    steps = inside[:-1] & inside[1:]
    edges = np.flatnonzero(np.diff(np.concatenate([[False], steps, [False]]).astype(int)))
    middle = (west + east) / 2.0
    return [
        (np.clip(x[start : stop + 1] - middle, -180.0, 180.0), y[start : stop + 1])
        for start, stop in zip(edges[::2], edges[1::2], strict=True)
    ]


def _crossings(lon: Array, meridian: float) -> Array:
    """Fractional indices at which a continuous line passes a meridian."""
    before, after = lon[:-1] - meridian, lon[1:] - meridian
    index = np.flatnonzero(before * after < 0.0)
    return index + before[index] / (before[index] - after[index])


def _span(index: Array, value: int) -> range:
    first, last = np.searchsorted(index, [value, value + 1])
    return range(int(first), int(last))
