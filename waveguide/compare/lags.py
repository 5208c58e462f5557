"""The lag between two series, with an interval that holds it as often as it says.

The lag is that of the highest cross-correlation, refined by a parabola through three values. Both
series are red, gappy and share only a part of what is in them, so the interval comes from a
moving-block bootstrap of the products x(t) y(t + τ): blocks of consecutive t, each longer than
the memory of the products, are drawn with replacement and added, for all lags τ at once; the
highest of every draw is a draw of the lag. Because y is taken from outside the block where t + τ
leaves it, no block edge breaks a lag.

Percentiles of a bootstrap are too narrow where few blocks are drawn from, by √((n−1)/n) and by
the normal in place of Student's distribution; both are put right by taking the percentiles at
Φ(−√(n/(n−1)) t) with t that quantile of Student's distribution with n − 1 degrees of freedom.

References
----------
Künsch (1989), Ann. Stat. 17, 1217 (moving blocks).
Hesterberg (2015), Am. Stat. 69, 371 (widened percentiles).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.stats import norm, t

Array = NDArray[np.float64]

CONFIDENCE = 0.95
DRAWS = 1000


@dataclass(frozen=True)
class Correlation:
    """Cross-correlation of two series.

    Attributes
    ----------
    lag : ndarray, shape (k,)
        Days by which the second series is taken later.
    value : ndarray, shape (k,)
        Correlation coefficient over the pairs both of which are there.
    count : ndarray, shape (k,)
        Number of pairs.
    """

    lag: Array
    value: Array
    count: Array


@dataclass(frozen=True)
class LagEstimate:
    """A lag, its interval, and whether another cycle fits as well.

    Attributes
    ----------
    lag, low, high : float
        Days; the interval is that of `CONFIDENCE`.
    correlation : float
        At the lag.
    blocks : float
        Independent blocks in the record.
    period : float
        Dominant period of the two series (days).
    other_cycle : float
        Share of the draws that lie more than half a period from the lag.
    rival : float
        Lag of the second highest maximum (days), NaN if there is none.
    rival_correlation : float
        Its correlation, NaN if there is none.
    at_edge : bool
        Whether the highest correlation lies at the end of the lags that were searched.
    """

    lag: float
    low: float
    high: float
    correlation: float
    blocks: float
    period: float
    other_cycle: float
    rival: float
    rival_correlation: float
    at_edge: bool


def cross_correlation(x: Array, y: Array, step: float, longest: float) -> Correlation:
    """Correlation of x(t) with y(t + τ) for lags within ± `longest`.

    Parameters
    ----------
    x, y : ndarray, shape (n,)
        NaN where missing; anomalies, so no mean is taken off.
    step : float
        Days between values.
    longest : float
        Days.

    Returns
    -------
    Correlation
    """
    shifts = lag_steps(x.size, step, longest)
    value, count = np.zeros(shifts.size), np.zeros(shifts.size)
    for i, shift in enumerate(shifts):
        a, b = overlap(x, y, int(shift))
        both = np.isfinite(a) & np.isfinite(b)
        a, b = a[both], b[both]
        scale = np.sqrt((a @ a) * (b @ b))
        value[i] = (a @ b) / scale if scale > 0.0 else 0.0
        count[i] = both.sum()
    return Correlation(np.asarray(shifts * step, float), value, count)


def lag_steps(size: int, step: float, longest: float) -> NDArray[np.int64]:
    """Whole steps of lag within ± `longest`, no more than half a series of `size`."""
    most = max(min(int(np.ceil(longest / step)), size // 2), 1)
    return np.arange(-most, most + 1)


def overlap(x: Array, y: Array, shift: int) -> tuple[Array, Array]:
    """x(t) and y(t + shift) where both are defined."""
    if shift >= 0:
        return x[: x.size - shift], y[shift:]
    return x[-shift:], y[: y.size + shift]


def peak(lag: Array, value: Array) -> Array:
    """Lag of the highest value of each row, by a parabola through it and its neighbours.

    Parameters
    ----------
    lag : ndarray, shape (k,)
        Equally spaced.
    value : ndarray, shape (..., k)

    Returns
    -------
    ndarray, shape (...)
    """
    inner = np.clip(np.argmax(value, axis=-1), 1, lag.size - 2)
    before, here, after = (
        np.take_along_axis(value, (inner + k)[..., None], axis=-1)[..., 0] for k in (-1, 0, 1)
    )
    bend = before - 2.0 * here + after
    offset = np.where(bend < 0.0, 0.5 * (before - after) / np.where(bend < 0.0, bend, -1.0), 0.0)
    return np.asarray(lag[inner] + np.clip(offset, -1.0, 1.0) * (lag[1] - lag[0]))


def dominant_period(x: Array, step: float) -> float:
    """Period of the mean square frequency, 2π √(Σ x² / Σ (dx/dt)²) with central differences.

    For a sinusoid of period T central differences give the slope times sin(θ)/θ, θ = 2πΔ/T,
    which is put right.
    """
    slope = (x[2:] - x[:-2]) / 2.0
    both = np.isfinite(slope) & np.isfinite(x[1:-1])
    ratio = np.sqrt(np.sum(slope[both] ** 2) / np.sum(x[1:-1][both] ** 2))
    return float(2.0 * np.pi * step / np.arcsin(min(ratio, 1.0)))


def lag_estimate(
    x: Array, y: Array, step: float, longest: float, block: float, generator: np.random.Generator
) -> LagEstimate:
    """Lag of y behind x.

    Parameters
    ----------
    x, y : ndarray, shape (n,)
        Anomalies in one band, NaN where missing.
    step : float
        Days between values.
    longest : float
        Lags within ± this are searched (days).
    block : float
        Length of a block (days).
    generator : numpy.random.Generator

    Returns
    -------
    LagEstimate
    """
    corr = cross_correlation(x, y, step, longest)
    lag = float(peak(corr.lag, corr.value))
    draws = lag_draws(x, y, step, longest, block, generator)
    blocks = float(corr.count.max()) * step / block
    low, high = widened_percentiles(draws, blocks)
    period = 0.5 * (dominant_period(x, step) + dominant_period(y, step))
    rival, rival_correlation = second_maximum(corr)
    top = int(np.argmax(corr.value))
    return LagEstimate(
        lag=lag, low=min(low, lag), high=max(high, lag), correlation=float(corr.value[top]),
        blocks=blocks, period=period,
        other_cycle=float(np.mean(np.abs(draws - lag) > 0.5 * period)),
        rival=rival, rival_correlation=rival_correlation,
        at_edge=top in (0, corr.lag.size - 1),
    )


def lag_draws(
    x: Array, y: Array, step: float, longest: float, block: float, generator: np.random.Generator
) -> Array:
    """Bootstrap draws of the lag (days), shape (DRAWS,); arguments as for `lag_estimate`."""
    shifts = lag_steps(x.size, step, longest)
    length = max(min(round(block / step), x.size // 2), 1)
    per_draw = max(int(np.ceil(x.size / length)), 2)
    starts = generator.integers(0, x.size, (DRAWS, per_draw))
    mean = np.empty((DRAWS, shifts.size))
    for i, shift in enumerate(shifts):
        product, there = lagged_products(x, y, int(shift))
        total = _block_sums(product, length)[starts].sum(axis=1)
        count = _block_sums(there, length)[starts].sum(axis=1)
        mean[:, i] = total / np.maximum(count, 1.0)
    return peak(np.asarray(shifts * step, float), mean)


def lagged_products(x: Array, y: Array, shift: int) -> tuple[Array, Array]:
    """x(t) y(t + shift) for every t, 0 where one is missing, and whether both are there."""
    product, there = np.zeros(x.size), np.zeros(x.size)
    first, last = max(-shift, 0), min(x.size - shift, x.size)
    pair = x[first:last] * y[first + shift : last + shift]
    known = np.isfinite(pair)
    product[first:last] = np.where(known, pair, 0.0)
    there[first:last] = known
    return product, there


def _block_sums(values: Array, length: int) -> Array:
    """Sum of `length` values from each place on, the record taken as a ring."""
    total = np.concatenate([[0.0], np.cumsum(np.concatenate([values, values[: length - 1]]))])
    return np.asarray(total[length:] - total[:-length])


def widened_percentiles(draws: Array, blocks: float) -> tuple[float, float]:
    """Interval of draws at `CONFIDENCE`, widened for the number of independent blocks."""
    freedom = max(blocks - 1.0, 1.0)
    quantile = t.ppf(0.5 * (1.0 - CONFIDENCE), freedom) * np.sqrt((freedom + 1.0) / freedom)
    share = float(norm.cdf(quantile))
    low, high = np.quantile(draws, [share, 1.0 - share])
    return float(low), float(high)


def second_maximum(corr: Correlation) -> tuple[float, float]:
    """Lag and value of the second highest local maximum, NaN if there is none."""
    value = corr.value
    inner = np.flatnonzero((value[1:-1] > value[:-2]) & (value[1:-1] >= value[2:])) + 1
    inner = inner[inner != np.argmax(value)]
    if not inner.size:
        return float("nan"), float("nan")
    best = int(inner[np.argmax(value[inner])])
    return float(corr.lag[best]), float(value[best])
