"""Alongshore wind at stations: its stress, or an upwelling index, from CSV files.

An upwelling index is the offshore Ekman transport of a wind along the coast. Wind that blows in
the direction of travel (coast on its right in the north, on its left in the south) moves water
onshore in both hemispheres, so the stress in the direction of travel is τ_s = −ρ₀ |f| × index.
"""

from __future__ import annotations

import csv
import gzip
import zlib
from dataclasses import dataclass
from pathlib import Path
from typing import Literal

import numpy as np
from numpy.typing import NDArray
from scipy.spatial import cKDTree

from waveguide.constants import REFERENCE_DENSITY, coriolis
from waveguide.errors import InputError
from waveguide.forcing.projection import Forcing, Removal, fill_gaps, resampled, without
from waveguide.forcing.time_axis import Times, check_order, seconds, uniform_times
from waveguide.geodesy import arc, geodesic_length, unit_vectors
from waveguide.network.graph import Network, StepKind

Array = NDArray[np.float64]
Index = NDArray[np.int64]
Measure = Literal["alongshore stress", "upwelling index"]

FARTHEST = 600e3
"""A station belongs to the nearest coast within this distance (m)."""

LARGEST: dict[Measure, float] = {"alongshore stress": 3.0, "upwelling index": 3000.0}
"""A record with 1 % of its values beyond these is in another unit (Pa; m³/s per 100 m of coast)."""


@dataclass(frozen=True)
class StationWinds:
    """Alongshore stress at stations.

    Attributes
    ----------
    name : list of str
    lon, lat : ndarray, shape (k,)
        Degrees.
    time : ndarray of datetime64[ns], shape (nt,)
        Rising.
    stress : ndarray, shape (k, nt)
        In the direction of travel (Pa), NaN where missing.
    """

    name: list[str]
    lon: Array
    lat: Array
    time: Times
    stress: Array


def read_stations(values: Path, places: Path, measure: Measure) -> StationWinds:
    """Read alongshore winds.

    Parameters
    ----------
    values : Path
        CSV with a column `date` (ISO 8601, UTC) and one of values for each station.
    places : Path
        CSV with columns `station`, `lat`, `lon` (degrees).
    measure : {"alongshore stress", "upwelling index"}
        Stress in the direction of travel (Pa), or offshore Ekman transport (m³/s per 100 m).

    Returns
    -------
    StationWinds

    Raises
    ------
    InputError
        With every problem of both files.
    """
    position = _positions(places)
    header, rows = _table(values)
    if not header or header[0] != "date":
        raise InputError(
            f"{values.name}: the first column is {header[0] if header else ''!r}; it must be "
            "'date', followed by one column for each station"
        )
    names = header[1:]
    unknown = [name for name in names if name not in position]
    if unknown or not names:
        raise InputError(
            f"{values.name}: no position for station(s) {', '.join(unknown) or '(none given)'} in "
            f"{places.name}; its stations are {', '.join(position)}"
        )
    time = _dates([row[0] for row in rows], values)
    check_order(time, values)
    table = np.array([[_number(text, values, r) for text in row[1:]]
                      for r, row in enumerate(rows, start=2)]).T
    largest = float(np.nanpercentile(np.abs(table), 99.0))
    if largest > LARGEST[measure]:
        raise InputError(
            f"{values.name}: one value in a hundred exceeds {largest:g}, which is no {measure} in "
            f"{'Pa' if measure == 'alongshore stress' else 'm³/s per 100 m of coast'}; convert it, "
            "or correct quantity in [wind]"
        )
    worst = float(np.nanmax(np.abs(table)))
    if worst > 10.0 * LARGEST[measure]:  # daily indices of up to 9676 are on record
        raise InputError(
            f"{values.name}: a value of size {worst:g} is no {measure}, but may stand for a "
            "missing one; leave its cell empty"
        )
    lon, lat = np.array([position[name] for name in names]).T
    factor = np.ones(len(names))
    if measure == "upwelling index":
        factor = -REFERENCE_DENSITY * np.abs(coriolis(lat)) / 100.0
    return StationWinds(names, lon, lat, time, table * factor[:, None])


def _table(path: Path) -> tuple[list[str], list[list[str]]]:
    """Header and rows of a CSV file, each row as long as the header."""
    try:
        content = path.read_bytes()
        text = (gzip.decompress(content) if path.suffix == ".gz" else content).decode("utf-8-sig")
        rows = [[cell.strip() for cell in row] for row in csv.reader(text.splitlines()) if any(row)]
    except (OSError, EOFError, UnicodeDecodeError, zlib.error, csv.Error) as error:
        raise InputError(
            f"{path.name}: it cannot be read as CSV ({error}); save it as CSV in UTF-8"
        ) from None
    if len(rows) < 2:
        raise InputError(f"{path.name}: it has no rows of values below a header")
    wrong = [number for number, row in enumerate(rows, start=1) if len(row) != len(rows[0])]
    if wrong:
        raise InputError(
            f"{path.name}: row {wrong[0]} has {len(rows[wrong[0] - 1])} values and the header "
            f"{len(rows[0])}; write one for each column, empty where it is missing"
        )
    return rows[0], rows[1:]


