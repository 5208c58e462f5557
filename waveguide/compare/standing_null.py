"""Distance–time diagrams as noise without direction would draw them.

Noise in the ocean is red in time and alike at neighbouring places, so that some stretch of the
travel times always lines it up to some extent. What it lacks is a direction: its co-spectra may be
anything, its quadrature spectra are zero. That is the null hypothesis here, and it has draws that
keep all else.

Derivation. Let x̂(f) be the Fourier coefficients of all bins at one frequency. For Gaussian
noise, stationary in time, with a real cross-spectral matrix C, Re x̂ and Im x̂ are independent
with covariance C/2 each; so x̂ exp(iφ) and its complex conjugate, with any phase φ common to all
bins, have the distribution of x̂. Coefficients at different frequencies are independent. Hence
each frequency may be given a random phase, and be run backwards or not at the toss of a coin
(conjugate), and the new diagram is as likely as the real one, with its spectra, co-spectra and
patterns in space unchanged. A wave is not of this kind: half of it then runs backwards.

Coefficients of a record that does not close on itself are independent only if it is white. The
redness is therefore taken out first, e_t = x_t − r x_{t−1}, with one r for all bins, and put
back afterwards from the record's own first values on (Kreiss & Paparoditis 2003, Ann. Stat. 31,
1923, MEMORY, for one series; random phases common to all series: Prichard & Theiler 1994, Phys.
Rev. Lett. 73, 951, MEMORY). For noise with the memory r the draws are exact.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray
from scipy.signal import lfilter

Array = NDArray[np.float64]


def unit_anomalies(x: Array) -> Array:
    """Series without mean and trend, at unit variance.

    Parameters
    ----------
    x : ndarray, shape (..., nt)

    Returns
    -------
    ndarray, shape (..., nt)
        Zero where a series is a straight line.
    """
    ramp = np.linspace(-1.0, 1.0, x.shape[-1])
    rest = x - x.mean(axis=-1, keepdims=True)
    rest = rest - (rest @ ramp / (ramp @ ramp))[..., None] * ramp
    spread = rest.std(axis=-1, keepdims=True)
    return np.asarray(rest / np.where(spread > 0.0, spread, 1.0))


def memory(x: Array) -> float:
    """Correlation of neighbouring times, one number for all bins.

    That of the smallest Σ e², e_t = x_t − r x_{t−1}, less its bias: in n values without mean and
    trend it comes out low by (2 + 4r)/n (Tjøstheim & Paulsen 1983, Biometrika 70, 389, MEMORY).

    Parameters
    ----------
    x : ndarray, shape (nbin, nt)
        Anomalies.

    Returns
    -------
    float
        At most 1.
    """
    n = x.shape[-1]
    r = np.sum(x[:, 1:] * x[:, :-1]) / np.sum(x[:, :-1] ** 2)
    return float(min((r + 2.0 / n) / (1.0 - 4.0 / n), 1.0))


def without_direction(x: Array, count: int, generator: np.random.Generator) -> Array:
    """Draws of a diagram under the null hypothesis.

    Parameters
    ----------
    x : ndarray, shape (nbin, nt)
        As measured, without holes: its trend is taken out of the draws once, as it is of x.
    count : int
    generator : numpy.random.Generator

    Returns
    -------
    ndarray, shape (count, nbin, nt)
        Prepared by `unit_anomalies`.
    """
    r = memory(unit_anomalies(x))
    kicks = reversed_at_random(x[:, 1:] - r * x[:, :-1], count, generator)
    first = np.broadcast_to(x[:, :1], (count, len(x), 1))
    return unit_anomalies(lfilter([1.0], [1.0, -r], np.concatenate([first, kicks], axis=-1)))


def reversed_at_random(x: Array, count: int, generator: np.random.Generator) -> Array:
    """Every frequency with a random phase, and backwards in time or not, alike in all bins.

    Parameters
    ----------
    x : ndarray, shape (nbin, nt)
    count : int
    generator : numpy.random.Generator

    Returns
    -------
    ndarray, shape (count, nbin, nt)
    """
    spectrum = np.fft.rfft(x)
    shape = (count, 1, spectrum.shape[-1])
    phase = generator.uniform(0.0, 2.0 * np.pi, shape)
    phase[..., 0] = 0.0
    if x.shape[-1] % 2 == 0:
        phase[..., -1] = 0.0  # the highest frequency is real, as the mean is
    turned = np.where(generator.random(shape) < 0.5, spectrum, np.conj(spectrum))
    return np.fft.irfft(turned * np.exp(1j * phase), x.shape[-1])
