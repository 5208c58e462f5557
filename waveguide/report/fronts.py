"""The front along a route, and what the dominant period makes of the coasts it passes."""

from __future__ import annotations

from typing import TYPE_CHECKING, NamedTuple

import numpy as np
from numpy.typing import NDArray

from waveguide.constants import SECONDS_PER_DAY, coriolis
from waveguide.propagation.dispersion import critical_frequency, critical_latitude
from waveguide.report.routes import vertices_of
from waveguide.report.ways import guided_legs, guided_vertices

if TYPE_CHECKING:
    import xarray as xr

Array = NDArray[np.float64]

_SMOOTHED = 200.0
"""Stretch of coast (km) whose direction decides whether it is below the critical frequency."""


class Front(NamedTuple):
    """The front along a route.

    Attributes
    ----------
    distance, time : ndarray, shape (k,)
        At the vertices along the guide (km, days).
    below : ndarray of bool, shape (k,)
        Whether the coast there is below the critical frequency at the dominant period.
    critical : list of (distance, latitude)
        Where the route passes the critical latitude (km, degrees north).
    """

    distance: Array
    time: Array
    below: NDArray[np.bool_]
    critical: list[tuple[float, float]]


def front_of(dataset: xr.Dataset, route: int) -> Front:
    """The front along a route, with what the dominant period makes of its coasts.

    Parameters
    ----------
    dataset : xarray.Dataset
        Arrivals.
    route : int

    Returns
    -------
    Front
    """
    index = guided_vertices(dataset, route)
    below, critical = [np.zeros(0, dtype=bool)], []
    for leg in guided_legs(dataset, route):
        span = np.array(vertices_of(dataset, leg))
        if dataset["leg_kind"].values[leg] != "coast" or span.size < 2:
            below.append(np.zeros(span.size, dtype=bool))
            continue
        distance, time, lat = (
            dataset[f"vertex_{name}"].values[span]
            for name in ("distance_km", "time_days", "latitude")
        )
        days = float(dataset.attrs["period_days"])
        speed = np.median(np.diff(distance)) * 1e3 / np.median(np.diff(time)) / SECONDS_PER_DAY
        below.append(_below_critical(distance, lat, float(speed), days))
        latitude = float(critical_latitude(speed, days * SECONDS_PER_DAY))
        critical += [
            (place, float(np.copysign(latitude, np.interp(place, distance, lat))))
            for place in _crossings(distance, np.abs(lat) - latitude)
        ]
    distance, time = (dataset[f"vertex_{n}"].values[index] for n in ("distance_km", "time_days"))
    return Front(distance, time, np.concatenate(below), critical)


def _below_critical(distance: Array, lat: Array, speed: float, days: float) -> NDArray[np.bool_]:
    """Whether ω < c|Γ| with |f| taken over a stretch about each vertex."""
    f = np.abs(coriolis(lat))
    ends = [np.clip(distance + side * _SMOOTHED / 2.0, distance[0], distance[-1])
            for side in (-1.0, 1.0)]
    first, last = (np.interp(end, distance, f) for end in ends)
    length = np.maximum(ends[1] - ends[0], 1e-3) * 1e3
    gamma = (last - first) / (np.maximum(first + last, 1e-12) * length)
    omega = 2.0 * np.pi / (days * SECONDS_PER_DAY)
    return np.asarray(omega < critical_frequency(speed, gamma))


def _crossings(distance: Array, height: Array) -> list[float]:
    """Places where a curve goes through zero, of those close together the first."""
    found: list[float] = []
    for i in np.flatnonzero(height[:-1] * height[1:] < 0.0):
        share = height[i] / (height[i] - height[i + 1])
        place = float(distance[i] + share * (distance[i + 1] - distance[i]))
        if not found or place - found[-1] > _SMOOTHED:
            found.append(place)
    return found
