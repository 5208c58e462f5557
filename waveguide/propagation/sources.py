"""Time functions of an event: how sea level at the source changes with time.

Time counts from the start of the event. All functions are smooth enough that a time step of
1/32 of their duration resolves them (`time_step`), so their spectra end before its Nyquist
frequency and a waveform has no ringing.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from waveguide.constants import SECONDS_PER_DAY
from waveguide.errors import InputError

Array = NDArray[np.float64]

LONGEST_STEP = 0.25 * SECONDS_PER_DAY
"""Longest time step of a waveform (s)."""

STEPS_PER_DURATION = 32
_EDGE = 1.0 / 20.0  # standard deviation of a boxcar's edges, in durations
_UNEVEN = 0.01  # spacing of a series may vary by this share


@dataclass(frozen=True)
class SourceFunction:
    """Sea level at the source as a function of time.

    Attributes
    ----------
    values : callable
        Time (s), ndarray, to sea level, ndarray of the same shape.
    duration : float
        How long the event lasts, or a step takes to rise (s).
    begin : float
        Before this time (s, ≤ 0) there is nothing.
    finest : float
        Time step (s) that resolves it.
    lasting : bool
        Whether sea level stays up after the event.
    """

    values: Callable[[Array], Array]
    duration: float
    begin: float
    finest: float
    lasting: bool = False


def gaussian_burst(duration: float) -> SourceFunction:
    """Gaussian burst with maximum 1 in the middle of its duration.

    Its standard deviation is a sixth of the duration, which holds 99.7 % of its area.

    Parameters
    ----------
    duration : float
        s, > 0.

    Returns
    -------
    SourceFunction
    """
    _require_duration(duration)
    deviation = duration / 6.0

    def values(time: Array) -> Array:
        return np.exp(-0.5 * ((time - 0.5 * duration) / deviation) ** 2)

    return SourceFunction(values, duration, -0.5 * duration, duration / STEPS_PER_DURATION)


def boxcar_burst(duration: float) -> SourceFunction:
    """Burst of height 1 that begins at once and ends at once after its duration.

    The edges are rounded (integrals of a Gaussian of standard deviation duration/20), half of
    the height being reached at the start and at the end.

    Parameters
    ----------
    duration : float
        s, > 0.

    Returns
    -------
    SourceFunction
    """
    _require_duration(duration)
    width = np.sqrt(2.0) * _EDGE * duration
    from scipy.special import erf  # here, because most answers do without it

    def values(time: Array) -> Array:
        return np.asarray(0.5 * (erf(time / width) - erf((time - duration) / width)))

    return SourceFunction(values, duration, -6.0 * _EDGE * duration, duration / STEPS_PER_DURATION)


def step_rise(duration: float) -> SourceFunction:
    """Rise from 0 to 1 that lasts; the integral of `gaussian_burst`.

    Parameters
    ----------
    duration : float
        Time that the rise takes (s), > 0.

    Returns
    -------
    SourceFunction
    """
    _require_duration(duration)
    width = np.sqrt(2.0) * duration / 6.0
    from scipy.special import erf  # as in `boxcar_burst`

    def values(time: Array) -> Array:
        return np.asarray(0.5 * (1.0 + erf((time - 0.5 * duration) / width)))

    return SourceFunction(values, duration, -0.5 * duration, duration / STEPS_PER_DURATION, True)


def series_source(time: Array, value: Array) -> SourceFunction:
    """A series of one's own, linear between its values and 0 beyond them.

    From 0 to the first value and from the last one to 0 it takes one more interval.

    Parameters
    ----------
    time : ndarray, shape (k,)
        From the start of the event (s), evenly spaced.
    value : ndarray, shape (k,)
        Sea level at the source, in any unit.

    Returns
    -------
    SourceFunction
        Its duration is the length of the series.

    Raises
    ------
    InputError
        If there are fewer than three values, a value is missing, or the times do not rise evenly:
        gaps are refused, not filled.
    """
    time, value = np.asarray(time, float), np.asarray(value, float)
    _require_series(time, value)
    interval = float(np.median(np.diff(time)))
    knots = np.concatenate([[time[0] - interval], time, [time[-1] + interval]])
    heights = np.concatenate([[0.0], value, [0.0]])

    def values(when: Array) -> Array:
        return np.asarray(np.interp(when, knots, heights))

    duration = float(time[-1] - time[0])
    return SourceFunction(values, duration, min(float(knots[0]), 0.0), interval)


def time_step(source: SourceFunction) -> float:
    """Time step that resolves a source, at most 6 hours.

    Parameters
    ----------
    source : SourceFunction

    Returns
    -------
    float
        s.
    """
    return min(LONGEST_STEP, source.finest)


def require_signal(source: SourceFunction, window: float, step: float) -> None:
    """Refuse a source of which nothing falls within the window.

    Parameters
    ----------
    source : SourceFunction
    window, step : float
        s.

    Raises
    ------
    InputError
        If the values are 0 throughout, as those of a series from another year.
    """
    if not np.any(source.values(np.arange(0.0, window + step, step))):
        raise InputError(
            "series: sea level at the source is 0 throughout the "
            f"{window / SECONDS_PER_DAY:g} days after the start of the event; see that its dates "
            "are those of the event"
        )


def _require_duration(duration: float) -> None:
    if not 0.0 < duration < np.inf:
        raise InputError(f"duration: {duration:g} s; a burst needs a positive one")


def _require_series(time: Array, value: Array) -> None:
    """Refuse what cannot be read as one unbroken series, all problems at once."""
    problems = []
    if time.shape != value.shape or time.ndim != 1 or time.size < 3:
        raise InputError(
            f"series: {time.size} times and {value.size} values; it needs as many of both, "
            "three or more"
        )
    missing = np.nonzero(~np.isfinite(value) | ~np.isfinite(time))[0]
    if missing.size:
        problems.append(
            f"series: {missing.size} values are missing, the first is number {missing[0] + 1}; "
            "gaps are not filled here, so interpolate them first or give a part without gaps"
        )
    spacing = np.diff(time)
    if not np.all(spacing > 0.0):
        at = int(np.argmin(spacing > 0.0))
        problems.append(f"series: time does not rise after number {at + 1}; sort it, each once")
    elif np.ptp(spacing) > _UNEVEN * np.median(spacing):
        at = int(np.argmax(np.abs(spacing - np.median(spacing))))
        problems.append(
            f"series: {spacing[at] / 3600.0:g} h between numbers {at + 1} and {at + 2} where most "
            f"lie {np.median(spacing) / 3600.0:g} h apart; gaps are not filled here, so put the "
            "series on even times first or give a part without gaps"
        )
    if problems:
        raise InputError(problems)
