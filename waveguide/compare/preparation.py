"""From a record to the part of it in which a lag is looked for, the same steps for every series.

1. Hourly values: the tide is removed by Godin's filter, and daily values at noon UTC are kept.
2. Sea level: with air pressure p at hand, the inverse barometer (p − mean p)/(ρg) is added.
3. Gaps of up to a quarter of the shortest period of the band are bridged by straight lines, which
   changes nothing in the band; longer ones stay gaps.
4. Trend, annual and semi-annual cycle are fitted to the values there are and taken out.
5. The band is passed (`waveguide.compare.filters`).
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray
from scipy.ndimage import median_filter

from waveguide.compare.filters import band_pass, godin_kernel, smooth
from waveguide.compare.series import Series
from waveguide.constants import GRAVITY, REFERENCE_DENSITY
from waveguide.errors import InputError

Array = NDArray[np.float64]

YEAR = 365.2425
"""Days."""

LEAST_YEARS = 2.0
"""An annual cycle is taken out of records of at least this many years: of shorter ones it would
take a good part of the signal."""

HOUR = 1.0 / 24.0

WITH_DATUM = ("sea level", "bottom pressure")
"""Quantities measured from a datum that may be moved."""

JUMP_WINDOW = 60.0
"""Days on either side of a datum jump that are compared."""

JUMP_SIGMA = 6.0
"""A jump stands out of the ordinary shifts of level by so many of their robust deviations."""

LEAST_SHARE = 0.25
"""A prepared series needs values at this share of its times."""


def inverse_barometer(pressure: Array) -> Array:
    """Sea level that air pressure takes away, (p − mean p)/(ρ g).

    Adding it to sea level leaves what is not the ocean's static answer to air pressure.

    Parameters
    ----------
    pressure : ndarray, shape (n,)
        Air pressure (Pa), NaN where missing.

    Returns
    -------
    ndarray, shape (n,)
        Metres: 0.995 cm for 1 hPa.
    """
    return np.asarray((pressure - np.nanmean(pressure)) / (REFERENCE_DENSITY * GRAVITY))


def bridge_gaps(values: Array, longest: int) -> Array:
    """Gaps of up to `longest` missing values bridged by straight lines.

    Parameters
    ----------
    values : ndarray, shape (n,)
        NaN where missing.
    longest : int

    Returns
    -------
    ndarray, shape (n,)
    """
    known = np.flatnonzero(np.isfinite(values))
    if known.size < 2:
        return values.copy()
    place = np.arange(values.size)
    before = np.searchsorted(known, place, side="right") - 1
    inside = (before >= 0) & (before < known.size - 1)
    left = known[np.maximum(before, 0)]
    right = known[np.minimum(before + 1, known.size - 1)]
    short = inside & (right - left - 1 <= longest)
    bridged = np.interp(place, known, values[known])
    return np.where(np.isfinite(values) | ~short, values, bridged)


def seasonal_fit(days: Array, values: Array, annual: bool) -> Array:
    """Mean and trend of a series, and its annual and semi-annual cycle, by least squares.

    Parameters
    ----------
    days, values : ndarray, shape (n,)
        Values may be NaN.
    annual : bool
        Whether the cycles are fitted too.

    Returns
    -------
    ndarray, shape (n,)
        The fit at all times.
    """
    span = max(float(days[-1] - days[0]), 1.0)
    columns = [np.ones_like(days), (days - days.mean()) / span]
    if annual:
        for harmonic in (1, 2):
            phase = 2.0 * np.pi * harmonic * days / YEAR
            columns += [np.cos(phase), np.sin(phase)]
    design = np.column_stack(columns)
    known = np.isfinite(values)
    coefficients, *_ = np.linalg.lstsq(design[known], values[known], rcond=None)
    return np.asarray(design @ coefficients)


def daily_without_tides(series: Series) -> Series:
    """Hourly values without tides, once a day at noon UTC.

    Parameters
    ----------
    series : Series
        Hourly.

    Returns
    -------
    Series
    """
    slow = smooth(series.values, godin_kernel())
    hour = np.rint((series.times - series.times.astype("datetime64[D]")) / np.timedelta64(1, "h"))
    noon = np.flatnonzero(hour == 12)
    if not noon.size:
        raise InputError(f"{series.name!r}: {series.values.size} hourly values hold no noon")
    return replace(
        series, start=series.times[noon[0]], step=1.0, values=slow[noon],
        notes=(*series.notes, "tides removed by running means over 24, 24 and 25 hours"),
    )


def datum_jumps(values: Array, step: float) -> list[int]:
    """Places where the level jumps and stays.

    The medians of the 60 days before and after each time are compared. A jump is a difference six
    robust deviations (1.4826 median |difference|) beyond the ordinary, at least half of which
    happens between two neighbouring values.

    Parameters
    ----------
    values : ndarray, shape (n,)
        Without trend and annual cycle; NaN where missing.
    step : float
        Days.

    Returns
    -------
    list of int
        Index of the first value after each jump.
    """
    window = int(np.ceil(JUMP_WINDOW / step))
    known = np.flatnonzero(np.isfinite(values))
    if known.size < 6 * window:
        return []
    x = values[known]
    median = median_filter(x, size=window, mode="nearest")
    half = window // 2
    at = np.arange(window, x.size - window)
    shift = median[at + half] - median[at - half - 1]
    spread = 1.4826 * float(np.median(np.abs(shift - np.median(shift))))
    sudden = np.abs(x[at] - x[at - 1]) > 0.5 * np.abs(shift)
    same_sign = (x[at] - x[at - 1]) * shift > 0.0
    candidate = sudden & same_sign & (np.abs(shift) > JUMP_SIGMA * spread)
    return _separate(known[at], np.abs(shift), candidate, window)


def jump_size(values: Array, at: int) -> float:
    """Median of the thirty values from `at` on less that of the thirty before."""
    return float(np.nanmedian(values[at : at + 30]) - np.nanmedian(values[max(at - 30, 0) : at]))


def _separate(place: NDArray[np.intp], size: Array, candidate: NDArray[np.bool_], window: int
              ) -> list[int]:
    """Of candidates within one window of each other the largest."""
    found: list[int] = []
    for index in np.flatnonzero(candidate)[np.argsort(-size[candidate])]:
        if all(abs(int(place[index]) - other) > window for other in found):
            found.append(int(place[index]))
    return sorted(found)


def anomalies(series: Series) -> Series:
    """A record without tides, trend and annual cycle, with datum jumps told.

    Parameters
    ----------
    series : Series

    Returns
    -------
    Series
    """
    if abs(series.step - HOUR) < 1e-3 * HOUR:
        series = daily_without_tides(series)
    annual = series.values.size * series.step >= LEAST_YEARS * YEAR
    rest = series.values - seasonal_fit(series.days, series.values, annual)
    told = "trend and annual cycle removed" if annual else (
        f"trend removed; under {LEAST_YEARS:g} years an annual cycle is not told from signal"
    )
    places = datum_jumps(rest, series.step) if series.quantity in WITH_DATUM else []
    # its size from the record itself: the annual cycle has taken up a part of it
    jumps = [
        f"the level jumps by {jump_size(series.values, i):+.3g} m at {series.times[i]} and "
        "stays: a change of datum? It is not corrected; cut the record there, or correct it"
        for i in places
    ]
    return replace(series, values=rest, notes=(*series.notes, told, *jumps))


def in_band(series: Series, band: tuple[float, float]) -> Series:
    """The part of anomalies in a band of periods.

    Parameters
    ----------
    series : Series
        As from `anomalies`.
    band : (shortest, longest)
        Days.

    Returns
    -------
    Series

    Raises
    ------
    InputError
        If less than a quarter of the times are left with a value.
    """
    longest = int(0.25 * band[0] / series.step)
    bridged = bridge_gaps(series.values, longest)
    passed = band_pass(bridged, series.step, band)
    share = float(np.isfinite(passed).mean())
    if share < LEAST_SHARE:
        raise InputError(
            f"{series.name!r}: after filtering to {band[0]:g}–{band[1]:g} days {share:.0%} of its "
            f"{passed.size} times have a value, at least {LEAST_SHARE:.0%} are needed; take a band "
            "of shorter periods, or a record with fewer gaps"
        )
    bridges = int(np.isfinite(bridged).sum() - np.isfinite(series.values).sum())
    note = f"passed {band[0]:g} to {band[1]:g} days; {bridges} missing values bridged"
    return replace(series, values=passed, notes=(*series.notes, note))
