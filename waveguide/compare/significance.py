"""Whether two series are related at all, or only as red noise is.

The statistic is the highest correlation within the lags that are searched. Its distribution
without a relation comes from pairs that have none, in one of two ways:

- shifted: one series is turned round by every amount. Gaps, colour and amplitude stay; needs a
  record many times longer than the lags.
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
from scipy.fft import next_fast_len
from scipy.ndimage import maximum_filter1d

from waveguide.compare.lags import lag_steps, overlap

Array = NDArray[np.float64]

SCRAMBLED = 200
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
    highest, although neighbouring turns are alike. Turns within reach of the real pair see its
    own peak and count as reaching it, so the share is never less than the searched lags' share of
    the record: one in the number of independent windows.

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
        Between 0 and 1.
    """
    reach = int(lag_steps(x.size, step, longest)[-1])
    window = 2 * reach + 1
    if 3 * window > x.size:
        return 1.0
    highest = maximum_filter1d(circular_correlation(x, y), window, mode="wrap")
    others = highest[window : x.size - window]
    # The ring joins the record's ends; the real pair is measured without that seam.
    return float((window + np.sum(others >= _highest(x, y, reach))) / (window + others.size))


def least_shifted_chance(size: int, step: float, longest: float) -> float:
    """The smallest share that `shifted_chance` can give: that of the real pair's own window.

    A record that holds as many independent windows as 1/share can tell nothing rarer.

    Parameters
    ----------
    size : int
        Of the record.
    step, longest : float
        As for `shifted_chance`.

    Returns
    -------
    float
        1 where the record is too short for the test.
    """
    window = 2 * int(lag_steps(size, step, longest)[-1]) + 1
    return 1.0 if 3 * window > size else window / (size - window)


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
    size = next_fast_len(x.size + reach, real=True)  # room for the lags, so no ring closes
    there_x, there_y = np.isfinite(x).astype(float), np.isfinite(y).astype(float)
    b = np.where(there_y > 0.0, y, 0.0)
    a = np.nan_to_num(scrambled(x, SCRAMBLED, generator))
    product = _lagged_sums(a, b, size, reach)
    scale = _lagged_sums(a**2, there_y, size, reach) * _lagged_sums(there_x, b**2, size, reach)
    sound = scale > 0.0
    others = np.where(sound, product / np.sqrt(np.where(sound, scale, 1.0)), 0.0).max(axis=-1)
    return float((1.0 + np.sum(others >= _highest(x, y, reach))) / (1.0 + SCRAMBLED))


def _lagged_sums(x: Array, y: Array, size: int, reach: int) -> Array:
    """Σ_t x(t) y(t + s) for |s| ≤ reach, by rows of x; shape (..., 2 reach + 1)."""
    spectrum = np.conj(np.fft.rfft(x, size, axis=-1)) * np.fft.rfft(y, size)
    ring = np.fft.irfft(spectrum, size, axis=-1)
    return np.concatenate([ring[..., -reach:], ring[..., : reach + 1]], axis=-1)


def scrambled(values: Array, count: int, generator: np.random.Generator) -> Array:
    """Series of the same power spectrum with random phases, and the same gaps.

    Gaps are zeros in the transform, which is the mean of anomalies; the power they take out is
    given back.

    Parameters
    ----------
    values : ndarray, shape (n,)
        NaN where missing.
    count : int
    generator : numpy.random.Generator

    Returns
    -------
    ndarray, shape (count, n)
    """
    there = np.isfinite(values)
    size = next_fast_len(values.size, real=True)
    spectrum = np.abs(np.fft.rfft(np.where(there, values, 0.0), size))
    phase = generator.uniform(0.0, 2.0 * np.pi, (count, spectrum.size))
    new = np.fft.irfft(spectrum * np.exp(1j * phase), size, axis=-1)[:, : values.size]
    return np.asarray(np.where(there, new * np.sqrt(size / there.sum()), np.nan))


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
