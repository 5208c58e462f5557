"""Series that travel along characteristics: shifted by any delay, by straight lines between times.

What lies before the first time is rest.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]


def add_delayed(into: Array, series: NDArray[np.floating], weight: float, lag: float) -> None:
    """Add weight × series(t − lag) to `into`, in place; nothing before the first value.

    Parameters
    ----------
    into : ndarray, shape (nt,)
        May be longer than `series`.
    series : ndarray, shape (ns,)
    weight : float
    lag : float
        In intervals of time, ≥ 0.
    """
    whole = int(lag)
    share = lag - whole
    if share == 0.0:
        room = min(into.size - whole, series.size)
        if room > 0:
            into[whole : whole + room] += weight * series[:room]
        return
    room = min(into.size - whole - 1, series.size - 1)
    if room > 0:
        part = into[whole + 1 : whole + 1 + room]
        part += (weight * (1.0 - share)) * series[1 : room + 1]
        part += (weight * share) * series[:room]


def held_on(series: NDArray[np.floating]) -> Array:
    """A series with its last value once more, which an interpolation at its end needs.

    Parameters
    ----------
    series : ndarray, shape (nt,)

    Returns
    -------
    ndarray, shape (nt + 1,)
    """
    return np.append(series, series[-1:]).astype(float)


def taken_back(series: Array, lag: float, count: int) -> Array:
    """Values of a series `lag` intervals later, the first `count` of them.

    Parameters
    ----------
    series : ndarray, shape (nt,)
        With more than `count` + `lag` values.
    lag : float
        In intervals of time, ≥ 0.
    count : int

    Returns
    -------
    ndarray, shape (count,)
    """
    whole = int(lag)
    share = lag - whole
    earlier, later = series[whole : whole + count], series[whole + 1 : whole + 1 + count]
    return np.asarray((1.0 - share) * earlier + share * later)
