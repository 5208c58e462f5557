"""Winds of one's own invention: a patch that stands or travels, and a storm on its track."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from waveguide.constants import EARTH_RADIUS
from waveguide.forcing.drag import wind_stress
from waveguide.forcing.time_axis import Times, seconds
from waveguide.geodesy import arc, positions, unit_vectors

Array = NDArray[np.float64]

_QUIET = 5.0  # radii beyond which a patch (e^−25) is nothing
_FADED = 40.0  # radii beyond which a storm's wind (a sixth of its greatest) is left out
INFLOW = 20.0
"""Angle by which a storm's wind blows inward of its circles (degrees), usual at sea.

MEMORY: Bretschneider (1972) has 10° within the radius of greatest wind rising to 25° outside.
"""


@dataclass(frozen=True)
class Patch:
    """A patch of stress of one direction, Gaussian in space, a sin² in time.

    Attributes
    ----------
    lon, lat : float
        Centre at the start, degrees.
    start : datetime64[ns]
    duration : float
        s; the stress is greatest after half of it.
    length, width : float
        Distance from the centre at which stress is 1/e of the greatest, along the direction of
        the wind and across it (m).
    stress : float
        Greatest stress (Pa).
    towards : float
        Azimuth the wind blows to (degrees).
    speed : float
        At which the patch travels (m/s).
    heading : float
        Azimuth it travels to (degrees).
    """

    lon: float
    lat: float
    start: np.datetime64
    duration: float
    length: float
    width: float
    stress: float
    towards: float
    speed: float
    heading: float


@dataclass(frozen=True)
class Storm:
    """A cyclone on its track: solid rotation within a radius, V (R/r)^½ outside.

    Attributes
    ----------
    lon, lat : ndarray, shape (k,)
        Track, degrees.
    time : ndarray of datetime64[ns], shape (k,)
        When it is there; the storm is not there before and after.
    wind : float
        Greatest wind (m/s).
    radius : float
        Radius of the greatest wind (m).
    law : str
        Drag law.
    """

    lon: Array
    lat: Array
    time: Times
    wind: float
    radius: float
    law: str


Event = Patch | Storm


def event_stress(event: Event, lon: Array, lat: Array, time: Times) -> tuple[Array, Array]:
    """Stress of an invented wind.

    Parameters
    ----------
    event : Patch or Storm
    lon, lat : ndarray, shape (p,)
        Degrees.
    time : ndarray of datetime64[ns], shape (nt,)

    Returns
    -------
    eastward, northward : ndarray, shape (nt, p)
        Pa.
    """
    if isinstance(event, Patch):
        return _patch_stress(event, lon, lat, time)
    return _storm_stress(event, lon, lat, time)


def event_end(event: Event) -> np.datetime64:
    """When an event is over."""
    if isinstance(event, Storm):
        return np.datetime64(event.time[-1], "ns")
    return event.start + np.timedelta64(round(event.duration * 1e9), "ns")


def event_start(event: Event) -> np.datetime64:
    """When an event begins."""
    return np.datetime64(event.time[0], "ns") if isinstance(event, Storm) else event.start


def within_reach(event: Event, lon: Array, lat: Array) -> NDArray[np.int64]:
    """Places that an event may reach while it lasts.

    Parameters
    ----------
    event : Patch or Storm
    lon, lat : ndarray, shape (p,)
        Degrees.

    Returns
    -------
    ndarray of int, shape (k,)
    """
    if isinstance(event, Patch):
        half = 0.5 * event.speed * event.duration
        heading = np.radians(event.heading)
        lon0, lat0 = _ahead(event, heading, np.array([half]))
        reach = half + _QUIET * max(event.length, event.width)
    else:
        lon0, lat0, reach = event.lon, event.lat, _FADED * event.radius
        hops = arc(np.linalg.norm(np.diff(unit_vectors(event.lon, event.lat), axis=0), axis=1))
        reach += 0.5 * float(hops.max())
    centre, place = unit_vectors(lon0, lat0), unit_vectors(lon, lat)
    away = arc(np.sqrt(np.maximum(2.0 - 2.0 * centre @ place.T, 0.0)))
    return np.nonzero(away.min(axis=0) <= reach)[0]


def _ahead(event: Patch, heading: float, distance: Array) -> tuple[Array, Array]:
    """Places at distances (m) from the start of a patch along a great circle."""
    origin = unit_vectors(event.lon, event.lat)
    east, north = _frame(np.array(event.lon), np.array(event.lat))
    ahead = np.sin(heading) * east + np.cos(heading) * north
    angle = np.asarray(distance)[:, None] / EARTH_RADIUS
    return positions(np.cos(angle) * origin + np.sin(angle) * ahead)


def _offsets(lon: Array, lat: Array, lon0: Array, lat0: Array) -> tuple[Array, Array]:
    """East and north components (m) of the way from centres (nt,) to places (p,)."""
    east, north = _frame(lon0, lat0)
    place, centre = unit_vectors(lon, lat), unit_vectors(lon0, lat0)
    x, y = east @ place.T, north @ place.T
    away = arc(np.sqrt(np.maximum(2.0 - 2.0 * centre @ place.T, 0.0)))
    flat = np.hypot(x, y)
    scale = away / np.where(flat > 0.0, flat, 1.0)
    return x * scale, y * scale


def _frame(lon: Array, lat: Array) -> tuple[Array, Array]:
    """Unit vectors to the east and to the north, shape (nt, 3)."""
    lam = np.radians(lon)
    east = np.stack([-np.sin(lam), np.cos(lam), np.zeros_like(lam)], axis=-1)
    up = unit_vectors(lon, lat)
    return east, np.cross(up, east)


def _patch_stress(event: Patch, lon: Array, lat: Array, time: Times) -> tuple[Array, Array]:
    elapsed = seconds(time - event.start)
    during = (elapsed > 0.0) & (elapsed < event.duration)
    strength = np.where(during, np.sin(np.pi * elapsed / event.duration) ** 2, 0.0) * event.stress
    centre = _ahead(event, float(np.radians(event.heading)), event.speed * elapsed)
    x, y = _offsets(lon, lat, *centre)
    towards = np.radians(event.towards)
    along = (x * np.sin(towards) + y * np.cos(towards)) / event.length
    across = (x * np.cos(towards) - y * np.sin(towards)) / event.width
    size = strength[:, None] * np.exp(-np.minimum(along**2 + across**2, _QUIET**2))
    return size * np.sin(towards), size * np.cos(towards)


def _storm_stress(event: Storm, lon: Array, lat: Array, time: Times) -> tuple[Array, Array]:
    since, at = seconds(event.time - event.time[0]), seconds(time - event.time[0])
    track = unit_vectors(event.lon, event.lat)
    centre = np.stack([np.interp(at, since, part) for part in track.T], axis=1)
    lon0, lat0 = positions(centre)
    x, y = _offsets(lon, lat, lon0, lat0)
    r = np.maximum(np.hypot(x, y), 1.0)
    there = ((at >= since[0]) & (at <= since[-1]))[:, None]
    inside = np.minimum(r / event.radius, np.sqrt(event.radius / r)) * (r < _FADED * event.radius)
    speed = np.where(there, event.wind * inside, 0.0)
    # Anticlockwise in the north, clockwise in the south, and somewhat inward.
    turn = np.where(lat0 >= 0.0, 1.0, -1.0)[:, None]
    inward = np.radians(INFLOW)
    u = speed * (-turn * y * np.cos(inward) - x * np.sin(inward)) / r
    v = speed * (turn * x * np.cos(inward) - y * np.sin(inward)) / r
    return wind_stress(u, v, event.law)
