"""Where the wind that forces each step is taken, and in which direction it counts.

A coast step takes the stress along it half-way, somewhat offshore (the wind of land cells is not
that of the sea). A step of the equator takes the zonal stress at many latitudes, weighted as the
Kelvin wave feels it: equidistant samples, which for a Gaussian are as good as exact.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from waveguide.constants import EARTH_RADIUS
from waveguide.geodesy import destination, positions, unit_vectors, wgs84
from waveguide.network.graph import Network, StepKind
from waveguide.propagation.equator import equatorial_radius

Array = NDArray[np.float64]
Index = NDArray[np.int64]

_REACH = 3.5  # L_e on either side of the equator, where e^(−y²/2L_e²) = 0.002
_COUNT = 29  # samples across, a quarter of L_e apart
_HIGHEST = 80.0  # degrees


@dataclass(frozen=True)
class Samples:
    """Places where the stress is taken for the steps of a network.

    Attributes
    ----------
    lon, lat : ndarray, shape (p,)
        Degrees.
    row : ndarray of int, shape (p,)
        Which of the steps asked for the sample belongs to.
    eastward, northward : ndarray, shape (p,)
        Weights of the two components of stress; their sum over the samples of a step is what
        forces it.
    zonal : ndarray of bool, shape (p,)
        Whether the sample belongs to the equator.
    """

    lon: Array
    lat: Array
    row: Index
    eastward: Array
    northward: Array
    zonal: NDArray[np.bool_]


def step_samples(network: Network, speed: Array, steps: Index, offshore: float) -> Samples:
    """Samples of the steps that the wind forces.

    Parameters
    ----------
    network : Network
    speed : ndarray, shape (n,)
        Phase speed at the nodes (m/s).
    steps : ndarray of int, shape (k,)
        Of coast and equator.
    offshore : float
        How far off the coast the wind is taken (m).

    Returns
    -------
    Samples
    """
    along = network.kind[steps] == StepKind.COAST
    parts = [
        _coast_samples(network, steps, np.nonzero(along)[0], offshore),
        _equator_samples(network, speed, steps, np.nonzero(~along)[0]),
    ]
    names = ("lon", "lat", "row", "eastward", "northward", "zonal")
    return Samples(*(np.concatenate([getattr(part, name) for part in parts]) for name in names))


def _middles(network: Network, steps: Index) -> tuple[Array, Array]:
    """Places half-way along steps (degrees)."""
    ends = [unit_vectors(network.lon[node], network.lat[node])
            for node in (network.tail[steps], network.head[steps])]
    return positions(ends[0] + ends[1])


def _coast_samples(network: Network, steps: Index, rows: Index, offshore: float) -> Samples:
    """One sample a step, in the direction of travel."""
    tail, head = network.tail[steps[rows]], network.head[steps[rows]]
    lon, lat = _middles(network, steps[rows])
    azimuth = np.asarray(wgs84().inv(
        network.lon[tail], network.lat[tail], network.lon[head], network.lat[head]
    )[0])
    seaward = azimuth + np.where(lat >= 0.0, -90.0, 90.0)  # land on the right in the north
    at_lon, at_lat = destination(lon, lat, seaward, np.full(lon.size, offshore))
    angle = np.radians(azimuth)
    none = np.zeros(rows.size, dtype=bool)
    return Samples(at_lon, at_lat, rows, np.sin(angle), np.cos(angle), none)


def _equator_samples(network: Network, speed: Array, steps: Index, rows: Index) -> Samples:
    """A column of samples a step; the weights of a uniform stress sum to 1."""
    lon, _ = _middles(network, steps[rows])
    ends = np.stack([speed[network.tail[steps[rows]]], speed[network.head[steps[rows]]]])
    radius = equatorial_radius(ends.mean(axis=0))
    scaled = np.linspace(-_REACH, _REACH, _COUNT)
    weight = np.exp(-0.5 * scaled**2)
    weight /= weight.sum()
    lat = np.degrees(radius[:, None] * scaled / EARTH_RADIUS)
    inside = np.abs(lat) <= _HIGHEST
    lons, all_rows, weights = np.broadcast_arrays(lon[:, None], rows[:, None], weight)
    count = int(inside.sum())
    return Samples(
        lons[inside], lat[inside], all_rows[inside], weights[inside], np.zeros(count),
        np.ones(count, dtype=bool),
    )
