"""How strong the second series is for a given first one."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.stats import t

from waveguide.compare.lags import CONFIDENCE, overlap
from waveguide.compare.significance import effective_count

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Regression:
    """y(t + lag) = slope x(t) + rest.

    Attributes
    ----------
    slope, low, high : float
        With the interval of `CONFIDENCE`.
    correlation : float
    effective : float
        Effective number of independent pairs.
    """

    slope: float
    low: float
    high: float
    correlation: float
    effective: float


def regression(x: Array, y: Array, shift: int) -> Regression:
    """Least-squares slope of y(t + shift) on x(t).

    Noise in x lowers the slope by the share of noise in the variance of x: it is a lower bound of
    the amplitude ratio of the signal that both have in common. The variance of the slope is that
    of the rest by that of x over the effective number of pairs less two.

    Parameters
    ----------
    x, y : ndarray, shape (n,)
        Anomalies, NaN where missing.
    shift : int
        Steps by which y is taken later.

    Returns
    -------
    Regression
    """
    a, b = overlap(x, y, shift)
    effective = effective_count(a, b)
    both = np.isfinite(a) & np.isfinite(b)
    a, b = a[both], b[both]
    power = float(a @ a)
    slope = float(a @ b) / power
    correlation = float(a @ b) / float(np.sqrt(power * (b @ b)))
    rest = float(np.mean((b - slope * a) ** 2)) / float(np.mean(a**2))
    freedom = max(effective - 2.0, 1.0)
    half = float(t.ppf(0.5 * (1.0 + CONFIDENCE), freedom)) * float(np.sqrt(rest / freedom))
    return Regression(slope, slope - half, slope + half, correlation, effective)
