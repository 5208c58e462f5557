"""Symmetric filters for series with gaps.

Every kernel is symmetric in time, so none of them shifts a signal, and two series that go through
the same one keep their lag. Over gaps the kernel is normalised by what it finds: the filtered
value is Σ w x / Σ w over the samples that are there.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray
from scipy.signal import fftconvolve

from waveguide.errors import InputError

Array = NDArray[np.float64]

LEAST_COVER = 0.8
"""Share of a kernel's absolute weight that must fall on samples for its value to count."""

KERNEL_PERIODS = 1.5
"""Half-width of a low-pass kernel in cut-off periods: its transition is 2/1.5 of the cut-off
frequency wide, sharp enough to part the bands in use and short enough to live with gaps."""


def low_pass_kernel(step: float, cutoff: float) -> Array:
    """Weights of a low-pass filter, an ideal one tapered by the Lanczos window.

    The ideal low-pass has weights sin(2πf_c k Δ)/(πk); cutting it off leaves Gibbs' ripple, which
    the factor sin(πk/n)/(πk/n) removes by averaging the response over one wavelength of the ripple.

    Parameters
    ----------
    step : float
        Sampling interval Δ.
    cutoff : float
        Period 1/f_c at which the response is one half, in the unit of `step`.

    Returns
    -------
    ndarray, shape (2n + 1,)
        Symmetric, with sum one.

    References
    ----------
    Duchon (1979), J. Appl. Meteorol. 18, 1016.
    """
    half = int(np.ceil(KERNEL_PERIODS * cutoff / step))
    k = np.arange(-half, half + 1)
    weights = np.sinc(2.0 * k * step / cutoff) * np.sinc(k / (half + 1.0))
    return np.asarray(weights / weights.sum())


def godin_kernel() -> Array:
    """Weights that remove tides from hourly values: running means over 24, 24 and 25 hours.

    The means are zero at every harmonic of 24 h and 25 h, between which the diurnal and (halved)
    the semidiurnal tides lie; the product is symmetric and 71 hours long. It passes 0.25 of the
    amplitude at 2 days, 0.56 at 3, 0.81 at 5 and 0.95 at 10, the same for every series.

    Returns
    -------
    ndarray, shape (71,)

    References
    ----------
    Godin (1972), The Analysis of Tides, University of Toronto Press.
    """
    day = np.full(24, 1.0 / 24.0)
    return np.convolve(np.convolve(day, day), np.full(25, 1.0 / 25.0))


def response(kernel: Array, step: float, period: Array) -> Array:
    """Amplitude response Σ w_k cos(2πkΔ/T) of a symmetric kernel at periods T."""
    half = kernel.size // 2
    k = np.arange(-half, half + 1)
    return np.asarray(np.cos(2.0 * np.pi * step * k / np.asarray(period)[..., None]) @ kernel)


def smooth(values: Array, kernel: Array) -> Array:
    """A filtered series, NaN where too little of the kernel finds samples.

    Parameters
    ----------
    values : ndarray, shape (n,)
        NaN where missing.
    kernel : ndarray, shape (2m + 1,)

    Returns
    -------
    ndarray, shape (n,)
    """
    known = np.isfinite(values)
    there = known.astype(float)
    weight = _convolve(there, kernel)
    cover = _convolve(there, np.abs(kernel)) / np.abs(kernel).sum()
    total = _convolve(np.where(known, values, 0.0), kernel)
    # With negative lobes Σ w may vanish over odd gaps; such values are not used either.
    sound = (cover >= LEAST_COVER) & (weight > 0.5)
    return np.where(sound, total / np.where(sound, weight, 1.0), np.nan)


def band_pass(values: Array, step: float, band: tuple[float, float]) -> Array:
    """The part of a series between two periods, NaN where values are missing.

    Parameters
    ----------
    values : ndarray, shape (n,)
        NaN where missing.
    step : float
        Sampling interval.
    band : (shortest, longest)
        Periods of half response, in the unit of `step`.

    Returns
    -------
    ndarray, shape (n,)

    Raises
    ------
    InputError
        If the band is empty or finer than the sampling.
    """
    shortest, longest = band
    if not 2.0 * step <= shortest < longest:
        raise InputError(
            f"band {shortest:g} to {longest:g} days: it must rise, and start at two sampling "
            f"intervals ({2.0 * step:g} days) or more"
        )
    slow = smooth(values, low_pass_kernel(step, longest))
    fast = values if shortest <= 2.0 * step else smooth(values, low_pass_kernel(step, shortest))
    return np.where(np.isfinite(values), fast - slow, np.nan)


def _convolve(values: Array, kernel: Array) -> Array:
    """Centred convolution of the length of `values`, zero outside."""
    half = kernel.size // 2
    return np.asarray(fftconvolve(values, kernel)[half : half + values.size])
