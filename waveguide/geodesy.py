"""Positions on the sphere as unit vectors, and geodesic distances.

Neighbour searches work on unit vectors, which know no date line and no pole.
Lengths that are printed are WGS84 geodesics (pyproj).
"""

from __future__ import annotations

from functools import cache
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import ArrayLike, NDArray

from waveguide.constants import EARTH_RADIUS

if TYPE_CHECKING:
    from pyproj import Geod

Array = NDArray[np.float64]


@cache
def wgs84() -> Geod:
    """The WGS84 ellipsoid, made once (importing pyproj takes a while)."""
    from pyproj import Geod

    return Geod(ellps="WGS84")


def unit_vectors(lon: ArrayLike, lat: ArrayLike) -> Array:
    """Unit vectors of positions.

    Parameters
    ----------
    lon, lat : array_like
        Position, degrees east and north, broadcast to a common shape S.

    Returns
    -------
    ndarray, shape S + (3,)
    """
    lam, phi = np.radians(np.asarray(lon, float)), np.radians(np.asarray(lat, float))
    cos_phi = np.cos(phi)
    return np.stack(
        np.broadcast_arrays(cos_phi * np.cos(lam), cos_phi * np.sin(lam), np.sin(phi)), axis=-1
    )


def positions(vectors: Array) -> tuple[Array, Array]:
    """Longitude (−180..180) and latitude of vectors, which need not have unit length.

    Parameters
    ----------
    vectors : ndarray, shape S + (3,)

    Returns
    -------
    lon, lat : ndarray, shape S, degrees
    """
    x, y, z = np.moveaxis(np.asarray(vectors, float), -1, 0)
    return np.degrees(np.arctan2(y, x)), np.degrees(np.arctan2(z, np.hypot(x, y)))


def chord(distance: ArrayLike) -> Array:
    """Chord on the unit sphere that subtends a distance (m) along the mean earth."""
    return 2.0 * np.sin(np.minimum(np.asarray(distance, float) / EARTH_RADIUS, np.pi) / 2.0)


def arc(chord_length: ArrayLike) -> Array:
    """Distance (m) along the mean earth subtended by a chord of the unit sphere."""
    half = np.clip(np.asarray(chord_length, float) / 2.0, 0.0, 1.0)
    return 2.0 * EARTH_RADIUS * np.arcsin(half)


def geodesic_length(lon1: ArrayLike, lat1: ArrayLike, lon2: ArrayLike, lat2: ArrayLike) -> Array:
    """WGS84 geodesic distances (m) between pairs of positions in degrees (broadcast)."""
    a, b, c, d = np.broadcast_arrays(lon1, lat1, lon2, lat2)
    _, _, length = wgs84().inv(*(np.asarray(v, float).copy() for v in (a, b, c, d)))
    return np.asarray(length, float)


def wrap_longitude(lon: ArrayLike) -> Array:
    """Longitude wrapped to −180 ≤ lon < 180 (degrees)."""
    return (np.asarray(lon, float) + 180.0) % 360.0 - 180.0


def destination(lon: ArrayLike, lat: ArrayLike, azimuth: ArrayLike, distance: ArrayLike) -> tuple[
    Array, Array
]:
    """Where a geodesic leads.

    Parameters
    ----------
    lon, lat : array_like
        Start, degrees.
    azimuth : array_like
        Direction, degrees clockwise from north.
    distance : array_like
        Length (m); all broadcast together to a shape S.

    Returns
    -------
    lon, lat : ndarray, shape S, degrees
    """
    a, b, c, d = np.broadcast_arrays(lon, lat, azimuth, distance)
    end_lon, end_lat, _ = wgs84().fwd(*(np.asarray(v, float).copy() for v in (a, b, c, d)))
    return np.asarray(end_lon, float), np.asarray(end_lat, float)
