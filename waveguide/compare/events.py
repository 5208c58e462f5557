"""One record against the arrival of one event.

The prepared record is searched for the event's own shape: a box as long as the event, passed
through the same band. For every delay τ the amplitude a(τ) that fits best is Σ x p_τ / Σ p_τ²; the
delay of the highest a is the measured one. The rest of the record says what that is worth:

- chance: how often as high an a is found in windows of the same length that hold no event;
- interval: the fitted pulse is put into those windows, and found again with an error; the
  quantiles of the errors, widened for the number of windows as in `waveguide.compare.lags`, are
  those of the delay, for the same noise acts on both.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from waveguide.compare.filters import band_pass
from waveguide.compare.lags import LagEstimate, dominant_period, peak, widened_percentiles
from waveguide.compare.pairs import Prediction, longest_lag, sign_of
from waveguide.compare.preparation import anomalies, in_band
from waveguide.compare.series import Series, days_between
from waveguide.compare.verdict import Verdict, verdict
from waveguide.errors import InputError

Array = NDArray[np.float64]

LEAST_WINDOWS = 4
"""Event-free windows that a record must hold for a chance to be told."""


@dataclass(frozen=True)
class EventResult:
    """All that was found for an event in one record.

    Attributes
    ----------
    series : Series
        Prepared, in the band.
    band : (shortest, longest)
        Days.
    start : float
        Days from the first value of the series to the event.
    delay, amplitude : ndarray, shape (k,)
        Delays searched (days) and the amplitude that fits at each (SI).
    estimate : LagEstimate
        `correlation` is the share of the record's variance under the pulse, as a coefficient.
    chance : float
    predictions : tuple of Prediction
    verdicts : tuple of Verdict
    """

    series: Series
    band: tuple[float, float]
    start: float
    delay: Array
    amplitude: Array
    estimate: LagEstimate
    chance: float
    predictions: tuple[Prediction, ...]
    verdicts: tuple[Verdict, ...]


def compare_event(
    series: Series, band: tuple[float, float], event_start: np.datetime64, duration: float,
    predictions: Sequence[Prediction], sign: float = 1.0, longest: float | None = None,
) -> EventResult:
    """Look for the arrival of an event in a record.

    Parameters
    ----------
    series : Series
        As read.
    band : (shortest, longest)
        Periods (days).
    event_start : numpy.datetime64
        UTC.
    duration : float
        Days.
    predictions : sequence of Prediction
        From the event's place to the record's.
    sign : float
        Of the event's amplitude.
    longest : float, optional
        Longest delay searched (days).

    Returns
    -------
    EventResult

    Raises
    ------
    InputError
        If the record does not hold the days in which the event could arrive, or little else.
    """
    prepared = in_band(anomalies(series), band)
    start = days_between(prepared.start, event_start)
    reach = longest or longest_lag(predictions, band)
    x = sign * sign_of(predictions) * prepared.values
    pulse = event_pulse(duration, prepared.step, band)
    first = round((start + 0.5 * duration) / prepared.step)
    window = int(np.ceil(reach / prepared.step)) + 1
    amplitude, share = fitted_amplitude(x, pulse)
    _require_cover(prepared, amplitude, first, window)
    delay = np.asarray((first + np.arange(window)) * prepared.step - start - 0.5 * duration)
    here = amplitude[first : first + window]
    estimate, chance = _judge(
        pulse, amplitude, share, first, window, prepared.step, float(delay[0])
    )
    return EventResult(
        prepared, band, start, delay, here, estimate, chance, tuple(predictions),
        tuple(verdict(estimate, chance, p.lag, p.status) for p in predictions),
    )


def event_pulse(duration: float, step: float, band: tuple[float, float]) -> Array:
    """A box of the event's duration and height one, in the band; odd length, centred."""
    half = int(np.ceil((duration + 1.5 * band[1]) / step))
    t = step * np.arange(-2 * half, 2 * half + 1)
    inside = np.clip((0.5 * duration - np.abs(t)) / step + 0.5, 0.0, 1.0)
    return band_pass(inside, step, band)[half : 3 * half + 1]


