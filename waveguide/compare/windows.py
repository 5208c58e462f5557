"""Where and when to look for a signal: stretches of guide with their windows of time."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from waveguide.compare.columns import column_modes
from waveguide.compare.route_lines import RouteLine
from waveguide.constants import BETA_EQUATOR, SECONDS_PER_DAY
from waveguide.errors import InputError
from waveguide.geodesy import destination, wgs84, wrap_longitude

Array = NDArray[np.float64]

LONGEST_STRETCH = 1000e3
"""Stretches are cut at this length (m)."""

TIME_ERROR = 0.10
"""Relative error of a predicted time, as in `waveguide.compare.verdict`."""

LEAST_ERROR = 1.0
"""Days that a window is longer at either end at least."""


@dataclass(frozen=True)
class Window:
    """A stretch of guide and the time in which the signal passes it.

    Attributes
    ----------
    target : str
        Of the route.
    mode : int
    kind : str
        "coast", "equator", "strait", "facing coast" or "opening".
    start_position, end_position : (lon, lat)
        Degrees.
    start_distance, end_distance : float
        Along the route (m).
    opens, closes : float
        Days after the start of the event.
    width : float
        Distance from the guide at which the signal is e times weaker (m): R on a coast, √2 L_e on
        the equator.
    amplitude_ratio : float
        Sea level over that at the source, in the middle of the stretch.
    quantity : str
        What shows the mode best.
    depth : float
        Where to look (m); 0 for sea level.
    response : float
        Of the quantity at that depth per metre of sea level: metres of rise of isopycnals.
    """

    target: str
    mode: int
    kind: str
    start_position: tuple[float, float]
    end_position: tuple[float, float]
    start_distance: float
    end_distance: float
    opens: float
    closes: float
    width: float
    amplitude_ratio: float
    quantity: str
    depth: float
    response: float


def windows(lines: Sequence[RouteLine], duration: float, period: float) -> list[Window]:
    """Windows of all routes, in the order of travel.

    A window opens a tenth of the travel time (at least a day) before the front is due at its
    start. It closes as much after the front is due at its end plus the duration of the event and
    half a period, in which what came with the front has passed.

    Parameters
    ----------
    lines : sequence of RouteLine
    duration : float
        Of the event (days).
    period : float
        Dominant period (days).

    Returns
    -------
    list of Window
    """
    found: dict[tuple[object, ...], Window] = {}
    for line in lines:
        for first, last in stretches(line):
            # routes share their first stretches, which are told once
            key = (line.mode, *_place(line, first), *_place(line, last))
            if key not in found:
                found[key] = _window(line, first, last, duration + 0.5 * period)
    return list(found.values())


def stretches(line: RouteLine) -> list[tuple[int, int]]:
    """First and last vertex of runs along one leg, none longer than `LONGEST_STRETCH`."""
    runs: list[tuple[int, int]] = []
    start = 0
    for i in range(1, line.distance.size):
        long = line.distance[i] - line.distance[start] > LONGEST_STRETCH
        turns = line.leg[i] != line.leg[i - 1]
        if (long or turns) and i - 1 > start:
            runs.append((start, i - 1))
            start = i - 1
    last = line.distance.size - 1
    return [*runs, (start, last)] if last > start else runs


def guide_width(line: RouteLine) -> Array:
    """Distance from the guide at which the signal is e times weaker (m), at the vertices.

    exp(−d/R) off a coast; exp(−βy²/2c) about the equator, which is 1/e at √(2c/β).
    """
    speed = line.speed
    known = np.nan_to_num(speed, nan=float(np.nanmedian(speed)))
    return np.where(line.equatorial, np.sqrt(2.0 * known / BETA_EQUATOR), line.radius)


def seaward(line: RouteLine) -> Array:
    """Azimuth away from the land at the vertices, NaN on the equatorial guide (degrees).

    The coast lies on the right of travel in the northern hemisphere and on the left in the
    southern.

    Parameters
    ----------
    line : RouteLine

    Returns
    -------
    ndarray, shape (n,)
    """
    ahead, _, _ = wgs84().inv(line.lon[:-1], line.lat[:-1], line.lon[1:], line.lat[1:])
    travel = np.append(ahead, ahead[-1])
    side = np.where(line.lat >= 0.0, -90.0, 90.0)
    return np.where(line.equatorial, np.nan, (travel + side) % 360.0)


def _window(line: RouteLine, first: int, last: int, tail: float) -> Window:
    middle = (first + last) // 2
    opens, closes = line.time[[first, last]] / SECONDS_PER_DAY
    quantity, depth, response = _best_sign(line, middle)
    return Window(
        line.target, line.mode, line.kinds[int(line.leg[last])],
        _place(line, first), _place(line, last),
        float(line.distance[first]), float(line.distance[last]),
        max(float(opens - max(TIME_ERROR * opens, LEAST_ERROR)), 0.0),
        float(closes + max(TIME_ERROR * closes, LEAST_ERROR) + tail),
        float(guide_width(line)[middle]), float(line.amplitude[middle]),
        quantity, depth, response,
    )


def _place(line: RouteLine, at: int) -> tuple[float, float]:
    return float(wrap_longitude(line.lon[at])), float(line.lat[at])


def _best_sign(line: RouteLine, at: int) -> tuple[str, float, float]:
    """What shows a mode best, at which depth, and how much of it per metre of sea level.

    Baroclinic modes move isopycnals hundreds of times as far as sea level. What that does to
    temperature goes with ζN² (see `waveguide.compare.moorings`), so the depth is where the
    flat-bottom mode of the deep water off the guide has the most of it.
    """
    if line.mode == 0:
        return "sea level or bottom pressure", 0.0, 1.0
    lon, lat = _place(line, at)
    azimuth = float(seaward(line)[at])
    if np.isfinite(azimuth):
        away = destination(lon, lat, azimuth, float(line.radius[at]))
        lon, lat = float(away[0]), float(away[1])
    try:
        modes, (levels, n2) = column_modes(lon, lat)
    except InputError:  # no climatology there: sea level shows every mode
        return "sea level", 0.0, 1.0
    row = modes.displacement[list(modes.mode).index(line.mode)]
    best = int(np.argmax(np.abs(row) * np.interp(modes.depth, levels, n2)))
    return "temperature or isopycnal depth", float(modes.depth[best]), float(row[best])
