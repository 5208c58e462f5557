"""A record at one place: values at equal steps of time, with what is known about them."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from waveguide.errors import InputError

Array = NDArray[np.float64]

SAME_STEP = 1e-3
"""Relative difference below which two sampling intervals are the same."""


@dataclass(frozen=True)
class Series:
    """A regular series of one quantity.

    Attributes
    ----------
    name : str
    quantity : str
        "sea level", "dynamic height", "temperature", "isopycnal depth", "alongshore velocity" or
        "bottom pressure".
    position : (lon, lat)
        Degrees.
    depth : float
        Of the instrument (m, positive down); 0 at the surface.
    start : numpy.datetime64
        Time of the first value, UTC.
    step : float
        Days between values.
    values : ndarray, shape (n,)
        SI units; °C for temperature; metres of water for bottom pressure; NaN where missing.
    notes : tuple of str
        What was found or done on the way here.
    """

    name: str
    quantity: str
    position: tuple[float, float]
    depth: float
    start: np.datetime64
    step: float
    values: Array
    notes: tuple[str, ...] = ()

    @property
    def days(self) -> Array:
        """Time of each value in days since the first."""
        return np.asarray(self.step * np.arange(self.values.size), float)

    @property
    def times(self) -> NDArray[np.datetime64]:
        """Time of each value, to the second."""
        seconds = np.rint(self.days * 86400.0).astype("timedelta64[s]")
        return np.asarray(self.start.astype("datetime64[s]") + seconds)


def days_between(start: np.datetime64, end: np.datetime64) -> float:
    """Days from one moment to another."""
    return float((end - start) / np.timedelta64(1, "s")) / 86400.0


def align(first: Series, second: Series) -> tuple[Array, Array, np.datetime64, float]:
    """Two series over the time they share.

    Parameters
    ----------
    first, second : Series
        Of the same step.

    Returns
    -------
    x, y : ndarray, shape (n,)
    start : numpy.datetime64
        Time of the first value of `x`.
    offset : float
        Days by which the values of `y` are later than those of `x` beside them, less than half a
        step: daily means at noon against ones at midnight.

    Raises
    ------
    InputError
        If the steps differ or the records do not overlap.
    """
    if abs(first.step - second.step) > SAME_STEP * first.step:
        raise InputError(
            f"{first.name!r} has a value every {first.step:g} days and {second.name!r} every "
            f"{second.step:g}: a lag needs one step; average the finer one to the coarser"
        )
    shift = days_between(first.start, second.start) / first.step
    whole = round(shift)
    skip_first, skip_second = max(whole, 0), max(-whole, 0)
    n = min(first.values.size - skip_first, second.values.size - skip_second)
    if n < 2:
        raise InputError(
            f"{first.name!r} and {second.name!r} have no time in common: {first.name!r} ends "
            f"{first.times[-1]}, {second.name!r} starts {second.times[0]}, or the other way round"
        )
    x = first.values[skip_first : skip_first + n]
    y = second.values[skip_second : skip_second + n]
    return x, y, first.times[skip_first], (shift - whole) * first.step
