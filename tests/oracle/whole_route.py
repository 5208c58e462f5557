"""A signal along a whole route on the sphere: mask, phase speed and source in, gauges out."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from shallow_water import Array, Grid, integrate, sphere_grid

Cells = NDArray[np.int_]


@dataclass(frozen=True)
class Domain:
    """A longitude-latitude mask of square cells in degrees, row 0 the southernmost.

    Attributes
    ----------
    water : ndarray of bool, shape (ny, nx)
    west, south : float
        Edges of the mask (degrees).
    step : float
        Side of the cells (degrees).
    """

    water: NDArray[np.bool_]
    west: float
    south: float
    step: float

    @property
    def lon(self) -> Array:
        """Middles of the columns."""
        return self.west + self.step * (np.arange(self.water.shape[1]) + 0.5)

    @property
    def lat(self) -> Array:
        """Middles of the rows."""
        return self.south + self.step * (np.arange(self.water.shape[0]) + 0.5)


@dataclass(frozen=True)
class Gauges:
    """What gauges recorded.

    Attributes
    ----------
    lon, lat : ndarray, shape (n,)
        Middles of the cells that were read.
    time : ndarray, shape (nt,)
        Seconds.
    sea_level : ndarray, shape (nt, n)
        η carried half a cell to the coast by exp(|f| dx/2c), on the equator η itself.
    steps : int
    cpu_seconds : float
    """

    lon: Array
    lat: Array
    time: Array
    sea_level: Array
    steps: int
    cpu_seconds: float


def coastal_cells(domain: Domain) -> Cells:
    """Rows and columns of the water cells that have land to one side."""
    wet = np.pad(domain.water, 1, constant_values=True)
    beside = wet[:-2, 1:-1] & wet[2:, 1:-1] & wet[1:-1, :-2] & wet[1:-1, 2:]
    return np.argwhere(domain.water & ~beside)


def nearest(domain: Domain, cells: Cells, lon: float, lat: float) -> Cells:
    """Of some cells the one closest to a position (degrees)."""
    east = (domain.lon[cells[:, 1]] - lon) * np.cos(np.radians(lat))
    return np.asarray(cells[np.argmin(np.hypot(east, domain.lat[cells[:, 0]] - lat))])


def patch(domain: Domain, lon: float, lat: float, radius: float) -> tuple[Cells, Array]:
    """Source cells within 2.5 `radius` (degrees) of a position, with Gaussian weights."""
    east = (domain.lon[None, :] - lon) * np.cos(np.radians(lat))
    square = (east**2 + (domain.lat[:, None] - lat) ** 2) / radius**2
    cells = np.argwhere(domain.water & (square < 6.25))
    return cells, np.exp(-0.5 * square[cells[:, 0], cells[:, 1]])


def edge_sponge(domain: Domain, width: float, rate: float, sides: str) -> Array:
    """Damping that rises to `rate` (1/s) over `width` degrees at sides out of "NESW".

    Leave out a side where a coast in use comes closer than `width`.
    """
    rows, columns = domain.water.shape
    row, column = np.arange(rows)[:, None] + 0.5, np.arange(columns)[None, :] + 0.5
    inward = {"N": rows - row, "E": columns - column, "S": row, "W": column}
    depth = np.full(domain.water.shape, np.inf)
    for side in sides:
        depth = np.minimum(depth, inward[side] * domain.step)
    return np.asarray(rate * np.clip(1.0 - depth / width, 0.0, 1.0) ** 2)


def whole_route(
    domain: Domain,
    speed: Array | float,
    source: tuple[Cells, Array],
    source_time: Callable[[float], float],
    gauges: list[tuple[float, float]],
    duration: float,
    *,
    sponge: Array | float = 0.0,
    viscosity: float = 10.0,
    sample: float = 21600.0,
) -> Gauges:
    """Integrate one mode over a domain and read the coast.

    Parameters
    ----------
    domain : Domain
    speed : array (ny, nx) or float
        Phase speed (m/s).
    source : (cells, weights)
        Where sea level is forced; see `patch`.
    source_time : callable
        Time function of the source (1/s).
    gauges : list of (lon, lat)
        The closest coastal cell is read; on the equator (lat = 0) the closest of all.
    duration : float
        Seconds.
    sponge : array (ny, nx) or float
        Damping (1/s); see `edge_sponge`.
    viscosity : float
        m²/s; absorbs the short Rossby waves that pile up at western walls.
    sample : float
        Seconds between records.

    Returns
    -------
    Gauges
    """
    coast, water = coastal_cells(domain), np.argwhere(domain.water)
    read = np.array([nearest(domain, coast if lat else water, lon, lat) for lon, lat in gauges])
    grid: Grid = sphere_grid(domain.water, domain.step, domain.south, domain.step)
    record = integrate(
        grid, speed, duration, read, source=source, source_time=source_time, sponge=sponge,
        viscosity=viscosity, sample=sample,
    )
    c = np.broadcast_to(np.asarray(speed, float), domain.water.shape)[read[:, 0], read[:, 1]]
    to_coast = np.exp(np.abs(grid.f[read[:, 0], read[:, 1]]) * grid.width[read[:, 0]] / (2.0 * c))
    return Gauges(
        domain.lon[read[:, 1]], domain.lat[read[:, 0]], record.time, record.sea_level * to_coast,
        record.steps, record.cpu_seconds,
    )
