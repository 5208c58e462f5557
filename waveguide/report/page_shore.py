"""The shoreline as the page carries it: few vertices, small whole numbers."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from waveguide.coast.shoreline import LAKE, Ring, shoreline
from waveguide.geodesy import wrap_longitude

if TYPE_CHECKING:
    from waveguide.geodesy import Array

UNITS_PER_DEGREE = 100
"""Vertices are given in hundredths of a degree."""

_NEAR = (0.02, 15.0)  # tolerance (degrees) and smallest area (km²) close to the routes
_FAR = (0.08, 150.0)  # the same elsewhere
_MARGIN = 4.0  # degrees; how much more than the routes is "close"


def shore_rings(lon: Array, lat: Array) -> list[list[int]]:
    """Rings of land and lakes, fine close to some positions and coarse elsewhere.

    Parameters
    ----------
    lon, lat : ndarray, shape (n,)
        Positions along the routes, degrees.

    Returns
    -------
    list of list of int
        For each ring 1 for a lake or 0 for land, then longitude and latitude of the first vertex
        and the steps from vertex to vertex, in units of 1/`UNITS_PER_DEGREE` degrees. Land first.
    """
    near = _near_cells(lon, lat)
    regional = near.mean() < 0.1  # of the globe: a route round the world is seen from afar
    rings = shoreline("intermediate" if regional else "low")
    kept = []
    for ring in (ring for ring in rings if ring.area >= _NEAR[1]):
        close = bool(near[_cells(ring.lon, ring.lat)].any())
        tolerance, smallest = _NEAR if close else _FAR
        if ring.area >= smallest:
            kept.append(_encoded(ring, tolerance))
    return sorted((ring for ring in kept if len(ring) > 7), key=lambda ring: ring[0])


def _cells(lon: Array, lat: Array) -> tuple[np.ndarray, np.ndarray]:
    """Row and column of positions in cells of one degree."""
    row = np.clip(np.floor(np.asarray(lat) + 90.0), 0, 179).astype(int)
    return row, np.floor(wrap_longitude(lon) + 180.0).astype(int) % 360


def _near_cells(lon: Array, lat: Array) -> np.ndarray:
    """Which cells of one degree lie within the margin of a position, shape (180, 360)."""
    near = np.zeros((180, 360), bool)
    reach = np.arange(-_MARGIN, _MARGIN + 1.0)
    east = lon[:, None, None] + reach / np.maximum(np.cos(np.radians(lat)), 0.1)[:, None, None]
    north = lat[:, None, None] + reach[:, None]
    near[_cells(*np.broadcast_arrays(east, north))] = True
    return near


def _encoded(ring: Ring, tolerance: float) -> list[int]:
    import shapely

    whole = shapely.LineString(np.column_stack([ring.lon, ring.lat]))
    line = whole.simplify(tolerance, preserve_topology=False)
    units = np.rint(shapely.get_coordinates(line) * UNITS_PER_DEGREE).astype(int)
    steps = np.diff(units, axis=0, prepend=np.zeros((1, 2), int))
    moves = np.any(steps != 0, axis=1)
    moves[0] = True
    return [int(ring.level == LAKE), *steps[moves].ravel().tolist()]
