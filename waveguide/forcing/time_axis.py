"""Times of a wind record: reading them, and what is refused."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from waveguide.errors import InputError

Array = NDArray[np.float64]
Times = NDArray[np.datetime64]

CALENDARS = ("standard", "gregorian", "proleptic_gregorian")
"""Calendars whose days are those of the sea; the first two are one."""

LONGEST_GAP = 10.0 * 86400.0
"""Gaps of up to ten days (s), or of three records if that is longer, are bridged by straight
lines."""

MOST_TIMES = 250_000
"""Steps of a response: 28 years at 1 h. More need more memory than a computer has."""

_MOST_RECORDS = 3.0

_UNEVEN = 1.6
"""Neighbouring intervals (28 and 31 days) that differ by less are no gap."""


def decode_times(values: Array, attributes: Mapping[str, Any], path: str | Path) -> Times:
    """Times of a CF time coordinate.

    Parameters
    ----------
    values : ndarray, shape (nt,)
        As stored.
    attributes : mapping
        With `units` and, where it is not the usual one, `calendar`.
    path : str or Path
        For the messages.

    Returns
    -------
    ndarray of datetime64[ns], shape (nt,)
        UTC.

    Raises
    ------
    InputError
        If the units do not parse, the calendar is not that of the real world, or a time is missing.
    """
    import cftime

    units, calendar = str(attributes.get("units", "")), attributes.get("calendar", "standard")
    if str(calendar).lower() not in CALENDARS:
        raise InputError(
            f"data file {path}: its calendar is {calendar!r}, whose dates are not those of gauges "
            "and moorings; use a record in the standard calendar, or convert it (cdo "
            "setcalendar,standard) and see to the days that are missing then"
        )
    if not np.isfinite(values).all():
        raise InputError(f"data file {path}: a time is missing; repair or cut out those records")
    try:
        dates = cftime.num2date(values, units, "standard", only_use_cftime_datetimes=False,
                                only_use_python_datetimes=True)
    except (ValueError, OverflowError) as error:
        raise InputError(
            f"data file {path}: units of time {units!r} do not parse ({error}); write them as in "
            "'days since 1990-01-01 00:00:00', in days, hours, minutes or seconds"
        ) from None
    return np.array(dates, dtype="datetime64[us]").astype("datetime64[ns]")


def check_order(times: Times, path: str | Path) -> None:
    """Refuse times that do not rise.

    Parameters
    ----------
    times : ndarray of datetime64[ns], shape (nt,)
    path : str or Path
        For the message.

    Raises
    ------
    InputError
    """
    wrong = np.nonzero(np.diff(times) <= np.timedelta64(0, "ns"))[0]
    if wrong.size:
        k = int(wrong[0])
        raise InputError(
            f"data file {path}: time {day(times[k])} is followed by {day(times[k + 1])}; times "
            "must rise without repetition: sort the records, and give files in the order of time"
        )


def bridged_gaps(times: Times) -> list[str]:
    """Refuse long gaps between times; what is bridged, in words.

    Parameters
    ----------
    times : ndarray of datetime64[ns], shape (nt,)
        Rising.

    Returns
    -------
    list of str
        Cautions.

    Raises
    ------
    InputError
    """
    if times.size < 2:
        raise InputError(
            f"wind: the record holds {times.size} times in the period asked for, and a response "
            "needs two at least; see wind.start and wind.end"
        )
    interval = seconds(times[1:] - times[:-1])
    usual = float(np.median(interval))
    gaps = np.nonzero(interval > _UNEVEN * usual)[0]
    long = [k for k in gaps if interval[k] - usual > longest_gap(times)]
    if long:
        places = ", ".join(f"{day(times[k])} to {day(times[k + 1])}" for k in long[:5])
        raise InputError(
            f"wind: records are missing in {len(long)} gap(s) longer than "
            f"{longest_gap(times) / 86400.0:g} days: {places}; fill them, or choose a period "
            "without them (wind.start, wind.end)"
        )
    if not gaps.size:
        return []
    missing = int(np.round(interval[gaps] / usual - 1.0).sum())
    return [f"{missing} missing record(s) of the wind bridged by straight lines, the first after "
            f"{day(times[gaps[0]])}"]


def longest_gap(times: Times) -> float:
    """Longest time without values that is bridged (s).

    Parameters
    ----------
    times : ndarray of datetime64[ns], shape (nt,)
        At least two, rising.

    Returns
    -------
    float
    """
    usual = float(np.median(seconds(times[1:] - times[:-1])))
    return max(LONGEST_GAP, (_MOST_RECORDS + 0.5) * usual)


def seconds(duration: NDArray[np.timedelta64]) -> Array:
    """Durations in seconds."""
    return np.asarray(duration / np.timedelta64(1, "ns") * 1e-9, dtype=float)


def day(moment: np.datetime64) -> str:
    """A moment as a date."""
    return str(np.datetime_as_string(moment, unit="D"))


def uniform_times(first: np.datetime64, last: np.datetime64, step: float) -> Times:
    """Equidistant times from the first up to the last.

    Parameters
    ----------
    first, last : datetime64
    step : float
        s.

    Returns
    -------
    ndarray of datetime64[ns], shape (nt,)

    Raises
    ------
    InputError
        If there are more than `MOST_TIMES`.
    """
    count = int(np.floor(float(seconds(np.asarray(last - first))) / step + 1e-9)) + 1
    if count > MOST_TIMES:
        raise InputError(
            f"wind: {count} steps of {step / 3600.0:.3g} h from {str(first)[:10]} to "
            f"{str(last)[:10]} are more than {MOST_TIMES}; take a shorter period with start and "
            "end, or a longer step_hours"
        )
    offset = (np.arange(count) * step * 1e9).round().astype("timedelta64[ns]")
    return np.asarray(first.astype("datetime64[ns]") + offset)
