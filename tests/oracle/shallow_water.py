"""Linear shallow-water integration on a staggered grid: an independent, slow reference.

It shares no code and no theory with the package. One vertical mode is a layer of depth
H = c²/g; sea level η and the current (u, v) obey

    u_t − f v = −g η_x + ν∇²u,   v_t + f u = −g η_y + ν∇²v,   η_t + ∇·(H u, H v) = source.

Arakawa C-grid: η in the cell, u on its west face, v on its south face, no flow through faces
between land and water. Forward-backward steps for gravity waves; the Coriolis terms take u
first on even steps and v first on odd ones, which is neutral. Coriolis averages are formed
within cells, so on a plane they do no work. Viscosity slips freely along walls. An inviscid
C-grid keeps the speed of Kelvin waves with few cells per deformation radius, while a staircase
coast costs one order of accuracy (Hsieh, Davey & Wajsowicz 1983, J. Phys. Oceanogr. 13, 1383).
"""

from __future__ import annotations

import time
from collections.abc import Callable
from dataclasses import dataclass

import numba
import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Grid:
    """Rows of cells from south to north; the cells of a row have one width.

    Attributes
    ----------
    water : ndarray of bool, shape (ny, nx)
    width : ndarray, shape (ny,)
        Width of the cells of a row at its middle (m).
    side : ndarray, shape (ny + 1,)
        Width of the cells at the south side of each row, then at the north side of the last (m).
    height : float
        Height of the cells (m).
    f : ndarray, shape (ny, nx)
        Coriolis parameter in the cells (1/s).
    periodic : bool
        Whether the first column follows the last.
    """

    water: NDArray[np.bool_]
    width: Array
    side: Array
    height: float
    f: Array
    periodic: bool = False


def plane_grid(water: NDArray[np.bool_], spacing: float, f: Array | float) -> Grid:
    """Cartesian grid of square cells; `f` (1/s) broadcasts to the shape of `water`."""
    rows = water.shape[0]
    f_cells = np.array(np.broadcast_to(np.asarray(f, float), water.shape))
    return Grid(water, np.full(rows, spacing), np.full(rows + 1, spacing), spacing, f_cells)


def sphere_grid(
    water: NDArray[np.bool_],
    lon_step: float,
    lat_south: float,
    lat_step: float,
    periodic: bool = False,
    radius: float = 6.371e6,
    rotation: float = 7.292115e-5,
) -> Grid:
    """Longitude-latitude grid; steps and southern edge in degrees, row 0 the southernmost."""
    rows = water.shape[0]
    edges = np.radians(lat_south + lat_step * np.arange(rows + 1))
    middle = 0.5 * (edges[1:] + edges[:-1])
    step = np.radians(lon_step) * radius
    f = np.repeat(2.0 * rotation * np.sin(middle)[:, None], water.shape[1], axis=1)
    height = float(np.radians(lat_step) * radius)
    return Grid(water, step * np.cos(middle), step * np.cos(edges), height, f, periodic)


@dataclass(frozen=True)
class Record:
    """What the gauges saw.

    Attributes
    ----------
    time : ndarray, shape (nt,)
        Seconds.
    sea_level : ndarray, shape (nt, gauges)
        η in the gauge cells.
    steps : int
    cpu_seconds : float
        Processor time of the integration, without compilation.
    """

    time: Array
    sea_level: Array
    steps: int
    cpu_seconds: float


@numba.njit(cache=True, fastmath=True)
def _sea_level(e, u, v, hu, hv, width, side, height, water, loss, dt):
    ny, nx = e.shape
    for j in range(ny):
        for i in range(nx):
            if water[j, i]:
                east = (hu[j, i + 1] * u[j, i + 1] - hu[j, i] * u[j, i]) / width[j]
                north = side[j + 1] * hv[j + 1, i] * v[j + 1, i] - side[j] * hv[j, i] * v[j, i]
                change = east + north / (width[j] * height)
                e[j, i] = (e[j, i] - dt * change) * loss[j, i]


