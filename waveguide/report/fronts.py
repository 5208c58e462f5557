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
        Where the route first passes the critical latitude of a meridional coast, before and
        after each crossing along the equator (km, degrees north).
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
    period = float(dataset.attrs["period_days"]) * SECONDS_PER_DAY
    below, critical = [np.zeros(0, dtype=bool)], []
    passed = False
    for leg in guided_legs(dataset, route):
        span = np.array(vertices_of(dataset, leg))
        kind = dataset["leg_kind"].values[leg]
        passed = passed and kind != "equator"
        if kind != "coast" or span.size < 2:
            below.append(np.zeros(span.size, dtype=bool))
            continue
        distance, time, lat = (
            dataset[f"vertex_{name}"].values[span]
            for name in ("distance_km", "time_days", "latitude")
        )
        stretch = _stretch(distance)
        slowness = np.maximum(_rise(time, distance, stretch), 1e-9)  # days per km
        speed = 1e3 / (slowness * SECONDS_PER_DAY)
        limit = critical_latitude(speed, period)
        below.append(_below_critical(distance, lat, stretch, speed, 2.0 * np.pi / period))
        place = _first_crossing(distance, np.abs(lat) - limit)
        if not passed and np.isfinite(place):
            critical.append((place, float(np.interp(place, distance, lat))))
            passed = True
    distance, time = (dataset[f"vertex_{n}"].values[index] for n in ("distance_km", "time_days"))
    return Front(distance, time, np.concatenate(below), critical)


def _stretch(distance: Array) -> tuple[Array, Array]:
    """Start and end (km) of the stretch of coast about each vertex."""
    first, last = (
        np.clip(distance + side * _SMOOTHED / 2.0, distance[0], distance[-1])
        for side in (-1.0, 1.0)
    )
    return first, last


def _rise(values: Array, distance: Array, stretch: tuple[Array, Array]) -> Array:
    """Mean rise of values over the stretch about each vertex (per km)."""
    first, last = (np.interp(end, distance, values) for end in stretch)
    return np.asarray((last - first) / np.maximum(stretch[1] - stretch[0], 1e-6))


def _below_critical(
    distance: Array, lat: Array, stretch: tuple[Array, Array], speed: Array, omega: float
) -> NDArray[np.bool_]:
    """Whether ω < c|Γ|, by the direction of the coast over the stretch about each vertex."""
    f = np.abs(coriolis(lat))
    middle = sum(np.interp(end, distance, f) for end in stretch) / 2.0
    gamma = _rise(f, distance, stretch) / (2.0 * np.maximum(middle, 1e-12)) / 1e3
    return np.asarray(omega < critical_frequency(speed, gamma))


def _first_crossing(distance: Array, height: Array) -> float:
    """Where a curve first goes through zero, NaN where it does not."""
    found = np.flatnonzero(height[:-1] * height[1:] < 0.0)
    if not found.size:
        return float("nan")
    i = found[0]
    share = height[i] / (height[i] - height[i + 1])
    return float(distance[i] + share * (distance[i + 1] - distance[i]))
