"""From a wind record to the stress that forces each step, on equidistant times."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray
from scipy.sparse import csr_array

from waveguide.constants import SECONDS_PER_DAY
from waveguide.errors import InputError
from waveguide.forcing.events import (
    Event,
    event_end,
    event_start,
    event_stress,
    within_reach,
)
from waveguide.forcing.samples import Samples
from waveguide.forcing.time_axis import Times, day, longest_gap, seconds, uniform_times
from waveguide.forcing.wind_file import WindFile, sampling_matrix, stress_chunks
from waveguide.network.graph import Network

Array = NDArray[np.float64]
Series = NDArray[np.float32]
Index = NDArray[np.int64]
STRONGEST = 30.0
"""Stress (Pa) under a wind of some 70 m/s."""

Removal = Literal["nothing", "mean", "annual cycle"]

YEAR = 365.2425 * SECONDS_PER_DAY
EVENT_POINTS = 4_000_000
"""Values of an invented wind that are in memory at a time."""


@dataclass(frozen=True)
class Forcing:
    """Stress on steps of a network.

    Attributes
    ----------
    steps : ndarray of int, shape (k,)
        Rising.
    time : ndarray of datetime64[ns], shape (nt,)
        Equidistant.
    step : float
        Interval of time (s).
    stress : ndarray of float32, shape (k, nt)
        In the direction of travel on a coast; zonal, as the Kelvin wave feels it, on the equator
        (Pa).
    covered : ndarray, shape (k,)
        Share of each step's wind that the record holds, 0 to 1.
    bridged : float
        Share of its values that were missing and bridged.
    """

    steps: Index
    time: Times
    step: float
    stress: Series
    covered: Array
    bridged: float = 0.0


def record_forcing(
    wind: WindFile, network: Network, samples: Samples, steps: Index, period: tuple[int, int],
    step: float, remove: Removal = "nothing",
) -> Forcing:
    """Forcing by a record on a grid.

    Parameters
    ----------
    wind : WindFile
    network : Network
    samples : Samples
        Of `steps`.
    steps : ndarray of int, shape (k,)
    period : (int, int)
        Records from the first up to, but without, the second.
    step : float
        Interval of the equidistant times (s).
    remove : {"nothing", "mean", "annual cycle"}
        What is taken off the stress.

    Returns
    -------
    Forcing

    Raises
    ------
    InputError
        If values are missing in too long a row, or impossible.
    """
    first, last = period
    matrix, covered = sampling_matrix(wind, samples)
    parts = [
        csr_array((weight, (samples.row, np.arange(samples.row.size))),
                  shape=(steps.size, samples.row.size)) @ matrix
        for weight in (samples.eastward, samples.northward)
    ]
    cells = np.unique(np.concatenate([part.indices for part in parts])).astype(np.int64)
    stress = np.zeros((steps.size, last - first), dtype=np.float32)
    if cells.size:
        east, north = (csr_array(part[:, cells], dtype=np.float64) for part in parts)
        for where, x, y in stress_chunks(wind, cells, first, last):
            stress[:, where] = east @ x.T + north @ y.T
    strongest = float(np.nanmax(np.abs(stress), initial=0.0))
    if strongest > STRONGEST:
        raise InputError(
            f"wind: the record makes a stress of {strongest:.3g} Pa along the guide, as no storm "
            "does; mark missing values as such (_FillValue), or choose a period without them "
            "(wind.start, wind.end)"
        )
    bridged = fill_gaps(stress, wind.time[first:last], _places(network, steps))
    record = seconds(wind.time[first:last] - wind.time[first])
    time = uniform_times(wind.time[first], wind.time[last - 1], step)
    wanted = step * np.arange(time.size, dtype=float)
    stress = without(resampled(stress, record, wanted), step, remove)
    share = np.hypot(samples.eastward, samples.northward)
    found = np.bincount(samples.row, share * covered, minlength=steps.size)
    covered = found / _total(samples, share, steps.size)
    return Forcing(steps, time, step, stress, covered, bridged)


def _total(samples: Samples, share: Array, count: int) -> Array:
    return np.maximum(np.bincount(samples.row, share, minlength=count), 1e-30)


def event_forcing(
    events: list[Event], samples: Samples, steps: Index, time: Times, step: float
) -> Forcing:
    """Forcing by invented winds.

    Parameters
    ----------
    events : list of Event
    samples : Samples
        Of `steps`.
    steps : ndarray of int, shape (k,)
    time : ndarray of datetime64[ns], shape (nt,)
        Equidistant.
    step : float
        Interval of time (s).

    Returns
    -------
    Forcing
    """
    stress = np.zeros((steps.size, time.size), dtype=np.float32)
    for event in events:
        near = within_reach(event, samples.lon, samples.lat)
        active = np.nonzero((time >= event_start(event)) & (time <= event_end(event)))[0]
        size = max(1, EVENT_POINTS // max(near.size, 1))
        for when in np.array_split(active, max(1, -(-active.size // size))):
            x, y = event_stress(event, samples.lon[near], samples.lat[near], time[when])
            pushed = samples.eastward[near] * x + samples.northward[near] * y
            for column, values in zip(when.tolist(), pushed, strict=True):
                stress[:, column] += np.bincount(samples.row[near], values, minlength=steps.size)
    return Forcing(steps, time, step, stress, np.ones(steps.size))


def fill_gaps(stress: Series, time: Times, places: Sequence[str]) -> float:
    """Bridge missing values by straight lines, in place; the share of values bridged.

    Parameters
    ----------
    stress : ndarray, shape (k, nt)
    time : ndarray of datetime64[ns], shape (nt,)
    places : sequence of str
        What a person calls each row.

    Returns
    -------
    float

    Raises
    ------
    InputError
        If values are missing for too long; it says where and when.
    """
    problems, bridged = [], 0
    longest, usual = longest_gap(time), float(np.median(seconds(time[1:] - time[:-1])))
    for row, missing in _rows_with_gaps(stress):
        edges = np.nonzero(np.diff(np.concatenate([[0], missing.astype(int), [0]])))[0]
        lengths = edges[1::2] - edges[::2]
        if lengths.max() * usual > longest:
            run = int(np.argmax(lengths))
            first, last = time[edges[2 * run]], time[edges[2 * run + 1] - 1]
            problems.append(f"{day(first)} to {day(last)} at {places[row]}")
            continue
        known = np.nonzero(~missing)[0]
        stress[row, missing] = np.interp(np.nonzero(missing)[0], known, stress[row, known])
        bridged += int(missing.sum())
    if problems:
        raise InputError(
            f"wind: values are missing for more than {longest / SECONDS_PER_DAY:g} days in a row "
            f"at {len(problems)} place(s), first {problems[0]}; fill them, or choose a period "
            "without them (wind.start, wind.end)"
        )
    return bridged / max(stress.size, 1)


def _places(network: Network, steps: Index) -> list[str]:
    tail = network.tail[steps]
    return [f"{lon:.1f}°E {lat:.1f}°N"
            for lon, lat in zip(network.lon[tail], network.lat[tail], strict=True)]


def _rows_with_gaps(stress: Series) -> Iterator[tuple[int, NDArray[np.bool_]]]:
    for row in np.nonzero(~np.isfinite(stress).all(axis=1))[0]:
        yield int(row), ~np.isfinite(stress[row])


def resampled(stress: Series, record: Array, wanted: Array) -> Series:
    """Stress at other times, by straight lines between records.

    Parameters
    ----------
    stress : ndarray, shape (k, nt)
    record, wanted : ndarray, shape (nt,) and (nw,)
        Times (s), `wanted` within `record`.

    Returns
    -------
    ndarray, shape (k, nw)
    """
    if record.size == wanted.size and np.allclose(record, wanted, atol=1.0):
        return stress
    left = np.clip(np.searchsorted(record, wanted, "right") - 1, 0, record.size - 2)
    share = ((wanted - record[left]) / (record[left + 1] - record[left])).astype(np.float32)
    return np.asarray((1.0 - share) * stress[:, left] + share * stress[:, left + 1], np.float32)


def without(stress: Series, step: float, remove: Removal) -> Series:
    """Stress without its mean, or without mean, annual and semi-annual harmonic.

    Parameters
    ----------
    stress : ndarray, shape (k, nt)
    step : float
        Interval of time (s).
    remove : {"nothing", "mean", "annual cycle"}

    Returns
    -------
    ndarray, shape (k, nt)
        The harmonics are fitted by least squares.
    """
    if remove == "nothing":
        return stress
    count = stress.shape[1]
    angle = 2.0 * np.pi * step / YEAR * np.arange(count, dtype=float)
    waves: list[Callable[[Array], Array]] = [np.cos, np.sin]
    columns = [np.ones(count)]
    if remove == "annual cycle":
        columns += [wave(times * angle) for times in (1.0, 2.0) for wave in waves]
    basis, _ = np.linalg.qr(np.stack(columns, axis=1))
    basis = basis.astype(np.float32)
    return np.asarray(stress - (stress @ basis) @ basis.T)
