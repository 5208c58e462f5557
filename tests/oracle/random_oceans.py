"""Oceans whose phase speed is wrong at random along the guide, and what arrives in them.

The basin of `basin.py`: down the western coast, along the equator, up the eastern one. The error
of the slowness is one random function ε(s) of the way s along the guide, normal, of standard
deviation `SIZE` and correlation exp(−|s − s′|/`LENGTH`). Off the guide it is continued over s =
26° + x − |y| w(x) + |y| w(60° − x), with w falling from one at a coast to zero 20° off it.
"""

from __future__ import annotations

import numpy as np
from basin import GAUGES, WIDTH
from numpy.typing import NDArray
from shallow_water import Array
from whole_route import Domain, Gauges, edge_sponge, patch, whole_route

from waveguide.constants import EARTH_RADIUS, SECONDS_PER_DAY

SPEED = 5.0
SIZE, LENGTH = 0.10, 2000e3
START = 26.0  # degrees north at the western coast
DEGREE = float(np.radians(1.0) * EARTH_RADIUS)


def way(lon: Array, lat: Array) -> Array:
    """Way along the guide (degrees)."""
    near_west, near_east = (np.clip(1.0 - off / 20.0, 0.0, 1.0) for off in (lon, WIDTH - lon))
    return np.asarray(START + lon + np.abs(lat) * (near_east - near_west))


def error_along(seed: int) -> tuple[Array, Array]:
    """Way (degrees) and relative error of the slowness there, a first-order Markov process."""
    place = np.arange(-20.0, START + WIDTH + 45.0, 0.25)
    keep = np.exp(-0.25 * DEGREE / LENGTH)
    noise = np.random.default_rng(seed).normal(size=place.size)
    error = np.empty(place.size)
    error[0] = noise[0]
    for i in range(1, place.size):
        error[i] = keep * error[i - 1] + np.sqrt(1.0 - keep**2) * noise[i]
    return place, SIZE * error


def integrate_ocean(seed: int | None, step: float, days: float) -> tuple[Domain, Gauges]:
    """Integrate a burst off 26° N in a random ocean, or in the uniform one without a seed."""
    columns, rows = round(WIDTH / step), round(80.0 / step)
    water = np.ones((rows, columns), bool)
    water[:, [0, -1]] = False
    domain = Domain(water, 0.0, -40.0, step)
    lon, lat = np.meshgrid(domain.lon, domain.lat)
    error = np.zeros(1) if seed is None else np.interp(way(lon, lat), *error_along(seed))
    speed = np.broadcast_to(SPEED / (1.0 + error), water.shape).copy()

    def burst(t: float) -> float:
        return float(np.exp(-0.5 * (t / SECONDS_PER_DAY / 3.0 - 4.0) ** 2)) / SECONDS_PER_DAY

    gauges = whole_route(
        domain, speed, patch(domain, 1.5 * step, START, 1.5), burst, GAUGES,
        days * SECONDS_PER_DAY, sponge=edge_sponge(domain, 6.0, 4e-5, "NS"), viscosity=50.0,
        sample=10800.0,
    )
    return domain, gauges


def legs_between(lat: Array, lon: Array, step: float) -> list[NDArray[np.float64]]:
    """Way along the guide (degrees) from the first gauge to each gauge, at quarter degrees."""
    found = []
    for x, y in zip(lon, lat, strict=True):
        last = START - abs(y) if x < WIDTH / 2 else START + WIDTH - 2.0 * step + abs(y)
        first = START - abs(lat[0])
        found.append(np.linspace(first, last, max(round(4.0 * abs(last - first)), 1) + 1))
    return found