@numba.njit(cache=True, fastmath=True)
def _zonal(e, u, v, open_u, f, width, height, loss, gravity, nu, dt, new, periodic):
    ny, nx = e.shape
    for j in range(ny):
        for i in range(nx):
            if open_u[j, i]:
                w = i - 1 if i > 0 else nx - 1
                turn = 0.25 * (
                    f[j, i] * (v[j, i] + v[j + 1, i]) + f[j, w] * (v[j, w] + v[j + 1, w])
                )
                slope = gravity * (e[j, i] - e[j, w]) / width[j]
                spread = 0.0
                if nu > 0.0:
                    west = i - 1 if i > 0 else nx - 1
                    spread = (u[j, i + 1] - 2.0 * u[j, i] + u[j, west]) / width[j] ** 2
                    if j > 0 and open_u[j - 1, i]:
                        spread += (u[j - 1, i] - u[j, i]) / height**2
                    if j < ny - 1 and open_u[j + 1, i]:
                        spread += (u[j + 1, i] - u[j, i]) / height**2
                new[j, i] = (u[j, i] + dt * (turn - slope + nu * spread)) * loss[j, i]
    for j in range(ny):
        for i in range(nx):
            u[j, i] = new[j, i]
        if periodic:
            u[j, nx] = u[j, 0]


@numba.njit(cache=True, fastmath=True)
def _meridional(e, u, v, open_v, f, side, height, loss, gravity, nu, dt, new, periodic):
    ny, nx = e.shape
    for j in range(1, ny):
        for i in range(nx):
            if open_v[j, i]:
                turn = 0.25 * (
                    f[j, i] * (u[j, i] + u[j, i + 1])
                    + f[j - 1, i] * (u[j - 1, i] + u[j - 1, i + 1])
                )
                slope = gravity * (e[j, i] - e[j - 1, i]) / height
                spread = 0.0
                if nu > 0.0:
                    spread = (v[j + 1, i] - 2.0 * v[j, i] + v[j - 1, i]) / height**2
                    west = i - 1 if i > 0 else (nx - 1 if periodic else 0)
                    east = i + 1 if i < nx - 1 else (0 if periodic else i)
                    if open_v[j, west]:
                        spread += (v[j, west] - v[j, i]) / side[j] ** 2
                    if open_v[j, east]:
                        spread += (v[j, east] - v[j, i]) / side[j] ** 2
                new[j, i] = (v[j, i] + dt * (-turn - slope + nu * spread)) * loss[j, i]
    for j in range(1, ny):
        for i in range(nx):
            v[j, i] = new[j, i]


