"""Coherence and phase of two series against frequency, by averaging over segments.

Segments overlap by half under a Hann window; those that miss more than a tenth of their values are
left out. Averaging n such segments gives n_e = n/(1 + (n − 1)/n/18) independent ones, for the
squared windows of neighbours correlate by 1/6, whose square counts twice.

References
----------
Welch (1967), IEEE Trans. Audio Electroacoust. 15, 70.
Bendat & Piersol (2010), Random Data, 4th ed., Wiley, chapter 9 (errors of coherence and phase).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]

MOST_MISSING = 0.1


@dataclass(frozen=True)
class CrossSpectrum:
    """Coherence and phase.

    Attributes
    ----------
    frequency : ndarray, shape (k,)
        Cycles per day, > 0.
    coherence : ndarray, shape (k,)
        Squared coherence γ², 0 to 1.
    phase : ndarray, shape (k,)
        Degrees by which the second series lags the first, −180 to 180.
    phase_error : ndarray, shape (k,)
        Standard error √((1 − γ²)/(2 n_e γ²)) (degrees), NaN where γ² is not significant.
    gain : ndarray, shape (k,)
        Amplitude of the second per amplitude of the first, |S_xy|/S_xx.
    significant : float
        γ² that unrelated series reach in one case of twenty, 1 − 0.05^(1/(n_e − 1)).
    segments : float
        n_e; 0 if the record holds fewer than two segments.
    """

    frequency: Array
    coherence: Array
    phase: Array
    phase_error: Array
    gain: Array
    significant: float
    segments: float


def cross_spectrum(x: Array, y: Array, step: float, segment: float) -> CrossSpectrum:
    """Coherence and phase of two series.

    Parameters
    ----------
    x, y : ndarray, shape (n,)
        Anomalies, NaN where missing.
    step : float
        Days between values.
    segment : float
        Length of a segment (days); sets the resolution 1/segment.

    Returns
    -------
    CrossSpectrum
        Empty if the record holds fewer than two whole segments.
    """
    length = min(max(round(segment / step), 4), x.size)
    kept = _segments(x, y, length)
    n = kept.shape[1]
    if n < 2:
        empty = np.zeros(0)
        return CrossSpectrum(empty, empty, empty, empty, empty, float("nan"), 0.0)
    frequency = np.asarray(np.fft.rfftfreq(length, step)[1:], float)
    window = np.hanning(length + 1)[:-1]
    x_hat, y_hat = np.fft.rfft(kept * window, axis=-1)[..., 1:]
    sxx, syy = (np.mean(np.abs(part) ** 2, axis=0) for part in (x_hat, y_hat))
    sxy = np.mean(x_hat * np.conj(y_hat), axis=0)  # exp(+iφ) where y lags x by φ
    effective = n / (1.0 + (n - 1.0) / n / 18.0)
    coherence = np.abs(sxy) ** 2 / (sxx * syy)
    limit = 1.0 - 0.05 ** (1.0 / max(effective - 1.0, 0.5))
    sure = coherence > limit
    error = np.sqrt((1.0 - coherence) / (2.0 * effective * np.where(sure, coherence, 1.0)))
    return CrossSpectrum(
        frequency, coherence, np.degrees(np.angle(sxy)), np.where(sure, np.degrees(error), np.nan),
        np.abs(sxy) / sxx, limit, effective,
    )


def _segments(x: Array, y: Array, length: int) -> Array:
    """Half-overlapping segments of both series that miss little, shape (2, n, length)."""
    starts = np.arange(0, x.size - length + 1, max(length // 2, 1))
    index = starts[:, None] + np.arange(length)
    both = np.stack([x[index], y[index]])
    missing = np.isnan(both).mean(axis=-1).max(axis=0)
    both = both[:, missing <= MOST_MISSING]
    return np.where(np.isnan(both), 0.0, both)
