"""Times of records: read, checked, and brought to equal steps."""

from __future__ import annotations

import re
from collections.abc import Sequence
from datetime import UTC, datetime

import numpy as np
from numpy.typing import NDArray

from waveguide.errors import InputError

Array = NDArray[np.float64]
Times = NDArray[np.datetime64]

MONTH = 365.2425 / 12.0
"""Days."""

HALF_DAY = np.timedelta64(12, "h")

OFF_STEP = 0.1
"""Share of a step by which a time may be off the regular ones."""

_DATE = re.compile(r"\d{4}-\d{2}-\d{2}")


def parse_times(texts: Sequence[str], name: str, zone: str | None) -> Times:
    """ISO 8601 times as UTC; a date alone is a daily mean and stands for noon UTC.

    Parameters
    ----------
    texts : sequence of str
    name : str
        Of the record, for messages.
    zone : "UTC" or None
        Zone of clock times without one.

    Returns
    -------
    ndarray of datetime64[s]

    Raises
    ------
    InputError
        If a time is missing or cannot be read, or is a clock time without a zone.
    """
    if "" in texts:
        raise InputError(
            f"{name!r}: value {list(texts).index('') + 1} has no time; write one, or leave the row "
            "out"
        )
    if texts and all(_DATE.fullmatch(text) for text in texts):
        try:
            return np.asarray(np.array(texts, "datetime64[s]") + HALF_DAY)
        except ValueError as error:
            raise InputError(f"{name!r}: {error}; write dates as 2031-03-05") from None
    return np.array([_moment(text, row, name, zone) for row, text in enumerate(texts, 1)],
                    "datetime64[s]")


def _moment(text: str, row: int, name: str, zone: str | None) -> datetime:
    """One clock time as UTC, without a zone of its own for NumPy."""
    try:
        moment = datetime.fromisoformat(text)
    except ValueError:
        raise InputError(
            f"{name!r}: the time {text!r} of value {row} cannot be read; write ISO 8601, as in "
            "2031-03-05T12:00:00Z"
        ) from None
    if moment.tzinfo is None:
        if zone is None:
            raise InputError(
                f"{name!r}: the time {text!r} of value {row} has no zone; write Z or +hh:mm behind "
                'the times, or zone = "UTC" in its [[observations]] table'
            )
        return moment
    return moment.astimezone(UTC).replace(tzinfo=None)


def regular(times: Times, values: Array, name: str) -> tuple[np.datetime64, float, Array]:
    """Values at equal steps, NaN where a time is not there.

    Parameters
    ----------
    times : ndarray of datetime64, shape (n,)
    values : ndarray, shape (n,) or (n, k)
    name : str

    Returns
    -------
    start : numpy.datetime64
    step : float
        Days.
    values : ndarray, shape (m,) or (m, k)

    Raises
    ------
    InputError
        If times repeat, go back or keep no step.
    """
    seconds = times.astype("datetime64[s]").astype(np.int64)
    _require_rising(seconds, times, name)
    gaps = np.diff(seconds) / 86400.0
    step = float(np.median(gaps))
    if 27.0 <= step <= 32.0:
        return _monthly(times, values)
    place = (seconds - seconds[0]) / 86400.0 / step
    index = np.rint(place).astype(np.int64)
    off = np.abs(place - index)
    if off.max() > OFF_STEP or np.any(np.diff(index) == 0):
        at = int(np.argmax(off))
        raise InputError(
            f"{name!r}: times keep no step ({step * 24:g} hours is the usual one, and {times[at]} "
            "is off it); average the record to hourly or daily values first"
        )
    return times[0].astype("datetime64[s]"), step, _placed(index, values)


def _require_rising(seconds: NDArray[np.int64], times: Times, name: str) -> None:
    if seconds.size < 3:
        raise InputError(f"{name!r}: {seconds.size} values are no series; give a longer record")
    if np.isnat(times).any():
        raise InputError(
            f"{name!r}: value {int(np.argmax(np.isnat(times))) + 1} has no time; write one, or "
            "leave the value out"
        )
    steps = np.diff(seconds)
    if np.any(steps == 0):
        at = int(np.argmax(steps == 0)) + 1
        raise InputError(
            f"{name!r}: {times[at]} is there {int(np.sum(times == times[at]))} times (values {at} "
            f"and {at + 1}); keep one value for each time"
        )
    if np.any(steps < 0):
        at = int(np.argmax(steps < 0)) + 1
        raise InputError(
            f"{name!r}: times go back at value {at + 1}, from {times[at - 1]} to {times[at]}; sort "
            "the record by time"
        )


def _monthly(times: Times, values: Array) -> tuple[np.datetime64, float, Array]:
    """Monthly means in steps of the mean month, each at the middle of its own."""
    month = times.astype("datetime64[M]").astype(np.int64)
    if np.any(np.diff(month) == 0):  # ends of months: the middle is told by the day before
        month = (times - np.timedelta64(14, "D")).astype("datetime64[M]").astype(np.int64)
    middle = times[0].astype("datetime64[M]").astype("datetime64[s]")
    start = middle + np.timedelta64(round(0.5 * MONTH * 86400.0), "s")
    return start, MONTH, _placed(month - month[0], values)


def _placed(index: NDArray[np.int64], values: Array) -> Array:
    full = np.full((int(index[-1]) + 1, *values.shape[1:]), np.nan)
    full[index] = values
    return full
