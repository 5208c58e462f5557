"""Whether two series are related at all, or only as red noise is.

The statistic is the highest correlation within the lags that are searched. Its distribution
without a relation comes from pairs that have none, in one of two ways:

- shifted: one series is turned round by every amount that takes it out of reach of the other.
  Gaps, colour and amplitude stay; needs a record many times longer than the lags.
- scrambled: one series gets random phases at unchanged power, then its gaps back. It gives as many
  pairs as wanted, for a Gaussian process.

References
----------
Theiler, Eubank, Longtin, Galdrikian & Farmer (1992), Physica D 58, 77 (scrambled phases).
Bretherton, Widmann, Dymnikov, Wallace & Bladé (1999), J. Climate 12, 1990 (effective number).
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray
from scipy.ndimage import maximum_filter1d

from waveguide.compare.lags import lag_steps, overlap

Array = NDArray[np.float64]

SCRAMBLED = 400
"""Scrambled pairs."""


def circular_correlation(x: Array, y: Array) -> Array:
    """Correlation of x(t) with y(t + s) for every shift s of a ring, from pairs that are there.

    Parameters
    ----------
    x, y : ndarray, shape (n,)
        NaN where missing.

    Returns
    -------
    ndarray, shape (n,)
        At s = 0, 1, …, n − 1; 0 where less than a tenth of the pairs are there.
    """
    there_x, there_y = np.isfinite(x), np.isfinite(y)
    a, b = np.where(there_x, x, 0.0), np.where(there_y, y, 0.0)
    product = _ring(a, b)
    scale = np.sqrt(np.maximum(_ring(a**2, there_y) * _ring(there_x, b**2), 0.0))
    enough = (_ring(there_x, there_y) > 0.1 * x.size) & (scale > 0.0)
    return np.asarray(np.where(enough, product / np.where(scale > 0.0, scale, 1.0), 0.0))


def _ring(x: NDArray[np.generic], y: NDArray[np.generic]) -> Array:
    """Σ_t x(t) y(t + s) on a ring."""
    spectrum = np.conj(np.fft.rfft(np.asarray(x, float))) * np.fft.rfft(np.asarray(y, float))
    return np.asarray(np.fft.irfft(spectrum, x.size))


def shifted_chance(x: Array, y: Array, step: float, longest: float) -> float:
    """Share of turned pairs whose highest correlation reaches that of the real pair.

    For stationary series without a relation every turn is as likely as the real one to be the
    highest, so this is a p-value, although neighbouring turns are alike.

    Parameters
    ----------
    x, y : ndarray, shape (n,)
        NaN where missing.
    step : float
        Days.
    longest : float
        Lags within ± this are searched (days).

    Returns
    -------
    float
        Between 0 and 1; 1 where the record is too short to be turned out of reach.
    """
    reach = int(lag_steps(x.size, step, longest)[-1])
    highest = maximum_filter1d(circular_correlation(x, y), 2 * reach + 1, mode="wrap")
    away = np.arange(x.size)
    others = highest[(away > 2 * reach) & (away < x.size - 2 * reach)]
    if others.size < 2 * reach:
        return 1.0
    # The ring joins the record's ends; the real pair is measured without that seam.
    real = _highest(x, y, reach)
    return float((1.0 + np.sum(others >= real)) / (1.0 + others.size))


def scrambled_chance(
    x: Array, y: Array, step: float, longest: float, generator: np.random.Generator
) -> float:
    """Share of pairs with scrambled x whose highest correlation reaches that of the real pair.

    Parameters
    ----------
    x, y, step, longest
        As for `shifted_chance`.
    generator : numpy.random.Generator

    Returns
    -------
    float
    """
    reach = int(lag_steps(x.size, step, longest)[-1])
    real = _highest(x, y, reach)
    others = np.empty(SCRAMBLED)
    for i in range(SCRAMBLED):
        ring = circular_correlation(scrambled(x, generator), y)
        others[i] = max(ring[: reach + 1].max(), ring[-reach:].max())
    return float((1.0 + np.sum(others >= real)) / (1.0 + SCRAMBLED))


def scrambled(values: Array, generator: np.random.Generator) -> Array:
    """A series of the same power spectrum with random phases, and the same gaps.

    Gaps are zeros in the transform, which is the mean of anomalies; the power they take out is
    given back.
    """
    there = np.isfinite(values)
    spectrum = np.abs(np.fft.rfft(np.where(there, values, 0.0)))
    phase = generator.uniform(0.0, 2.0 * np.pi, spectrum.size)
    new = np.fft.irfft(spectrum * np.exp(1j * phase), values.size) / np.sqrt(there.mean())
    return np.where(there, new, np.nan)


def _highest(x: Array, y: Array, reach: int) -> float:
    best = -1.0
    for shift in range(-reach, reach + 1):
        a, b = overlap(x, y, shift)
        both = np.isfinite(a) & np.isfinite(b)
        scale = float(np.sqrt((a[both] @ a[both]) * (b[both] @ b[both])))
        if scale > 0.0:
            best = max(best, float(a[both] @ b[both]) / scale)
    return best


def effective_count(x: Array, y: Array) -> float:
    """Number of independent pairs in two autocorrelated series.

    The variance of a sample correlation of unrelated series is Σ_k ρ_x(k) ρ_y(k)/n (Bartlett),
    so n_e = n/Σ_k ρ_x(k) ρ_y(k), k running both ways. The sum ends where the product of the
    autocorrelations of band-passed series has died down: at a fifth of the record.

    Parameters
    ----------
    x, y : ndarray, shape (n,)
        NaN where missing.

    Returns
    -------
    float
        Between 3 and the number of pairs.
    """
    pairs = int(np.sum(np.isfinite(x) & np.isfinite(y)))
    most = max(x.size // 5, 1)
    rho = circular_correlation(_padded(x), _padded(x)) * circular_correlation(
        _padded(y), _padded(y)
    )
    memory = rho[0] + 2.0 * float(rho[1 : most + 1].sum())
    return float(np.clip(pairs / max(memory, 1.0), min(3.0, pairs), pairs))


def _padded(values: Array) -> Array:
    """A series with as many missing values behind it, so that its ring has no seam in reach."""
    return np.concatenate([values, np.full(values.size // 2, np.nan)])
