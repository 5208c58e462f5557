"""How well a forced response agrees with a record: correlation, variance, lag and slope."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from waveguide.compare.filters import band_pass
from waveguide.compare.lags import lag_estimate
from waveguide.compare.regression import regression


class Skill(NamedTuple):
    """Of a prediction against a record, both in one band.

    Correlation at no lag; share of the record's variance that the prediction takes away as it is;
    lag of the record behind the prediction (days) with its 95 % interval, and the correlation
    there; slope of the record on the prediction with its 95 % interval; number of days.
    """

    correlation: float
    explained: float
    lag: float
    lag_low: float
    lag_high: float
    best: float
    slope: float
    slope_low: float
    slope_high: float
    days: int

    def told(self) -> str:
        return (
            f"r {self.correlation:5.2f}  VE {self.explained:5.2f}  lag {self.lag:4.1f} "
            f"[{self.lag_low:4.1f} {self.lag_high:4.1f}] d, r {self.best:4.2f}  slope "
            f"{self.slope:4.2f} [{self.slope_low:4.2f} {self.slope_high:4.2f}]  n {self.days}"
        )


def anomalies(values: np.ndarray, step: float = 1.0) -> np.ndarray:
    """A series without mean, trend, annual and semi-annual harmonic; NaN where missing."""
    day = np.arange(values.size) * step
    columns = [np.ones(values.size), day / day[-1]]
    for k in (1, 2):
        angle = 2.0 * np.pi * k * day / 365.2425
        columns += [np.cos(angle), np.sin(angle)]
    basis, known = np.stack(columns, axis=1), np.isfinite(values)
    fit = np.linalg.lstsq(basis[known], values[known], rcond=None)[0]
    return values - basis @ fit


def skill(
    predicted: np.ndarray, observed: np.ndarray, band: tuple[float, float] | None,
    use: np.ndarray, step: float = 1.0, longest: float = 15.0,
) -> Skill:
    """Skill over the times `use`; None for no filter."""
    x, y = predicted, observed
    if band is not None:
        x, y = band_pass(predicted, step, band), band_pass(observed, step, band)
    x, y = np.where(use, x, np.nan), np.where(use, y, np.nan)
    both = np.isfinite(x) & np.isfinite(y)
    a, b = x[both], y[both]
    block = 3.0 * (band[1] if band else 60.0)
    lag = lag_estimate(x, y, step, longest, block, np.random.default_rng(1))
    line = regression(x, y, 0)
    return Skill(
        float(np.corrcoef(a, b)[0, 1]), float(1.0 - np.mean((b - a) ** 2) / np.mean(b**2)),
        lag.lag, lag.low, lag.high, lag.correlation, line.slope, line.low, line.high,
        int(both.sum()),
    )