def fitted_amplitude(x: Array, pulse: Array) -> tuple[Array, Array]:
    """Amplitude of a pulse centred at every time, and its correlation with the record there.

    Parameters
    ----------
    x : ndarray, shape (n,)
        NaN where missing.
    pulse : ndarray, shape (2m + 1,)

    Returns
    -------
    amplitude, correlation : ndarray, shape (n,)
        NaN where under 0.8 of the pulse's power falls on values.
    """
    there = np.isfinite(x)
    filled = np.where(there, x, 0.0)
    product = np.correlate(filled, pulse, mode="same")
    power = np.correlate(there.astype(float), pulse**2, mode="same")
    energy = np.correlate(filled**2, np.ones_like(pulse), mode="same")
    sound = power > 0.8 * float(pulse @ pulse)
    safe = np.where(sound, power, 1.0)
    scale = np.sqrt(safe * np.where(energy > 0.0, energy, 1.0))
    nan = np.nan
    return np.where(sound, product / safe, nan), np.where(sound, product / scale, nan)


def _require_cover(series: Series, amplitude: Array, first: int, window: int) -> None:
    span = f"{series.times[0]} to {series.times[-1]}"
    if first < 0 or first + window > series.values.size:
        raise InputError(
            f"{series.name!r}: the record ({span}) does not hold the {window * series.step:.0f} "
            "days after the event in which it could arrive; give a longer record, or compare "
            "pairs only"
        )
    if not np.isfinite(amplitude[first : first + window]).mean() > 0.8:
        raise InputError(
            f"{series.name!r}: too many values are missing in the {window * series.step:.0f} days "
            "after the event; compare another gauge"
        )


def _judge(
    pulse: Array, amplitude: Array, share: Array, first: int, window: int, step: float,
    delay: float,
) -> tuple[LagEstimate, float]:
    """Delay with its interval, and the chance of as high an amplitude without an event."""
    index = np.arange(window)
    days = np.asarray(index * step, float)
    here = amplitude[first : first + window]
    top = int(np.nanargmax(here))
    lag = float(peak(days, np.nan_to_num(here, nan=-np.inf)))
    windows = _free_windows(amplitude, first, window, pulse.size)
    independent = len(windows) / window
    if independent < LEAST_WINDOWS:
        return _unknown(lag + delay, float(share[first + top]), pulse, step, independent), 1.0
    noise = amplitude[windows[:, None] + index]
    chance = (1.0 + float(np.sum(np.nanmax(noise, axis=1) >= here[top]))) / (1.0 + len(windows))
    found = peak(days, np.nan_to_num(
        noise + here[top] * _own_shape(pulse, window, top), nan=-np.inf
    ))
    error = found - top * step
    low, high = widened_percentiles(error, independent)
    period = dominant_period(pulse, step)
    return LagEstimate(
        lag=lag + delay, low=float(lag - high + delay), high=float(lag - low + delay),
        correlation=float(share[first + top]), blocks=independent, period=period,
        other_cycle=float(np.mean(np.abs(error) > 0.5 * period)),
        rival=float("nan"), rival_correlation=float("nan"), at_edge=top == window - 1,
    ), chance


def _own_shape(pulse: Array, window: int, top: int) -> Array:
    """Fitted amplitude around a pulse of height one centred at `top`: its autocorrelation."""
    padded = np.zeros(2 * window + pulse.size)
    centre = window + pulse.size // 2
    padded[centre - pulse.size // 2 : centre + pulse.size // 2 + 1] = pulse
    own = np.correlate(padded, pulse, mode="same") / float(pulse @ pulse)
    return own[centre - top : centre - top + window]


def _free_windows(amplitude: Array, first: int, window: int, pulse: int) -> NDArray[np.intp]:
    """Starts of windows with amplitudes throughout that the event's own window does not touch."""
    known = np.concatenate([[0], np.cumsum(np.isfinite(amplitude))])
    starts = np.arange(amplitude.size - window + 1)
    whole = known[starts + window] - known[starts] == window
    reach = window + pulse // 2
    return np.asarray(starts[whole & (np.abs(starts - first) > reach)])


def _unknown(
    lag: float, correlation: float, pulse: Array, step: float, windows: float
) -> LagEstimate:
    nan = float("nan")
    return LagEstimate(
        lag, -np.inf, np.inf, correlation, windows, dominant_period(pulse, step), 0.0, nan, nan,
        False,
    )
