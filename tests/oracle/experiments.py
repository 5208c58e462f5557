"""Shallow-water experiments on walls, junctions and straits, in scaled units.

Equatorial cases use L_e, T_e (so c = β = g = 1), the strait R and 1/f. Each sends one broadband
pulse and divides Fourier transforms, exp(−iωt): one integration answers all frequencies.
Sea level is extrapolated to the wall from the three cells next to it (quadratically): the
first cell alone reads exp(−f dx/2c) too low, 15 % at ŷ = 4 with twelve cells per L_e.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray
from shallow_water import Array, Record, integrate, plane_grid

ComplexArray = NDArray[np.complex128]
TO_WALL = np.array([15.0, -10.0, 3.0]) / 8.0
SAMPLE = 0.05


@dataclass(frozen=True)
class Transfer:
    """Complex amplitudes over frequency (rows) and place (columns), and what they cost."""

    frequency: Array
    place: Array
    amplitude: ComplexArray
    steps: int
    cpu_seconds: float


def ramp(x: Array, start: float, width: float, peak: float) -> Array:
    """Sponge rate that rises as a parabola over `width`."""
    return peak * np.clip((x - start) / width, 0.0, 1.0) ** 2


def transform(record: Record, series: Array, frequency: Array) -> ComplexArray:
    """∫ series exp(iωt) dt for each frequency (rows) and column of the series."""
    kernel = np.exp(1j * frequency[:, None] * record.time)
    return np.asarray(kernel @ series * (record.time[1] - record.time[0]))


def wall_series(record: Record, places: int) -> Array:
    """Sea level at the wall, of gauges ordered (place, two cells along it, three off it)."""
    cells = record.sea_level.reshape(len(record.time), places, 2, 3)
    return np.asarray(cells.mean(axis=2) @ TO_WALL)


def gauges_east(rows: NDArray[np.int_], columns: int) -> NDArray[np.int_]:
    """Gauge cells at a wall along the eastern edge, at the south side of the given rows."""
    off = columns - 1 - np.arange(3)
    return np.array([(r, k) for row in rows for r in (row - 1, row) for k in off])


def eastern(
    frequency: ArrayLike,
    latitude: ArrayLike,
    cells: int = 20,
    angle: float = 0.0,
    duration: float = 200.0,
    first_cell: bool = False,
) -> Transfer:
    """Kelvin pulse into an eastern wall; wall sea level per unit equatorial amplitude.

    Parameters
    ----------
    frequency, latitude : array_like
        ω̂ and the ŷ of the gauges.
    cells : int
        Cells per L_e.
    angle : float
        Of the coast to the meridian, degrees, leaning east towards the north. The grid is
        turned with the coast (f varies in both directions), so no staircase is involved.
    duration : float
        In T_e.
    first_cell : bool
        Read the cell next to the wall instead of the wall, to show what that does.
    """
    omega, north = np.asarray(frequency, float), np.asarray(latitude, float)
    sine, cosine = np.sin(np.radians(angle)), np.cos(np.radians(angle))
    step, off, along = 1.0 / cells, 12.0, 8.0 / cosine
    start = max(5.0, 4.0 * sine / cosine)  # west of where the coast meets ŷ = −4
    nx, ny = round(off * cells), 2 * round(along * cells)

    def pulse(di: float, dj: float, shape: tuple[int, int]) -> tuple[Array, Array, Array]:
        across = ((np.arange(shape[1]) + di) * step - off)[None, :]
        upward = ((np.arange(shape[0]) + dj - ny / 2) * step)[:, None]
        x, y = across * cosine + upward * sine, upward * cosine - across * sine
        return x, y, np.exp(-(((x + start) / 0.8) ** 2) / 2.0 - y**2 / 2.0)

    x, y, sea_level = pulse(0.5, 0.5, (ny, nx))
    current = [pulse(0.0, 0.5, (ny, nx + 1))[2] * cosine, pulse(0.5, 0.0, (ny + 1, nx))[2] * sine]
    edge = np.abs((np.arange(ny) + 0.5 - ny / 2) * step)[:, None]
    sponge = ramp(np.abs(y), 6.0, 2.0, 1.5) + ramp(-x, start + 3.0, 4.0, 1.0)
    sponge += ramp(edge, along - 1.0, 1.0, 1.0)
    grid = plane_grid(np.ones((ny, nx), bool), step, y)
    rows = np.round(north / cosine * cells).astype(int) + ny // 2
    record = integrate(
        grid, 1.0, duration, gauges_east(rows, nx), initial=(sea_level, *current),
        sponge=sponge, gravity=1.0, sample=SAMPLE,
    )
    arriving = np.sqrt(2 * np.pi) * 0.8 * np.exp(-((omega * 0.8) ** 2) / 2 + 1j * omega * start)
    series = wall_series(record, north.size)
    if first_cell:
        series = record.sea_level.reshape(-1, north.size, 2, 3).mean(axis=2)[..., 0]
    found = transform(record, series, omega) / arriving[:, None]
    return Transfer(omega, north, found, record.steps, record.cpu_seconds)


def western(
    frequency: ArrayLike, latitude: ArrayLike, cells: int = 20, duration: float = 150.0
) -> Transfer:
    """Coastal pulse from the north down a western wall, per unit amplitude at the first gauge.

    The last column is the equatorial Kelvin wave: sea level on the equator 4 L_e offshore,
    carried back to the wall at speed c. A viscosity of 2e-4 absorbs the short Rossby waves.
    """
    omega, north = np.asarray(frequency, float), np.asarray(latitude, float)
    step, off, along, source_at = 1.0 / cells, 9.0, 9.0, 6.2
    nx, ny = round(off * cells), 2 * round(along * cells)
    x, y = (np.arange(nx) + 0.5) * step, (np.arange(ny) + 0.5) * step - along
    sponge = ramp(np.abs(y)[:, None], along - 2, 2.0, 1.5) + ramp(x[None, :], off - 3, 3.0, 1.0)
    near = np.argwhere((np.abs(y - source_at) < 0.8)[:, None] & (x < 1.2)[None, :])
    at_x, at_y = x[near[:, 1]], y[near[:, 0]]
    weights = np.exp(-(((at_y - source_at) / 0.25) ** 2) / 2 - at_x * at_y)
    rows = np.round((north + along) * cells).astype(int)
    gauges = [(r, k) for row in rows for r in (row - 1, row) for k in (0, 1, 2)]
    column = round(4.0 * cells)
    gauges += [(r, k) for r in (ny // 2 - 1, ny // 2) for k in (column - 1, column)]
    record = integrate(
        plane_grid(np.ones((ny, nx), bool), step, y[:, None]), 1.0, duration, np.array(gauges),
        source=(near, weights), source_time=lambda t: float(np.exp(-(((t - 4) / 0.8) ** 2) / 2)),
        sponge=sponge, viscosity=2e-4, gravity=1.0, sample=SAMPLE,
    )
    at_wall = Record(record.time, record.sea_level[:, :-4], record.steps, record.cpu_seconds)
    coast = transform(record, wall_series(at_wall, north.size), omega)
    kelvin = transform(record, record.sea_level[:, -4:].mean(axis=1, keepdims=True), omega)
    found = np.hstack([coast, kelvin * np.exp(-4j * omega[:, None])]) / coast[:, :1]
    return Transfer(omega, np.append(north, np.nan), found, record.steps, record.cpu_seconds)


def strait(
    frequency: ArrayLike, width: float, length: float, cells: int = 20, duration: float = 80.0
) -> Transfer:
    """Coastal wave past the mouth of a strait: amplitude through it and across its mouth.

    A slab of thickness `length` parts two basins; a gap of `width` joins them. The wave comes
    along its southern side from the east, turns into the gap along its eastern wall and leaves
    along the northern side to the east; what jumps the mouth goes on to the west. Amplitudes
    are per unit amplitude at the corner, taken at two R from the corners and carried back to
    them at speed c.
    """
    omega = np.asarray(frequency, float)
    step, x_half, basin = 1.0 / cells, 6.0, 5.0
    nx, ns, nl = round(2 * x_half * cells), round(basin * cells), round(length * cells)
    x = (np.arange(nx) + 0.5) * step - x_half
    off = np.concatenate([(ns - 0.5 - np.arange(ns)), np.zeros(nl), np.arange(ns) + 0.5]) * step
    slab = np.repeat([False, True, False], [ns, nl, ns])
    sponge = ramp(np.abs(x)[None, :], x_half - 1.5, 1.5, 2.0) + ramp(off[:, None], 3.5, 1.5, 2.0)
    centre = width + 2.5
    near = np.argwhere((np.arange(2 * ns + nl) < ns)[:, None] & (np.abs(x - centre) < 1.0))
    weights = np.exp(-(((x[near[:, 1]] - centre) / 0.25) ** 2) / 2 - off[near[:, 0]])
    places = ((ns - 1, -1, width), (ns - 1, -1, -2.0), (ns + nl, 1, width + 2.0))
    gauges = np.array([
        (row + sign * q, round((at + x_half) * cells) + k)
        for row, sign, at in places for k in (-1, 0) for q in range(3)
    ])

    def run(water: NDArray[np.bool_]) -> tuple[ComplexArray, Record]:
        record = integrate(
            plane_grid(water, step, 1.0), 1.0, duration, gauges, source=(near, weights),
            source_time=lambda t: float(np.exp(-((t - 5) ** 2) / 2)), sponge=sponge,
            gravity=1.0, sample=SAMPLE,
        )
        return transform(record, wall_series(record, 3), omega), record

    closed = np.repeat(~slab[:, None], nx, axis=1)
    gap = slab[:, None] & ((x > 0) & (x < width))[None, :]
    incident, _ = run(closed)
    beyond, record = run(closed | gap)
    found = beyond[:, [2, 1]] / incident[:, :1] * np.exp(-2j * omega[:, None])
    return Transfer(omega, np.array([width, length]), found, record.steps, record.cpu_seconds)