def _positions(path: Path) -> dict[str, tuple[float, float]]:
    """Longitude and latitude of every station."""
    header, rows = _table(path)
    absent = [name for name in ("station", "lat", "lon") if name not in header]
    if absent:
        raise InputError(
            f"{path.name}: no column {' and '.join(map(repr, absent))}; it needs station, lat, lon"
        )
    at = [header.index(name) for name in ("station", "lon", "lat")]
    found = {}
    for number, row in enumerate(rows, start=2):
        lon, lat = _number(row[at[1]], path, number), _number(row[at[2]], path, number)
        if not (-180.0 <= lon <= 360.0 and -90.0 <= lat <= 90.0):
            raise InputError(
                f"{path.name} row {number}: longitude {lon:g}, latitude {lat:g} are no position in "
                "degrees; are they swapped?"
            )
        found[row[at[0]]] = (lon, lat)
    return found


def _number(text: str, path: Path, row: int) -> float:
    if text == "":
        return float("nan")
    try:
        return float(text)
    except ValueError:
        raise InputError(
            f"{path.name} row {row}: {text!r} is no number; leave the cell empty where a value is "
            "missing"
        ) from None


def _dates(texts: list[str], path: Path) -> Times:
    try:
        return np.array([text.removesuffix("Z") for text in texts], dtype="datetime64[ns]")
    except ValueError as error:
        raise InputError(
            f"{path.name}: a date cannot be read ({error}); write dates as 2031-03-05 or "
            "2031-03-05T12:00:00, in UTC"
        ) from None


def station_forcing(
    winds: StationWinds, network: Network, speed: Array, steps: Index, period: tuple[int, int],
    step: float, remove: Removal = "nothing",
) -> Forcing:
    """Forcing by winds at stations.

    Parameters
    ----------
    winds : StationWinds
    network : Network
    speed : ndarray, shape (n,)
        Phase speed, NaN where the mode is not carried.
    steps : ndarray of int, shape (k,)
    period : (int, int)
        Records from the first up to, but without, the second.
    step : float
        Interval of the equidistant times (s).
    remove : {"nothing", "mean", "annual cycle"}

    Returns
    -------
    Forcing
        Between two stations on one coast stress changes linearly along it; half-way beyond the
        outermost it stays, and farther off there is none (`covered` is 0).

    Raises
    ------
    InputError
        If a station lies off every coast, or values are missing in too long a row.
    """
    weight = _weights(winds, network, speed, steps)
    first, last = period
    record = winds.time[first:last]
    stress = np.asarray(winds.stress[:, first:last], np.float32)
    bridged = fill_gaps(stress, record, [f"station {name}" for name in winds.name])
    time = uniform_times(record[0], record[-1], step)
    wanted = step * np.arange(time.size, dtype=float)
    stress = without(resampled(stress, seconds(record - record[0]), wanted), step, remove)
    covered = (weight.sum(axis=1) > 0.0).astype(float)
    along = np.asarray(weight @ stress, np.float32)
    return Forcing(steps, time, step, along, covered, bridged)


def _weights(winds: StationWinds, network: Network, speed: Array, steps: Index) -> Array:
    """Weight of every station at every step, shape (steps, stations)."""
    node = _nodes(winds, network, speed)
    weight = np.zeros((steps.size, len(winds.name)))
    along = np.nonzero(network.kind[steps] == StepKind.COAST)[0]
    line = network.line[network.tail[steps[along]]]
    for number in np.unique(network.line[node]):
        here = np.nonzero(network.line[node] == number)[0]
        rows = along[line == number]
        weight[rows] += _weights_on_line(network, int(number), node, here, steps[rows])
    return weight


def _nodes(winds: StationWinds, network: Network, speed: Array) -> Index:
    """Coast node nearest to every station."""
    coast = np.nonzero(np.isfinite(network.offshore) & np.isfinite(speed))[0]
    tree = cKDTree(unit_vectors(network.lon[coast], network.lat[coast]))
    distance, nearest = tree.query(unit_vectors(winds.lon, winds.lat))
    far = [name for name, away in zip(winds.name, arc(distance), strict=True) if away > FARTHEST]
    if far:
        raise InputError(
            f"wind.stations: {', '.join(far)} lie(s) more than {FARTHEST / 1e3:.0f} km from any "
            "coast that the mode follows; correct the position, or leave the station out"
        )
    return np.asarray(coast[nearest])


def _weights_on_line(
    network: Network, line: int, node: Index, here: Index, steps: Index
) -> Array:
    """Weights of the stations `here` on one coast for its steps."""
    members = np.nonzero(network.line == line)[0]
    ring = np.append(members, members[0])
    apart = geodesic_length(network.lon[ring[:-1]], network.lat[ring[:-1]],
                            network.lon[ring[1:]], network.lat[ring[1:]])
    along = np.concatenate([[0.0], np.cumsum(apart)])
    whole = along[-1]
    at = along[node[here] - members[0]]
    # The ring is cut where no station is, so that stations lie in a row.
    order = np.argsort(at)
    gap = np.diff(np.append(at[order], at[order[0]] + whole))
    start = at[order[(int(np.argmax(gap)) + 1) % order.size]] - 0.5 * gap.max()
    at = (at - start) % whole
    order = np.argsort(at)
    places = (along[network.tail[steps] - members[0]] - start) % whole
    result = np.zeros((steps.size, node.size))
    reach = 0.5 * float(np.median(np.diff(at[order]))) if here.size > 1 else 200e3
    inside = (places >= at[order[0]] - reach) & (places <= at[order[-1]] + reach)
    for rank, station in enumerate(order):
        unit = np.zeros(here.size)
        unit[rank] = 1.0
        result[inside, here[station]] = np.interp(places[inside], at[order], unit)
    return result
