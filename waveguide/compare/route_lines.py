"""Routes of arrivals as lines in space and time, each stretch of guide once."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from waveguide.constants import SECONDS_PER_DAY, deformation_radius

if TYPE_CHECKING:
    import xarray as xr

Array = NDArray[np.float64]

ATTACHMENT = "attachment"


@dataclass(frozen=True)
class RouteLine:
    """The earliest route of one mode to one target, along the guide.

    Attributes
    ----------
    target : str
    mode : int
    lon, lat : ndarray, shape (n,)
        Vertices in the order of travel, degrees.
    distance : ndarray, shape (n,)
        Along the route (m).
    time : ndarray, shape (n,)
        Of the front (s after the start of the event).
    amplitude : ndarray, shape (n,)
        Sea level over that at the source.
    leg : ndarray of int, shape (n,)
        Number of the leg a vertex belongs to.
    kinds : tuple of str
        Kind of each leg.
    """

    target: str
    mode: int
    lon: Array
    lat: Array
    distance: Array
    time: Array
    amplitude: Array
    leg: NDArray[np.int_]
    kinds: tuple[str, ...]

    @property
    def speed(self) -> Array:
        """Phase speed at the vertices (m/s), shape (n,)."""
        away = np.gradient(self.distance, edge_order=1)
        spent = np.gradient(self.time, edge_order=1)
        return np.asarray(away / np.where(spent > 0.0, spent, np.nan))

    @property
    def radius(self) -> Array:
        """Deformation radius at the vertices (m), shape (n,)."""
        speed = self.speed
        known = np.nan_to_num(speed, nan=float(np.nanmedian(speed)))
        return deformation_radius(known, self.lat)

    @property
    def equatorial(self) -> NDArray[np.bool_]:
        """Whether a vertex lies on the equatorial guide, shape (n,)."""
        return np.array([kind == "equator" for kind in self.kinds])[self.leg]


def route_lines(arrivals: xr.Dataset) -> list[RouteLine]:
    """The earliest routes of all targets and modes, without those that are part of another.

    Parameters
    ----------
    arrivals : xarray.Dataset
        As declared in `waveguide.schema.ARRIVALS`.

    Returns
    -------
    list of RouteLine
        By mode, the longest first.
    """
    kinds = arrivals["route_kind"].values
    lines = [_line(arrivals, int(route)) for route in np.flatnonzero(kinds == "earliest")]
    whole = [line for line in lines if line is not None]
    whole.sort(key=lambda line: (line.mode, -line.distance[-1]))
    kept: list[RouteLine] = []
    for line in whole:
        if not any(_covers(other, line) for other in kept):
            kept.append(line)
    return kept


def _line(arrivals: xr.Dataset, route: int) -> RouteLine | None:
    """One route, None where source and target are tied to one place."""
    legs = np.flatnonzero(arrivals["leg_route"].values == route)
    legs = legs[arrivals["leg_kind"].values[legs] != ATTACHMENT]
    vertex_leg = arrivals["vertex_leg"].values
    index = np.flatnonzero(np.isin(vertex_leg, legs))
    if index.size < 3:
        return None
    distance = 1e3 * arrivals["vertex_distance_km"].values[index]
    number = np.searchsorted(legs, vertex_leg[index])
    fresh = np.concatenate([[True], np.diff(distance) > 0.0])  # legs share their end vertices
    index, distance, number = index[fresh], distance[fresh], number[fresh]
    factors = arrivals["leg_amplitude_factor"].values[legs]
    ends = np.array([distance[number <= k].max(initial=0.0) for k in range(legs.size)])
    log = np.concatenate([[0.0], np.cumsum(np.log(np.maximum(np.abs(factors), 1e-12)))])
    target = int(arrivals["route_target"].values[route])
    source = float(arrivals["source_factor"].values[
        target, int(arrivals["route_mode"].values[route])
    ])
    return RouteLine(
        str(arrivals["target"].values[target]),
        int(arrivals["mode"].values[arrivals["route_mode"].values[route]]),
        arrivals["vertex_longitude"].values[index], arrivals["vertex_latitude"].values[index],
        distance, SECONDS_PER_DAY * arrivals["vertex_time_days"].values[index],
        source * np.exp(np.interp(distance, np.concatenate([[0.0], ends]), log)),
        number, tuple(map(str, arrivals["leg_kind"].values[legs])),
    )


def _covers(line: RouteLine, other: RouteLine) -> bool:
    """Whether a route runs through all of another but its last vertex."""
    if line.mode != other.mode:
        return False
    mine, theirs = (
        {(round(float(x), 4), round(float(y), 4)) for x, y in zip(a.lon, a.lat, strict=True)}
        for a in (line, other)
    )
    return len(theirs - mine) <= 1


def densified(line: RouteLine, spacing: float) -> tuple[Array, Array, Array]:
    """Positions every `spacing` metres or less along a route.

    Parameters
    ----------
    line : RouteLine
    spacing : float

    Returns
    -------
    distance, lon, lat : ndarray, shape (k,)
        m and degrees; longitudes run on across the date line.
    """
    total = float(line.distance[-1])
    distance = np.linspace(0.0, total, max(int(np.ceil(total / spacing)), 1) + 1)
    lon = np.unwrap(line.lon, period=360.0)
    lat = np.interp(distance, line.distance, line.lat)
    return distance, np.interp(distance, line.distance, lon), lat
