"""One record against the arrival of one event.

The prepared record is searched for the event's own shape: a box as long as the event, passed
through the same band. For every delay τ the amplitude a(τ) that fits best is Σ x p_τ / Σ p_τ²; the
delay of the highest a is the measured one. The rest of the record says what that is worth:

- chance: how often as high an a is found in windows of the same length of scrambled records;
- interval: the fitted pulse is put into windows without event, and found again with an error; the
  quantiles of the errors, widened for the number of windows as in `waveguide.compare.lags`, are
  those of the delay, for the same noise acts on both.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.ndimage import maximum_filter1d

from waveguide.compare.filters import band_pass
from waveguide.compare.lags import LagEstimate, dominant_period, peak, widened_percentiles
from waveguide.compare.pairs import SEED, Prediction, longest_lag, sign_of
from waveguide.compare.preparation import anomalies, bridge_gaps, in_band
from waveguide.compare.series import Series, days_between
from waveguide.compare.significance import scrambled
from waveguide.compare.verdict import Verdict, verdict

Array = NDArray[np.float64]

LEAST_COVER = 0.6
"""Windows need amplitudes at this share of their delays; the rest is bridged by straight lines."""

RECORDS = 40
"""Scrambled records."""

LEAST_WINDOWS = 4
"""Event-free windows that a record must hold for an interval to be told."""


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
    duration : float
        Of the event (days).
    delay, amplitude : ndarray, shape (k,)
        Delays searched (days) and the amplitude that fits at each (SI).
    estimate : LagEstimate
        `correlation` is the share of the record's variance under the pulse, as a coefficient.
    chance, least_chance : float
        Of as high an amplitude without the event, and the smallest the draws can tell.
    predictions : tuple of Prediction
    verdicts : tuple of Verdict
    """

    series: Series
    band: tuple[float, float]
    start: float
    duration: float
    delay: Array
    amplitude: Array
    estimate: LagEstimate
    chance: float
    least_chance: float
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
        Not resolvable, with the reason, where the record does not hold the days in which the event
        could arrive.
    """
    prepared = in_band(anomalies(series), band)
    start = days_between(prepared.start, event_start)
    reach = longest or longest_lag(predictions, band)
    x = sign * sign_of(predictions) * prepared.values
    pulse = event_pulse(duration, prepared.step, band)
    first = round((start + 0.5 * duration) / prepared.step)
    window = int(np.ceil(reach / prepared.step)) + 1
    fitted, share = fitted_amplitude(x, pulse)
    reason = _uncovered(prepared, fitted, first, window)
    if reason:
        return EventResult(
            prepared, band, start, duration, np.zeros(0), np.zeros(0),
            _unknown(pulse, prepared.step), 1.0, 1.0, tuple(predictions),
            tuple(Verdict("not resolvable", reason) for _ in predictions),
        )
    delay = np.asarray((first + np.arange(window)) * prepared.step - start - 0.5 * duration)
    here = fitted[first : first + window]
    estimate = _judge(pulse, fitted, share, first, window, prepared.step, float(delay[0]))
    chance = _chance(x, pulse, window, float(np.nanmax(here)))
    return EventResult(
        prepared, band, start, duration, delay, here, estimate, chance,
        1.0 / (1.0 + RECORDS * x.size), tuple(predictions),
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


def _uncovered(series: Series, amplitude: Array, first: int, window: int) -> str:
    """Why the record cannot show the event, or nothing."""
    days = window * series.step
    if first < 0 or first + window > series.values.size:
        return (
            f"the record ({series.times[0]} to {series.times[-1]}) does not hold the {days:.0f} "
            "days after the event in which it could arrive"
        )
    share = float(np.isfinite(amplitude[first : first + window]).mean())
    if share < LEAST_COVER:
        return (
            f"{1 - share:.0%} of the {days:.0f} days after the event are too near to missing "
            "values"
        )
    return ""


def _chance(x: Array, pulse: Array, window: int, height: float) -> float:
    """Share of windows of scrambled records in which the pulse fits with as high an amplitude.

    The record's own windows are too few to tell one in twenty. The event's power is among what is
    scrambled, which errs on the side of doubt.
    """
    records = scrambled(x, RECORDS, np.random.default_rng(SEED))
    highest = [
        maximum_filter1d(np.nan_to_num(fitted_amplitude(row, pulse)[0]), window) for row in records
    ]
    return float((1.0 + np.sum(np.array(highest) >= height)) / (1.0 + records.size))


def _judge(
    pulse: Array, amplitude: Array, share: Array, first: int, window: int, step: float,
    delay: float,
) -> LagEstimate:
    """Delay with its interval."""
    index = np.arange(window)
    days = np.asarray(index * step, float)
    bridged, fit = (bridge_gaps(values, values.size) for values in (amplitude, share))
    here = bridged[first : first + window]
    top = int(np.argmax(here))
    lag = float(peak(days, here))
    windows = _free_windows(amplitude, first, window, pulse.size)
    independent = len(windows) / window
    if independent < LEAST_WINDOWS:
        return _unknown(pulse, step)
    noise = bridged[windows[:, None] + index]
    found = peak(days, noise + here[top] * _own_shape(pulse, window, top))
    error = found - top * step
    low, high = widened_percentiles(error, independent)
    period = dominant_period(pulse, step)
    return LagEstimate(
        lag=lag + delay, low=float(lag - high + delay), high=float(lag - low + delay),
        correlation=float(fit[first + top]), blocks=independent, period=period,
        other_cycle=float(np.mean(np.abs(error) > 0.5 * period)),
        rival=float("nan"), rival_correlation=float("nan"), at_edge=top == window - 1,
    )


def _own_shape(pulse: Array, window: int, top: int) -> Array:
    """Fitted amplitude around a pulse of height one centred at `top`: its autocorrelation."""
    padded = np.zeros(2 * window + pulse.size)
    centre = window + pulse.size // 2
    padded[centre - pulse.size // 2 : centre + pulse.size // 2 + 1] = pulse
    own = np.correlate(padded, pulse, mode="same") / float(pulse @ pulse)
    return own[centre - top : centre - top + window]


def _free_windows(amplitude: Array, first: int, window: int, pulse: int) -> NDArray[np.intp]:
    """Starts of windows mostly filled with amplitudes that the event's own does not touch."""
    known = np.concatenate([[0], np.cumsum(np.isfinite(amplitude))])
    ends = np.flatnonzero(np.isfinite(amplitude))[[0, -1]]  # nothing is bridged beyond these
    starts = np.arange(amplitude.size - window + 1)
    filled = known[starts + window] - known[starts] >= LEAST_COVER * window
    inside = (starts >= ends[0]) & (starts + window <= ends[1] + 1)
    reach = window + pulse // 2
    return np.asarray(starts[filled & inside & (np.abs(starts - first) > reach)])


def _unknown(pulse: Array, step: float) -> LagEstimate:
    """An estimate of nothing."""
    nan = float("nan")
    return LagEstimate(
        nan, nan, nan, nan, 0.0, dominant_period(pulse, step), 0.0, nan, nan, False
    )