def integrate(
    grid: Grid,
    speed: Array | float,
    duration: float,
    gauges: NDArray[np.int_],
    *,
    source: tuple[NDArray[np.int_], Array] | None = None,
    source_time: Callable[[float], float] | None = None,
    initial: tuple[Array, Array, Array] | None = None,
    sponge: Array | float = 0.0,
    viscosity: float = 0.0,
    sample: float | None = None,
    gravity: float = 9.81,
    courant: float = 0.5,
) -> Record:
    """Integrate and record sea level at gauges.

    Parameters
    ----------
    grid : Grid
    speed : array, shape (ny, nx), or float
        Phase speed c of the mode (m/s).
    duration : float
        Seconds.
    gauges : int array, shape (n, 2)
        Row and column of the gauge cells.
    source : (cells, weights)
        Cells (int, (m, 2)) where η is forced, with weights (m,): dη/dt in m/s at unit
        `source_time`.
    source_time : callable
        Time function of the source, of seconds.
    initial : (η, u, v)
        State at the start, of shapes (ny, nx), (ny, nx + 1) and (ny + 1, nx); rest if missing.
    sponge : array (ny, nx) or float
        Rate of damping of everything (1/s).
    viscosity : float
        ν (m²/s).
    sample : float
        Seconds between records; every step if missing.
    gravity : float
        m/s².
    courant : float
        Largest c dt by the smallest cell side.

    Returns
    -------
    Record
    """
    c = np.array(np.broadcast_to(np.asarray(speed, float), grid.water.shape))
    dt = courant * min(grid.width[grid.water.any(axis=1)].min(), grid.height) / c[grid.water].max()
    every = 1 if sample is None else int(np.ceil(sample / dt))
    dt = dt if sample is None else sample / every
    steps = int(np.ceil(duration / dt))
    open_u, open_v, hu, hv = _faces(grid, c**2 / gravity)
    e, u, v = _start(grid, initial, open_u, open_v)
    loss_e, loss_u, loss_v = _damping(np.broadcast_to(sponge, grid.water.shape), dt)
    rows, columns = source[0].T if source is not None else np.zeros((2, 0), int)
    height, wrap = grid.height, grid.periodic
    physics = (gravity, viscosity, dt)
    zonal = (open_u, grid.f, grid.width, height, loss_u, *physics, np.zeros_like(u), wrap)
    meridional = (open_v, grid.f, grid.side, height, loss_v, *physics, np.zeros_like(v), wrap)
    volume = (hu, hv, grid.width, grid.side, height, grid.water, loss_e, dt)
    record = np.zeros((steps // every + 1, len(gauges)))
    record[0] = e[gauges[:, 0], gauges[:, 1]]
    started = 0.0
    for n in range(steps):
        if n == 2:  # everything is compiled by now
            started = time.process_time()
        _sea_level(e, u, v, *volume)
        if source is not None and source_time is not None:
            e[rows, columns] += dt * source_time((n + 0.5) * dt) * source[1]
        if n % 2:
            _meridional(e, u, v, *meridional)
            _zonal(e, u, v, *zonal)
        else:
            _zonal(e, u, v, *zonal)
            _meridional(e, u, v, *meridional)
        if (n + 1) % every == 0:
            record[(n + 1) // every] = e[gauges[:, 0], gauges[:, 1]]
    seconds = time.process_time() - started
    return Record(np.arange(len(record)) * every * dt, record, steps, seconds)


def _start(
    grid: Grid,
    initial: tuple[Array, Array, Array] | None,
    open_u: NDArray[np.bool_],
    open_v: NDArray[np.bool_],
) -> tuple[Array, Array, Array]:
    ny, nx = grid.water.shape
    if initial is None:
        return np.zeros((ny, nx)), np.zeros((ny, nx + 1)), np.zeros((ny + 1, nx))
    masks = (grid.water, open_u, open_v)
    e, u, v = (np.where(wet, part, 0.0) for wet, part in zip(masks, initial, strict=True))
    return e, u, v


def _faces(
    grid: Grid, depth: Array
) -> tuple[NDArray[np.bool_], NDArray[np.bool_], Array, Array]:
    """Open faces, and the depth on them (mean of both sides)."""
    wet, (ny, nx) = grid.water, grid.water.shape
    open_u, open_v = np.zeros((ny, nx + 1), bool), np.zeros((ny + 1, nx), bool)
    hu, hv = np.zeros((ny, nx + 1)), np.zeros((ny + 1, nx))
    open_u[:, 1:nx] = wet[:, 1:] & wet[:, :-1]
    hu[:, 1:nx] = 0.5 * (depth[:, 1:] + depth[:, :-1])
    if grid.periodic:
        open_u[:, 0] = open_u[:, nx] = wet[:, 0] & wet[:, -1]
        hu[:, 0] = hu[:, nx] = 0.5 * (depth[:, 0] + depth[:, -1])
    open_v[1:ny] = wet[1:] & wet[:-1]
    hv[1:ny] = 0.5 * (depth[1:] + depth[:-1])
    return open_u, open_v, hu, hv


def _damping(rate: Array, dt: float) -> tuple[Array, Array, Array]:
    """Factors per step on η, u and v."""
    factor = np.exp(-np.asarray(rate, float) * dt)
    ny, nx = factor.shape
    on_u, on_v = np.ones((ny, nx + 1)), np.ones((ny + 1, nx))
    on_u[:, 1:nx] = np.sqrt(factor[:, 1:] * factor[:, :-1])
    on_u[:, 0], on_u[:, nx] = factor[:, 0], factor[:, -1]
    on_v[1:ny] = np.sqrt(factor[1:] * factor[:-1])
    return factor, on_u, on_v
