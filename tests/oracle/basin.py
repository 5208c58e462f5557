"""A route round an ocean with straight coasts: down the west, along the equator, up the east."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray
from shallow_water import Array
from whole_route import Domain, Gauges, edge_sponge, patch, whole_route

from waveguide.constants import BETA_EQUATOR, EARTH_RADIUS, SECONDS_PER_DAY, coriolis
from waveguide.propagation.dispersion import segment_exponent
from waveguide.propagation.equator import (
    eastern_junction,
    eastern_wall,
    scaled_frequency,
    western_junction,
)

ComplexArray = NDArray[np.complex128]
WIDTH = 60.0
GAUGES = [(0.0, 20.0), (0.0, 15.0), (0.0, 10.0), (WIDTH, 0.0), (WIDTH, 10.0), (WIDTH, 20.0),
          (WIDTH, 30.0), (WIDTH, -20.0)]


def integrate_basin(
    speed: float, step: float, days: float, burst_days: float, viscosity: float
) -> tuple[Domain, Gauges]:
    """Integrate a Gaussian burst of sea level off 26° N at the western coast.

    `burst_days` is the standard deviation of the burst; it peaks four of them after the start.
    """
    columns, rows = round(WIDTH / step), round(80.0 / step)
    water = np.ones((rows, columns), bool)
    water[:, [0, -1]] = False
    domain = Domain(water, 0.0, -40.0, step)

    def burst(t: float) -> float:
        day = t / SECONDS_PER_DAY
        return float(np.exp(-0.5 * (day / burst_days - 4.0) ** 2)) / SECONDS_PER_DAY

    gauges = whole_route(
        domain, speed, patch(domain, 1.5 * step, 26.0, 1.0), burst, GAUGES,
        days * SECONDS_PER_DAY, sponge=edge_sponge(domain, 6.0, 4e-5, "NS"),
        viscosity=viscosity, sample=21600.0,
    )
    return domain, gauges


def basin_theory(
    time: Array, first: Array, lon: Array, lat: Array, speed: float, step: float
) -> Array:
    """Sea level at every gauge from that at the first one, by theory.

    Fourier transforms are padded to four times the length of the record.
    """
    padded = 4 * time.size
    omega = 2 * np.pi * np.fft.rfftfreq(padded, time[1] - time[0])
    spectrum = np.fft.rfft(first, padded).conj()  # exp(−iωt) convention
    transfer = [_transfer(omega, lat[0], x, y, speed, step) for x, y in zip(lon, lat, strict=True)]
    series = [np.fft.irfft((spectrum * g).conj(), padded)[: time.size] for g in transfer]
    return np.array(series).T


def _transfer(
    omega: Array, start: float, lon: float, lat: float, speed: float, step: float
) -> ComplexArray:
    east, west = eastern_junction(omega, speed), western_junction(omega, speed)
    matching = float(east.latitude[0])
    if lon < WIDTH / 2:
        return _coast(omega, start, lat, speed)
    across = np.radians(WIDTH - 2 * step) * EARTH_RADIUS
    on_equator = _coast(omega, start, matching, speed) * west.amplitude
    at_wall = on_equator * np.exp(1j * omega * across / speed)
    if abs(lat) > matching:
        return at_wall * east.amplitude * _coast(omega, matching, abs(lat), speed)
    frequency = np.minimum(scaled_frequency(omega, speed), 3.0)
    distance = float(np.abs(coriolis(lat)) / np.sqrt(BETA_EQUATOR * speed))
    return at_wall * eastern_wall(frequency, distance)


def _coast(omega: Array, start: float, end: float, speed: float) -> ComplexArray:
    """Transfer function along a meridional coast, half a degree at a time."""
    count = 2 + round(2 * abs(end - start))
    f = np.abs(coriolis(np.linspace(start, end, count + 1)))
    length = np.radians(abs(end - start)) * EARTH_RADIUS / count
    exponent = segment_exponent(omega[:, None], speed, f[:-1], f[1:], length)
    return np.asarray(np.exp(exponent.sum(axis=1)))


def half_height_and_peak(time: Array, series: Array) -> tuple[float, float, float]:
    """Times (days) of the first rise to half the peak and of the peak, and the peak itself."""
    top = int(np.argmax(series))
    first = int(np.flatnonzero(series > 0.5 * series[top])[0])
    rise = np.interp(0.5 * series[top], series[first - 1 : first + 1], time[first - 1 : first + 1])
    left, middle, right = series[top - 1 : top + 2]
    shift = 0.5 * (left - right) / (left - 2 * middle + right)
    peak = time[top] + shift * (time[1] - time[0])
    return float(rise) / SECONDS_PER_DAY, peak / SECONDS_PER_DAY, float(middle)
