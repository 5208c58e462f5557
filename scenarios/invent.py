"""Invent the records of the shipped scenarios, and model output to try `lookout` on.

Nothing here was measured. Series are red noise, a season, and one signal that all places of a
scenario share, later and smaller by numbers written below; the dates lie in the future so that
nobody takes them for data.

    python scenarios/invent.py records        writes the CSV files beside this file
    python scenarios/invent.py model FILE.nc  writes daily sea level of the equatorial Pacific
"""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

HERE = Path(__file__).parent
START = np.datetime64("2031-01-01")
EVENT = np.datetime64("2034-03-05")
RADIUS = 6.371e6

Array = NDArray[np.float64]


def red_noise(generator: np.random.Generator, size: int, memory: float) -> Array:
    """Unit-variance noise that remembers the day before by `memory`."""
    kicks = np.sqrt(1.0 - memory**2) * generator.standard_normal(size + 300)
    level = np.zeros(size + 300)
    for day in range(1, level.size):
        level[day] = memory * level[day - 1] + kicks[day]
    return level[300:]


def shared_signal(generator: np.random.Generator, size: int) -> Array:
    """Slow noise in steps of a tenth of a day, with 100 days before the first record."""
    return red_noise(generator, 10 * (size + 100), 0.9 ** (1.0 / 20.0))


def taken(signal: Array, size: int, lag: float) -> Array:
    """Daily values of the signal, `lag` days late."""
    start = 1000 - round(10 * lag)
    return signal[start : start + 10 * size : 10]


def burst(size: int, lag: float, length: float) -> Array:
    """A box of the event's length that starts `lag` days after the event."""
    days = np.arange(size) + 0.5 - float((EVENT - START) / np.timedelta64(1, "D"))
    return np.clip(0.5 * length - np.abs(days - lag - 0.5 * length) + 0.5, 0.0, 1.0)


def write(name: str, columns: dict[str, Array]) -> None:
    """A CSV file with a column of dates; missing values are empty."""
    size = len(next(iter(columns.values())))
    lines = [",".join(["date", *columns])]
    for day in range(size):
        cells = ["" if np.isnan(c[day]) else f"{c[day]:.1f}" for c in columns.values()]
        lines.append(",".join([str(START + day), *cells]))
    (HERE / name).write_text("\n".join(lines) + "\n", encoding="utf-8")


def holes(generator: np.random.Generator, values: Array, count: int) -> Array:
    """Values with some gaps of one to twenty days."""
    values = values.copy()
    for start in generator.integers(0, values.size - 20, count):
        values[start : start + generator.integers(1, 21)] = np.nan
    return values


def peru_gauges() -> None:
    """Five years of sea level (mm) at four gauges of Peru and Chile, and at one that saw nothing.

    From La Libertad the signal is 3.0, 6.4 and 9.8 days late; Talcahuano has noise alone, and
    Matarani misses a month after the event.
    """
    generator = np.random.default_rng(31)
    size = 5 * 365
    signal = shared_signal(generator, size)
    season = 60.0 * np.cos(2.0 * np.pi * np.arange(size) / 365.2425)
    places = {  # lag and amplitude of the signal (mm), lag of the burst after the event
        "La Libertad": (0.0, 30.0, 56.0), "Callao": (3.0, 29.0, 59.0),
        "Matarani": (6.4, 28.0, 62.0), "Antofagasta": (9.8, 27.0, 66.0),
    }
    columns = {}
    for name, (lag, height, due) in places.items():
        level = 1500.0 + season + height * taken(signal, size, lag) + 200.0 * burst(size, due, 15.0)
        columns[name] = holes(generator, level + 12.0 * red_noise(generator, size, 0.8), 3)
    columns["Matarani"][1200:1230] = np.nan
    noise = 1500.0 + season + 30.0 * red_noise(generator, size, 0.85)
    columns["Talcahuano"] = holes(generator, noise, 8)
    write("peru_gauges.csv", columns)


def equator_mooring() -> None:
    """Five years at two moorings on the equator, 170W and 140W, that a first mode passes.

    Dynamic height (dyn-cm) at both; at 140W also temperature at 120 m (°C) and the eastward
    current at 30 m (cm/s) of a first mode with 2.7 m/s. The lag is 14.1 days.
    """
    generator = np.random.default_rng(32)
    size = 5 * 365
    signal = shared_signal(generator, size)
    west, east = taken(signal, size, 0.0), taken(signal, size, 14.1)
    noise = [red_noise(generator, size, 0.9) for _ in range(4)]
    write("equator_mooring.csv", {
        "height 170W": holes(generator, 95.0 + 5.0 * west + 2.0 * noise[0], 10),
        "height 140W": holes(generator, 93.0 + 4.6 * east + 2.0 * noise[1], 10),
        "temperature 140W": holes(generator, 22.0 + 0.9 * east + 0.5 * noise[2], 10),
        "current 140W": holes(generator, 16.0 * east + 9.0 * noise[3], 10),
    })


def model(path: Path) -> None:
    """Daily sea level (m) on half a degree from Papua to Peru: one wave of 2.5 m/s in noise."""
    import xarray as xr

    generator = np.random.default_rng(33)
    lon, lat = np.arange(145.0, 290.1, 0.5), np.arange(-15.0, 15.1, 0.5)
    days = np.arange(-10, 130)
    x, y = np.radians(lon - 165.0) * RADIUS, np.radians(lat) * RADIUS
    age = days[:, None] - 7.5 - x / 2.5 / 86400.0
    wave = 0.08 * np.exp(-((age / 6.0) ** 2)) * np.clip((lon - 155.0) / 10.0, 0.0, 1.0)
    shape = np.exp(-(2.29e-11 * y**2) / (2.0 * 2.5))
    noise = np.stack([
        red_noise(generator, days.size, 0.8) for _ in range(lat.size * lon.size)
    ], axis=1).reshape(days.size, lat.size, lon.size)
    level = wave[:, None, :] * shape[:, None] + 0.03 * noise
    dataset = xr.Dataset(
        {"zos": (("time", "lat", "lon"), level.astype(np.float32),
                 {"units": "m", "standard_name": "sea_surface_height_above_geoid"})},
        {"time": (EVENT + days).astype("datetime64[ns]"),
         "lat": ("lat", lat, {"units": "degrees_north", "standard_name": "latitude"}),
         "lon": ("lon", lon, {"units": "degrees_east", "standard_name": "longitude"})},
        {"title": "invented model output", "Conventions": "CF-1.11"},
    )
    dataset.to_netcdf(path, engine="netcdf4",
                      encoding={"zos": {"chunksizes": (10, lat.size, lon.size), "zlib": True}})


if __name__ == "__main__":
    if sys.argv[1:] == ["records"]:
        peru_gauges()
        equator_mooring()
    elif len(sys.argv) == 3 and sys.argv[1] == "model":
        model(Path(sys.argv[2]))
    else:
        sys.exit(__doc__)
